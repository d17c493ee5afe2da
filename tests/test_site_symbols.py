"""Site groups of every Wyckoff position of all 230 space groups against International Tables A, as spglib stores them.

Every special position is reached as the fixed set of an operation, or as an intersection of two such sets, found from
the tabulated operations alone. International Tables A list 1731 Wyckoff positions: that none is missed is checked.
"""

from __future__ import annotations

from functools import lru_cache

import numpy as np
import pytest
import spglib

from sitesym.structure import Occupant, Site, Structure
from sitesym.symmetry.crystal import find_symmetry
from sitesym.symmetry.site_symbol import oriented_symbol

GENERAL = np.array([0.1372, 0.2113, 0.3191])
OTHER = np.array([0.0713, 0.3377, 0.1519])


def first_halls() -> dict[int, int]:
    """Number of a space group -> Hall number of its standard setting."""
    found: dict[int, int] = {}
    for hall in range(1, 531):
        found.setdefault(spglib.get_spacegroup_type(hall).number, hall)
    return found


HALLS = first_halls()


def metric_cell(number: int) -> np.ndarray:
    """A cell with the metric of the crystal system and no more."""
    if number < 3:
        return np.array([[10.4, 0, 0], [1.2, 12.4, 0], [1.5, 1.9, 14.0]])
    if number < 16:
        return np.array([[10.4, 0, 0], [0, 12.4, 0], [-2.2, 0, 14.0]])
    if number < 75:
        return np.diag([10.4, 12.4, 14.0])
    if number < 143:
        return np.diag([10.4, 10.4, 14.0])
    if number < 195:
        return np.array([[10.4, 0, 0], [-5.2, 10.4 * 3**0.5 / 2, 0], [0, 0, 14.0]])
    return np.eye(3) * 10.4


def fixed_sets(rotations: np.ndarray, translations: np.ndarray) -> list[np.ndarray]:
    """Affine conditions A x = b (rows [A | b]) for the points that an operation, with a lattice translation, keeps."""
    steps = np.array(np.meshgrid(*[[-1, 0, 1]] * 3)).reshape(3, -1).T
    conditions: dict[bytes, np.ndarray] = {}
    for rotation, translation in zip(rotations, translations, strict=True):
        matrix = rotation - np.eye(3)
        if not matrix.any():
            continue
        for step in steps:
            b = -(translation + step)
            x = np.linalg.pinv(matrix) @ b
            if np.abs(matrix @ x - b).max() < 1e-9:
                projector = np.linalg.pinv(matrix) @ matrix
                row = np.column_stack([projector, projector @ x])
                conditions.setdefault(np.round(row, 6).tobytes(), row)
    return list(conditions.values())


def special_points(rotations: np.ndarray, translations: np.ndarray, rng: np.random.Generator) -> np.ndarray:
    """One point with free parameters at random for every stabiliser that the fixed sets and their meets produce."""
    sets = np.array(fixed_sets(rotations, translations)).reshape(-1, 3, 4)
    if not len(sets):
        return np.zeros((0, 3))
    first, second = np.triu_indices(len(sets))
    stacked = np.concatenate([sets[first], sets[second]], axis=1)
    inverse = np.linalg.pinv(stacked[..., :3], rcond=1e-9)
    meets = np.einsum("nij,nj->ni", inverse, stacked[..., 3])
    consistent = np.abs(np.einsum("nij,nj->ni", stacked[..., :3], meets) - stacked[..., 3]).max(axis=1) < 1e-9
    free = np.eye(3) - np.einsum("nij,njk->nik", inverse, stacked[..., :3])
    points = (meets + free @ (rng.random(3) * 0.21 + 0.06))[consistent]
    return points[np.all((points > -0.51) & (points < 1.01), axis=1)]


def one_per_stabiliser(points: np.ndarray, rotations: np.ndarray, translations: np.ndarray) -> list[np.ndarray]:
    """One point for each class of conjugate stabilisers."""
    kept: dict[bytes, np.ndarray] = {}
    known: set[bytes] = set()
    for start in range(0, len(points), 2000):
        part = np.mod(points[start : start + 2000] + 1e-9, 1) - 1e-9
        for point, key in zip(part, stabiliser_keys(part, rotations, translations), strict=True):
            if key not in known:
                known.add(key)
                kept[key] = point
    chosen: list[np.ndarray] = []
    known.clear()
    for key, point in kept.items():
        if key not in known:
            images = np.mod(rotations @ point + translations + 1e-9, 1) - 1e-9
            known.update(stabiliser_keys(images, rotations, translations))
            chosen.append(point)
    return chosen


