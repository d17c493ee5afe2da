"""What a picture of the cell shows: atoms of the cell and its borders, whole molecules, bonds.

Atoms of molecules and complex ions are drawn with the whole unit when its centre lies in the cell or on its border, so
that no carbonate ion is cut in two; all other atoms are drawn when they lie in the cell or on its border themselves.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from itertools import product
from typing import TYPE_CHECKING

import numpy as np

from sitesym.units import Unit, bonds_of, find_units

if TYPE_CHECKING:
    from sitesym.bonding import Bonds
    from sitesym.groups.operation import Floats, Integers
    from sitesym.structure import Structure
    from sitesym.symmetry.crystal import CrystalSymmetry

LARGEST = 600
"""Atoms drawn at most; those nearest to the viewer are kept."""

_BORDER = 0.01


@dataclass(frozen=True, eq=False)
class Contents:
    """The k atoms of a picture.

    sites    (k,) index of each in the input structure.
    points   (k, 3) Å in the Cartesian axes of the report.
    bonds    (m, 2) pairs of the k atoms.
    omitted  how many atoms of the cell and its border were left out because there were too many.
    whole    whether there are molecules or complex ions, drawn as wholes.
    """

    sites: Integers
    points: Floats
    bonds: Integers
    omitted: int
    whole: bool


def cell_contents(symmetry: CrystalSymmetry, toward: Floats, largest: int = LARGEST) -> Contents:
    """Atoms and bonds to draw; `toward` (3,) points to the viewer, whose nearest `largest` atoms are kept."""
    cell, owner = _conventional_cell(symmetry)
    bonds = bonds_of(cell)
    units = find_units(bonds, len(cell), cell.elements)
    placed = list(_placed(cell.fractional, units))
    atoms = np.array([atom for atom, _ in placed], dtype=np.int64)
    shifts = np.array([shift for _, shift in placed], dtype=np.int64)
    points = (cell.fractional[atoms] + shifts) @ symmetry.lattice
    kept = np.sort(np.argsort(-(points @ toward), kind="stable")[:largest])
    pairs = _pairs(bonds, atoms[kept], shifts[kept])
    whole = any(unit.is_molecule for unit in units)
    return Contents(owner[atoms[kept]], points[kept], pairs, len(atoms) - len(kept), whole)


def _conventional_cell(symmetry: CrystalSymmetry) -> tuple[Structure, Integers]:
    """All atoms of the cell of the report, coordinates from 0 to 1, and the input site of each."""
    copies = symmetry.positions[:, None] + symmetry.cell.centring_vectors[None]
    inside = copies.reshape(-1, 3)
    inside = inside - np.floor(inside + _BORDER / 2)
    owner = np.repeat(symmetry.atoms, copies.shape[1])
    sites = tuple(symmetry.structure.sites[index] for index in owner)
    return replace(symmetry.structure, lattice=symmetry.lattice, fractional=inside, sites=sites), owner


def _placed(fractional: Floats, units: tuple[Unit, ...]) -> Iterator[tuple[int, tuple[int, int, int]]]:
    """Every atom to draw with its lattice translation, once each."""
    for unit in units:
        points = fractional[unit.atoms] + unit.shifts
        if unit.is_molecule:
            for shift in _repeats(points.mean(axis=0)):
                yield from _moved(unit.atoms, unit.shifts + shift)
        else:
            for atom, point in zip(unit.atoms.tolist(), points, strict=True):
                for shift in _repeats(point):
                    yield from _moved([atom], np.rint(point + shift - fractional[atom])[None])


def _moved(atoms: Integers | list[int], shifts: Floats) -> Iterator[tuple[int, tuple[int, int, int]]]:
    for atom, shift in zip(atoms, shifts, strict=True):
        yield int(atom), (int(shift[0]), int(shift[1]), int(shift[2]))


def _repeats(point: Floats) -> list[Floats]:
    """Lattice translations that bring a point into the cell, and those that repeat it on opposite borders."""
    into = -np.floor(point + _BORDER)
    choices = [(0, 1) if place < _BORDER else (0,) for place in point + into]
    return [into + np.array(step) for step in product(*choices)]


def _pairs(bonds: Bonds, atoms: Integers, shifts: Integers) -> Integers:
    """(m, 2) bonds between drawn atoms."""
    drawn = list(zip(atoms.tolist(), shifts, strict=True))
    place = {(atom, *map(int, shift)): index for index, (atom, shift) in enumerate(drawn)}
    leaving: dict[int, list[tuple[int, Integers]]] = {}
    for first, second, shift in zip(bonds.first.tolist(), bonds.second.tolist(), bonds.shift, strict=True):
        leaving.setdefault(first, []).append((second, shift))
    found = [
        (index, place[key])
        for index, (atom, shift) in enumerate(drawn)
        for other, step in leaving.get(atom, ())
        if (key := (other, *map(int, shift + step))) in place
    ]
    return np.array(found, dtype=np.int64).reshape(-1, 2)
