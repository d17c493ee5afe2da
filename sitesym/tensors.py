"""Raman tensors and polar directions of every species, found by projection in the group's Cartesian axes.

A tensor that belongs to component k of a species obeys  R T_k Rᵀ = Σ_j T_j D_jk(R)  for every operation R with matrix
D(R) of the species. All solutions form a linear space; its basis is chosen so that each free parameter (a, b, c, …) is
an element of the first component where it can be, taken in the order xx, yy, zz, xy, xz, yz. That gives the shapes in
the usual table (Loudon, Adv. Phys. 13, 423, 1964, and erratum 14, 621, 1965).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from sitesym.groups.irreps import Representation
from sitesym.groups.operation import Floats, determinants
from sitesym.groups.point_group import PointGroup

_PLACES = ((0, 0), (1, 1), (2, 2), (0, 1), (0, 2), (1, 2))
_ZERO = 1e-7


@dataclass(frozen=True, eq=False)
class TensorComponent:
    """One component of a species.

    basis  (k, 3, 3) symmetric; the Raman tensor is the sum of letter times basis over the k letters.
    polar  (3,) unit vector along which the component's dipole points, or None; for species whose dipole direction
           symmetry leaves free (a plane or all space) the first of `TensorSpecies.polar_space`.
    """

    basis: Floats
    polar: Floats | None

    def tensor(self, values: Floats) -> Floats:
        """The (3, 3) tensor for given values (k,) of the letters, which may be complex."""
        return np.asarray(np.tensordot(values, self.basis, axes=1))


@dataclass(frozen=True, eq=False)
class TensorSpecies:
    """All components of one species.

    letters        names of the free elements of the symmetric tensor, in order.
    antisymmetric  combinations such as `xy-yx` that the antisymmetric part may have (in resonance).
    polar_space    (m, 3) orthonormal directions that the dipole of the first component may mix; m = 1 where its
                   direction is fixed.
    """

    label: str
    letters: tuple[str, ...]
    components: tuple[TensorComponent, ...]
    antisymmetric: tuple[str, ...]
    polar_space: Floats


@lru_cache(maxsize=256)
def tensor_species(group: PointGroup) -> tuple[TensorSpecies, ...]:
    """Tensors and polar directions of every species; letters run on from one species to the next."""
    result: list[TensorSpecies] = []
    used = 0
    for one in group.species:
        found = _of_species(one, group.matrices, used)
        used += len(found.letters)
        result.append(found)
    return tuple(result)


def _of_species(one: Representation, matrices: Floats, used: int) -> TensorSpecies:
    symmetric = _solutions(one.matrices, _on_symmetric(matrices))
    if one.norm == 2 and _is_diagonal(symmetric):
        symmetric = _cubic_pair(symmetric)
    polar = _solutions(one.matrices, matrices)
    axial = _solutions(one.matrices, matrices * determinants(matrices)[:, None, None])
    letters = tuple("abcdefghijklmnopqrstuvwxyz"[used + k] for k in range(len(symmetric)))
    components = tuple(
        TensorComponent(_as_tensors(symmetric[:, k]), _unit(polar[0, k]) if len(polar) else None)
        for k in range(one.dimension)
    )
    return TensorSpecies(one.label, letters, components, _antisymmetric(axial), _polar_space(polar))


def _solutions(irrep: Floats, carrier: Floats) -> Floats:
    """Basis of all sets of partners: (m, d, v) arrays X with carrier(R) X_k = Σ_j X_j irrep(R)_jk."""
    count, d, v = len(irrep), irrep.shape[1], carrier.shape[1]
    invariant = np.einsum("gij,gkl->ikjl", irrep, carrier).reshape(d * v, d * v) / count
    return _reduced_rows(invariant.T).reshape(-1, d, v)


def _is_diagonal(symmetric: Floats) -> bool:
    return len(symmetric) == 2 and not np.abs(symmetric[..., 3:]).any()


def _cubic_pair(symmetric: Floats) -> Floats:
    """E of T and Th in Loudon's shape: b on diag(1, 1, -2), c on √3 diag(1, -1, 0) of the first component."""
    first = symmetric[:, 0]
    measured = np.array([first[:, 2], first[:, 0] - first[:, 1]])
    wanted = np.diag([-2.0, 2 * np.sqrt(3)])
    return np.asarray(np.einsum("nm,mdv->ndv", (np.linalg.inv(measured) @ wanted).T, symmetric))


