"""The conventional cell whose axes the report uses, with its operations and atoms.

By default these are the axes of the input cell when it is a conventional cell of its space group, else those of the
standardised cell. A setting asked for by its symbol is reached by changing the basis.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import permutations, product

import numpy as np

from sitesym.errors import UsageError
from sitesym.groups.operation import Booleans, Floats, Integers
from sitesym.symmetry.library import Search, Setting, setting, setting_operations, settings_of

_IDENTITY = np.eye(3, dtype=np.int64)
_CODE = 3 ** np.arange(9)
_STEPS = np.array(list(product((-2, -1, 0, 1, 2), repeat=3)), dtype=float)


@dataclass(frozen=True, eq=False)
class Cell:
    """A conventional cell in a tabulated setting.

    metric        (3, 3) Å², averaged over the group.
    rotations     (m, 3, 3) integers and translations (m, 3): x -> W x + t, centring translations included.
    positions     (n, 3) fractional, one atom for each atom of the primitive cell.
    atoms         (n,) index of each in the input structure.
    setting       the tabulated setting whose axes these are.
    to_standard   (3, 3) matrix P and (3,) shift p: x -> P x + p gives coordinates in the standardised cell.
    choice        "input", "standard" or "setting": why this cell.
    """

    metric: Floats
    rotations: Integers
    translations: Floats
    positions: Floats
    atoms: Integers
    setting: Setting
    to_standard: tuple[Floats, Floats]
    choice: str

    @property
    def centring_vectors(self) -> Floats:
        """(k, 3) translations of the lattice points in the cell, (0, 0, 0) included."""
        return np.asarray(self.translations[(self.rotations == _IDENTITY).all(axis=(1, 2))])

    def rebased(self, change: Integers, target: Setting) -> Cell:
        """The same crystal in the basis (a, b, c) @ change, a matrix of determinant 1."""
        inverse = np.rint(np.linalg.inv(change)).astype(np.int64)
        return Cell(
            change.T @ self.metric @ change,
            inverse @ self.rotations @ change,
            self.translations @ inverse.T,
            self.positions @ inverse.T,
            self.atoms,
            target,
            (self.to_standard[0] @ change, self.to_standard[1]),
            "setting",
        )


def choose_cell(lattice: Floats, fractional: Floats, found: Search, axes: str, symbol: str | None) -> Cell:
    """The cell for `axes` ("auto", "input" or "standard") and for a setting's Hermann-Mauguin symbol, if given.

    Raises UsageError when the input cell is asked for but is not conventional, or the symbol is no setting of it.
    """
    cell = None if axes == "standard" else _input_cell(lattice, fractional, found)
    if cell is None and axes == "input":
        raise UsageError(
            f"The input cell is not a conventional cell of space group {found.number}.",
            "Use --axes standard, or give the structure in a conventional cell.",
        )
    cell = cell or _standard_cell(found)
    return cell if symbol is None else _in_setting(cell, symbol)


def _input_cell(lattice: Floats, fractional: Floats, found: Search) -> Cell | None:
    """The input cell, if its operations are those of a tabulated setting (but not one with rhombohedral axes)."""
    if abs(abs(np.linalg.det(found.transformation)) - 1) > 1e-3:
        return None
    matched = match_setting(found.rotations, found.translations, found.number)
    if matched is None or matched.choice == "R":
        return None
    _, first = np.unique(found.primitive_of, return_index=True)
    chosen = np.sort(first)
    metric = _averaged(lattice @ lattice.T, found.rotations)
    positions = fractional[chosen]
    to_standard = found.transformation, found.shift
    return Cell(metric, found.rotations, found.translations, positions, chosen, matched, to_standard, "input")


def _standard_cell(found: Search) -> Cell:
    rotations, translations = setting_operations(found.hall_number)
    _, first = np.unique(found.standard_primitive_of, return_index=True)
    _, source = np.unique(found.primitive_of, return_index=True)
    order = np.argsort(source)
    metric = _averaged(found.standard_lattice @ found.standard_lattice.T, rotations)
    positions = found.standard_positions[first[order]]
    same = np.eye(3), np.zeros(3)
    tabulated = setting(found.hall_number)
    return Cell(metric, rotations, translations, positions, source[order], tabulated, same, "standard")


def _averaged(metric: Floats, rotations: Integers) -> Floats:
    """Metric tensor averaged over the point operations, so that these are orthogonal to machine precision."""
    unique = rotations[np.unique(_codes(rotations), return_index=True)[1]]
    return np.asarray(np.einsum("gji,jk,gkl->il", unique, metric, unique) / len(unique))


def _codes(rotations: Integers) -> Integers:
    """One integer for each matrix with elements -1, 0, 1; others (skewed cells) fall outside and match nothing."""
    flat = rotations.reshape(-1, 9)
    return np.where(np.abs(flat).max(axis=1) <= 1, (flat + 1) @ _CODE, -1 - (np.abs(flat) @ 5 ** np.arange(9)))


def match_setting(rotations: Integers, translations: Floats, number: int) -> Setting | None:
    """The tabulated setting with these axes; the origin may differ from the tabulated one.

    Rotation parts and centring must be the same, and every screw and glide part (International Tables A, 1.2.2).
    """
    matched = [one for one in settings_of(number) if _same_axes(rotations, translations, *_operations(one))]
    exact = (one for one in matched if _same_origin(rotations, translations, *_operations(one)))
    return next(exact, matched[0] if matched else None)


def _operations(one: Setting) -> tuple[Integers, Floats]:
    return setting_operations(one.hall_number)


def _same_origin(rotations: Integers, translations: Floats, others: Integers, other_translations: Floats) -> bool:
    """Whether every operation is there as tabulated, its translation included (lattice translations aside)."""
    same = (_codes(rotations)[:, None] == _codes(others)[None]) & _near_integers(
        translations[:, None] - other_translations[None]
    )
    return bool(same.any(axis=1).all())


def _same_axes(rotations: Integers, translations: Floats, others: Integers, other_translations: Floats) -> bool:
    if len(rotations) != len(others):
        return False
    codes, first = np.unique(_codes(rotations), return_index=True)
    other_codes, second = np.unique(_codes(others), return_index=True)
    if not np.array_equal(codes, other_codes):
        return False
    centring = translations[(rotations == _IDENTITY).all(axis=(1, 2))]
    other = other_translations[(others == _IDENTITY).all(axis=(1, 2))]
    if not _near_integers(centring[:, None] - other[None]).any(axis=1).all():
        return False
    lattice = (_STEPS[:, None] + centring[None]).reshape(-1, 3)
    shifts = translations[first] - other_translations[second]
    return all(
        _is_lattice_part(rotation, shift, lattice) for rotation, shift in zip(rotations[first], shifts, strict=True)
    )


def _near_integers(values: Floats) -> Booleans:
    return np.asarray(np.abs(values - np.rint(values)).max(axis=-1) < 0.02)


def _is_lattice_part(rotation: Integers, shift: Floats, lattice: Floats) -> bool:
    """Whether the part of `shift` that no choice of origin can remove is that of a lattice translation."""
    powers = [_IDENTITY]
    while not np.array_equal(nxt := rotation @ powers[-1], _IDENTITY):
        powers.append(nxt)
    kept = np.sum(powers, axis=0) / len(powers)
    return bool((np.abs(kept @ (shift - np.rint(shift)) - lattice @ kept.T).max(axis=1) < 0.02).any())


def _in_setting(cell: Cell, symbol: str) -> Cell:
    wanted = _squeezed(symbol)
    targets = [one for one in settings_of(cell.setting.number) if wanted in _names(one) and one.choice != "R"]
    if not targets:
        known = ", ".join(dict.fromkeys(one.full for one in settings_of(cell.setting.number)))
        raise UsageError(f"'{symbol}' is no setting of space group {cell.setting.number}.", f"Settings known: {known}.")
    for change in _changes_of_basis():
        for target in targets:
            candidate = cell.rebased(change, target)
            if match_setting(candidate.rotations, candidate.translations, target.number) in targets:
                return candidate
    raise UsageError(
        f"The cell cannot be brought to '{symbol}' without changing its volume.", "Choose another setting."
    )


def _names(one: Setting) -> set[str]:
    return {_squeezed(one.short), _squeezed(one.full), _squeezed(one.hall)}


def _squeezed(symbol: str) -> str:
    return symbol.replace(" ", "").replace("_", "").lower()


def _changes_of_basis() -> Iterator[Integers]:
    """Proper changes of basis between settings: permutations with signs first, then all of small elements."""
    yield _IDENTITY
    signed = [
        np.array([[sign if row == order[column] else 0 for column, sign in enumerate(signs)] for row in range(3)])
        for order in permutations(range(3))
        for signs in product((1, -1), repeat=3)
    ]
    yield from (matrix for matrix in signed if round(np.linalg.det(matrix)) == 1)
    for elements in product((0, 1, -1), repeat=9):
        matrix = np.array(elements).reshape(3, 3)
        if abs(matrix).sum() > 3 and round(np.linalg.det(matrix)) == 1:
            yield matrix