def stabiliser_keys(points: np.ndarray, rotations: np.ndarray, translations: np.ndarray) -> list[bytes]:
    """Which operations keep each point, and with which lattice translation."""
    away = np.einsum("gij,nj->ngi", rotations, points) + translations - points[:, None]
    steps = np.rint(away)
    fixed = np.abs(away - steps).max(axis=2) < 1e-6
    codes = np.where(fixed, ((steps + 4) @ np.array([1, 9, 81])).astype(np.int16), -1).astype(np.int16)
    return [code.tobytes() for code in codes]


def orbit(point: np.ndarray, rotations: np.ndarray, translations: np.ndarray) -> np.ndarray:
    images = np.mod(rotations @ point + translations, 1)
    kept: list[np.ndarray] = []
    for image in images:
        away = image - np.array(kept).reshape(-1, 3)
        if not kept or np.abs(away - np.rint(away)).max(axis=1).min() > 1e-5:
            kept.append(image)
    return np.array(kept)


def checked_letters(number: int) -> set[str]:
    """Compare every special position of one space group; returns the Wyckoff letters met."""
    database = spglib.get_symmetry_from_database(HALLS[number])
    rotations, translations = database["rotations"], database["translations"]
    lattice, general = metric_cell(number), orbit(GENERAL, rotations, translations)
    points = special_points(rotations, translations, np.random.default_rng(number))
    letters: set[str] = set()
    for point in one_per_stabiliser(points, rotations, translations):
        special = orbit(point, rotations, translations)
        kinds = [0] * len(special) + [1] * len(general)
        positions = np.vstack([special, general])
        witness = spglib.get_symmetry_dataset((lattice, positions, kinds), symprec=1e-4)
        if witness.number != number or witness.wyckoffs[0] in letters:
            continue
        letters.add(witness.wyckoffs[0])
        compare(number, lattice, positions, kinds, witness)
        letters.add(witness.wyckoffs[-1])
    return letters or {"a"}


def compare(number: int, lattice: np.ndarray, positions: np.ndarray, kinds: list[int], witness: object) -> None:
    sites = tuple(Site("AB"[kind], (Occupant("AB"[kind]),)) for kind in kinds)
    symmetry = find_symmetry(Structure(lattice, positions, sites), 1e-4, axes="standard")
    row = next(one for one in symmetry.orbits if sites[one.site].label == "A")
    special = [i for i, site in enumerate(symmetry.atoms) if sites[site].label == "A"]
    symbols = {
        oriented_symbol(
            symmetry.factor_group.subgroup(np.flatnonzero(symmetry.fixed[:, atom])), symmetry.lattice, number
        )
        for atom in special
    }
    assert witness.site_symmetry_symbols[0] in symbols, (number, witness.wyckoffs[0], symbols)
    assert len({symbol.replace(".", "") for symbol in map(sorted_places, symbols)}) == 1
    assert row.wyckoff == witness.wyckoffs[0]
    assert row.multiplicity == kinds.count(0)


def sorted_places(symbol: str) -> str:
    """Which of two equivalent directions carries which element depends on the representative: `m2m.` and `mm2.`."""
    return "".join(sorted(symbol))


LETTERS = "abcdefghijklmnopqrstuvwxyzA"


@pytest.mark.parametrize("block", range(8))
def test_every_wyckoff_position_has_the_site_group_of_international_tables(block: int) -> None:
    """Letter, multiplicity and oriented symbol; the general position's letter tells how many there must be."""
    for number in range(1, 231):
        if number % 8 == block:
            assert checked_letters(number) == set(LETTERS[: len(general_letters()[number])]), number


def test_there_are_1731_wyckoff_positions() -> None:
    """International Tables A: the count over all 230 groups, from the letters of the general positions."""
    assert sum(len(letters) for letters in general_letters().values()) == 1731


@lru_cache(maxsize=1)
def general_letters() -> dict[int, str]:
    """Number of a space group -> all letters up to that of its general position."""
    found: dict[int, str] = {}
    for number, hall in HALLS.items():
        database = spglib.get_symmetry_from_database(hall)
        orbits = [orbit(point, database["rotations"], database["translations"]) for point in (GENERAL, OTHER)]
        kinds = [kind for kind, positions in enumerate(orbits) for _ in positions]
        witness = spglib.get_symmetry_dataset((metric_cell(number), np.vstack(orbits), kinds), symprec=1e-4)
        assert witness.number == number
        found[number] = LETTERS[: LETTERS.index(witness.wyckoffs[0]) + 1]
    return found