def _reduced_rows(matrix: Floats) -> Floats:
    """Reduced row echelon form without zero rows."""
    rows = matrix.copy()
    rank = 0
    for column in range(rows.shape[1]):
        if rank == len(rows):
            break
        pivot = rank + int(np.argmax(np.abs(rows[rank:, column])))
        if abs(rows[pivot, column]) < _ZERO:
            continue
        rows[[rank, pivot]] = rows[[pivot, rank]]
        rows[rank] /= rows[rank, column]
        others = np.arange(len(rows)) != rank
        rows[others] -= rows[others, column][:, None] * rows[rank]
        rank += 1
    return np.where(np.abs(rows[:rank]) < _ZERO, 0.0, rows[:rank])


def _on_symmetric(matrices: Floats) -> Floats:
    """Action on the six elements xx, yy, zz, xy, xz, yz of a symmetric tensor, shape (n, 6, 6)."""
    action = np.zeros((len(matrices), 6, 6))
    for column, (k, m) in enumerate(_PLACES):
        image = matrices[:, :, k][:, :, None] * matrices[:, :, m][:, None, :]
        if k != m:
            image = image + image.transpose(0, 2, 1)
        for row, (i, j) in enumerate(_PLACES):
            action[:, row, column] = image[:, i, j]
    return action


def _as_tensors(rows: Floats) -> Floats:
    tensors = np.zeros((len(rows), 3, 3))
    for column, (i, j) in enumerate(_PLACES):
        tensors[:, i, j] = tensors[:, j, i] = rows[:, column]
    return tensors


def _unit(vector: Floats) -> Floats:
    return np.asarray(vector / np.linalg.norm(vector))


def _polar_space(polar: Floats) -> Floats:
    if not len(polar):
        return np.zeros((0, 3))
    return np.array([_unit(solution[0]) for solution in polar])


def _antisymmetric(axial: Floats) -> tuple[str, ...]:
    """An axial vector along z stands for the antisymmetric tensor xy-yx, and so on round."""
    names = ("yz-zy", "zx-xz", "xy-yx")
    present = np.abs(axial).max(axis=(0, 1)) > _ZERO if len(axial) else np.zeros(3, dtype=bool)
    return tuple(name for name, there in zip(names, present, strict=True) if there)


def element_expressions(component: TensorComponent, letters: tuple[str, ...]) -> tuple[tuple[str, ...], ...]:
    """The (3, 3) elements written in letters: `a`, `-c`, `√3b`, `a+b`; empty strings where the element is zero."""
    return tuple(tuple(_expression(component.basis[:, i, j], letters) for j in range(3)) for i in range(3))


def _expression(coefficients: Floats, letters: tuple[str, ...]) -> str:
    terms = [_term(value, letter) for value, letter in zip(coefficients, letters, strict=True) if abs(value) > _ZERO]
    joined = "".join(term if term.startswith("-") else f"+{term}" for term in terms)
    return joined.removeprefix("+")


def _term(value: float, letter: str) -> str:
    sign, size = ("-" if value < 0 else ""), abs(value)
    for root, symbol in ((1.0, ""), (np.sqrt(3), "√3")):
        for divisor in (1, 2):
            multiple = size / root * divisor
            if abs(multiple - round(multiple)) < 1e-6:
                number = "" if round(multiple) == 1 else str(round(multiple))
                return f"{sign}{number}{symbol}{letter}" + (f"/{divisor}" if divisor > 1 else "")
    return f"{sign}{size:.4f}{letter}"
