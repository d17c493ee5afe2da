"""How the space group found depends on the tolerance, and how far the crystal is from the next supergroup."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.errors import SitesymError
from sitesym.groups.operation import Floats, Integers
from sitesym.structure import Structure
from sitesym.symmetry.crystal import CrystalSymmetry
from sitesym.symmetry.library import Search, search, setting

GRID = (1e-4, 3e-4, 1e-3, 3e-3, 1e-2, 3e-2, 1e-1)
"""Å. Seven tolerances over three decades; with one of the user's own that is at most eight searches."""

_OPERATIONS_TRIED = 8
_ROWS_AT_ONCE = 200


@dataclass(frozen=True, slots=True)
class ScanPoint:
    """The space group at one tolerance (Å); number None where the search failed."""

    tolerance: float
    number: int | None
    symbol: str


@dataclass(frozen=True, slots=True)
class Supergroup:
    """A larger group that appears at a larger tolerance.

    displacement  Å: the largest distance between an atom's image under a gained operation and the atom it should meet.
    strain        the largest relative change of the metric, per unit length, under a gained operation.
    """

    number: int
    symbol: str
    tolerance: float
    displacement: float
    strain: float


@dataclass(frozen=True, slots=True)
class Scan:
    """All points in order of tolerance, the range over which the reported group stays, and the next supergroup."""

    points: tuple[ScanPoint, ...]
    plateau: tuple[float, float]
    supergroup: Supergroup | None


def scan_tolerance(symmetry: CrystalSymmetry) -> Scan:
    """Repeat the search of the space group over the grid of tolerances."""
    structure, base = symmetry.structure, symmetry.search
    searches = {tolerance: _try(structure, tolerance) for tolerance in GRID if tolerance != symmetry.tolerance}
    searches[symmetry.tolerance] = base
    ordered = sorted(searches.items())
    points = tuple(_point(tolerance, found) for tolerance, found in ordered)
    plateau = _plateau(ordered, symmetry.tolerance, symmetry.number)
    return Scan(points, plateau, _supergroup(structure, ordered, symmetry))


def _try(structure: Structure, tolerance: float) -> Search | None:
    try:
        return search(*structure.right_handed, structure.kinds, tolerance)
    except SitesymError:
        return None


def _point(tolerance: float, found: Search | None) -> ScanPoint:
    if found is None:
        return ScanPoint(tolerance, None, "none found")
    return ScanPoint(tolerance, found.number, setting(found.hall_number).symbol)


def _plateau(ordered: list[tuple[float, Search | None]], tolerance: float, number: int) -> tuple[float, float]:
    same = [found is not None and found.number == number for _, found in ordered]
    low = high = [value for value, _ in ordered].index(tolerance)
    while low > 0 and same[low - 1]:
        low -= 1
    while high + 1 < len(same) and same[high + 1]:
        high += 1
    return ordered[low][0], ordered[high][0]


def _supergroup(
    structure: Structure, ordered: list[tuple[float, Search | None]], symmetry: CrystalSymmetry
) -> Supergroup | None:
    for tolerance, found in ordered:
        if tolerance <= symmetry.tolerance or found is None or found.number == symmetry.number:
            continue
        if _per_atom(found) > _per_atom(symmetry.search):
            displacement, strain = _residual(structure, found, symmetry.search)
            return Supergroup(found.number, setting(found.hall_number).symbol, tolerance, displacement, strain)
    return None


def _per_atom(found: Search) -> float:
    """Operations for each atom of the primitive cell: larger for the larger group, however the cell is chosen."""
    return found.order / (int(found.primitive_of.max()) + 1)


def _residual(structure: Structure, found: Search, base: Search) -> tuple[float, float]:
    gained = _gained(found, base)
    rotations, translations = found.rotations[gained], found.translations[gained]
    displacement = max(
        _mismatch(structure, rotation, translation)
        for rotation, translation in zip(rotations, translations, strict=True)
    )
    return displacement, _strain(structure, rotations)


def _strain(structure: Structure, rotations: Integers) -> float:
    metric = structure.lattice @ structure.lattice.T
    change = np.swapaxes(rotations, 1, 2) @ metric @ rotations - metric
    scale = np.sqrt(np.outer(np.diag(metric), np.diag(metric)))
    return float(np.abs(change / scale).max(initial=0.0) / 2)


def _gained(found: Search, base: Search) -> Integers:
    """A few operations of the larger group that the smaller one lacks (compared by rotation, then translation)."""
    known = {(rotation.tobytes()) for rotation in base.rotations}
    new = [index for index, rotation in enumerate(found.rotations) if rotation.tobytes() not in known]
    chosen = new or list(range(len(found.rotations)))
    return np.array(chosen[:: max(1, len(chosen) // _OPERATIONS_TRIED)][:_OPERATIONS_TRIED], dtype=np.int64)


def _mismatch(structure: Structure, rotation: Integers, translation: Floats) -> float:
    """Largest distance in Å from the image of an atom to the nearest atom of its kind."""
    lattice, positions = structure.right_handed
    images = positions @ rotation.T + translation
    worst = 0.0
    for kind in np.unique(structure.kinds):
        mine = structure.kinds == kind
        for start in range(0, int(mine.sum()), _ROWS_AT_ONCE):
            away = images[mine][start : start + _ROWS_AT_ONCE, None] - positions[mine][None]
            away -= np.rint(away)
            nearest = np.sqrt(((away @ lattice) ** 2).sum(axis=2)).min(axis=1)
            worst = max(worst, float(nearest.max()))
    return worst
