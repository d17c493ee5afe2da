"""The symmetry of a crystal: space group, factor group in Cartesian axes, primitive atoms and their site groups."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from sitesym.errors import InconsistencyError
from sitesym.groups.operation import Booleans, Floats, Integers
from sitesym.groups.point_group import PointGroup
from sitesym.structure import Structure
from sitesym.symmetry.cell import Cell, choose_cell
from sitesym.symmetry.library import Search, Setting, search

DEFAULT_TOLERANCE = 0.01
"""Å; where most of 277 ordered structure files agree with the space group they declare."""


@dataclass(frozen=True, eq=False)
class Orbit:
    """Symmetry-equivalent sites of the crystal.

    atoms         indices among the primitive atoms; the first is the representative.
    site          index of the representative in the input structure.
    wyckoff       letter, multiplicity that of the conventional cell.
    stabiliser    indices of the operations of the factor group that keep the representative.
    """

    atoms: tuple[int, ...]
    site: int
    wyckoff: str
    multiplicity: int
    stabiliser: Integers


@dataclass(frozen=True, eq=False)
class CrystalSymmetry:
    """A crystal's symmetry in the axes chosen for the report.

    lattice       (3, 3) rows a, b, c of that cell in Å, in the Cartesian frame z ∥ c, y ∥ b*, x completing it
                  (IEEE 176-1987), made from the metric averaged over the group.
    rotations     (f, 3, 3) integers, translations (f, 3): one operation for each element of the factor group.
    factor_group  its operations as orthogonal matrices in the same order.
    positions     (n, 3) fractional coordinates of the atoms of the primitive cell, `atoms` their input sites.
    fixed         (f, n) whether an operation leaves an atom where it is, lattice translations aside.
    """

    structure: Structure
    search: Search
    cell: Cell
    tolerance: float
    lattice: Floats
    rotations: Integers
    translations: Floats
    factor_group: PointGroup
    fixed: Booleans
    orbits: tuple[Orbit, ...]

    @property
    def setting(self) -> Setting:
        """The tabulated setting whose axes are used."""
        return self.cell.setting

    @property
    def number(self) -> int:
        """Number in International Tables A."""
        return self.cell.setting.number

    @property
    def positions(self) -> Floats:
        """(n, 3) fractional coordinates of the atoms of the primitive cell in the axes of the report."""
        return self.cell.positions

    @property
    def atoms(self) -> Integers:
        """(n,) input site of each atom of the primitive cell."""
        return self.cell.atoms

    def site_group(self, orbit: Orbit) -> PointGroup:
        """Site group of the orbit's representative, its labels following the crystal's Cartesian axes."""
        return self.factor_group.subgroup(orbit.stabiliser)

    @cached_property
    def images(self) -> tuple[Integers, Floats]:
        """Where every operation takes every atom: (f, n) atom index, and (f, n, 3) lattice translation.

        W x_i + t = x_j + translation, in fractional coordinates (the translation may be a centring vector).
        """
        target = np.zeros(self.fixed.shape, dtype=np.int64)
        shift = np.zeros((*self.fixed.shape, 3))
        moved = _moved(self.rotations, self.translations, self.positions)
        for orbit in self.orbits:
            members = np.array(orbit.atoms)
            target[:, members], shift[:, members] = self._match(moved[:, members], members)
        return target, shift

    def _match(self, moved: Floats, members: Integers) -> tuple[Integers, Floats]:
        difference = moved[:, :, None, :] - self.positions[members]
        centring = self.cell.centring_vectors
        away = difference[..., None, :] - centring
        residue = away - np.rint(away)
        distance = np.linalg.norm(residue @ self.lattice, axis=-1)
        flat = distance.reshape(*distance.shape[:2], -1).argmin(axis=2)
        atom, vector = np.divmod(flat, len(centring))
        rows, columns = np.indices(flat.shape)
        whole = np.rint(away[rows, columns, atom, vector]) + centring[vector]
        return members[atom], whole


def find_symmetry(
    structure: Structure, tolerance: float = DEFAULT_TOLERANCE, *, axes: str = "auto", setting: str | None = None
) -> CrystalSymmetry:
    """Find the space group of a structure and everything that follows from its operations.

    tolerance  Å. axes "auto", "input" or "standard"; setting a Hermann-Mauguin symbol of the group's settings.

    Raises UsageError for a useless argument, InconsistencyError when operations and atoms contradict each other.
    """
    lattice, positions = structure.right_handed
    found = search(lattice, positions, structure.kinds, tolerance)
    cell = choose_cell(lattice, positions, found, axes, setting)
    first = _one_for_each_rotation(cell.rotations)
    rotations, translations = cell.rotations[first], cell.translations[first]
    basis = conventional_lattice(cell.metric)
    matrices = np.array(basis.T @ rotations @ np.linalg.inv(basis.T))
    fixed = _fixed(rotations, translations, cell, basis, tolerance)
    return CrystalSymmetry(
        structure, found, cell, tolerance, basis, rotations, translations,
        PointGroup.of(matrices), fixed, _orbits(found, cell, fixed),
    )  # fmt: skip


def conventional_lattice(metric: Floats) -> Floats:
    """Rows a, b, c in the Cartesian frame z ∥ c, y ∥ b*, x = y × z, for a metric tensor."""
    length_c = np.sqrt(metric[2, 2])
    a_z, b_z = metric[0, 2] / length_c, metric[1, 2] / length_c
    a_x = np.sqrt(metric[0, 0] - a_z**2)
    b_x = (metric[0, 1] - a_z * b_z) / a_x
    b_y = np.sqrt(metric[1, 1] - b_x**2 - b_z**2)
    return np.array([[a_x, 0.0, a_z], [b_x, b_y, b_z], [0.0, 0.0, length_c]])


def _one_for_each_rotation(rotations: Integers) -> Integers:
    _, first = np.unique(rotations.reshape(-1, 9), axis=0, return_index=True)
    return np.sort(first)


def _moved(rotations: Integers, translations: Floats, positions: Floats) -> Floats:
    """(f, n, 3) images W x + t."""
    return np.asarray(np.einsum("fij,nj->fni", rotations, positions) + translations[:, None, :])


def _fixed(rotations: Integers, translations: Floats, cell: Cell, basis: Floats, tolerance: float) -> Booleans:
    """Atoms that an operation brings back to themselves, to within a few times the tolerance, shape (f, n)."""
    away = _moved(rotations, translations, cell.positions) - cell.positions
    reach = max(4 * tolerance, 1e-3)
    fixed = np.zeros(away.shape[:2], dtype=bool)
    for vector in cell.centring_vectors:
        residue = away - vector
        residue -= np.rint(residue)
        fixed |= (np.abs(residue @ basis) < reach).all(axis=2)
    return fixed


def _orbits(found: Search, cell: Cell, fixed: Booleans) -> tuple[Orbit, ...]:
    owner = found.orbits[cell.atoms]
    lattice_points = len(cell.centring_vectors)
    _, first, belongs = np.unique(owner, return_index=True, return_inverse=True)
    members: list[list[int]] = [[] for _ in first]
    for atom, orbit in enumerate(belongs.tolist()):
        members[orbit].append(atom)
    orbits = [_orbit(tuple(atoms), found, cell, fixed, lattice_points) for atoms in members]
    return tuple(sorted(orbits, key=lambda orbit: orbit.site))


def _orbit(atoms: tuple[int, ...], found: Search, cell: Cell, fixed: Booleans, lattice_points: int) -> Orbit:
    site = int(cell.atoms[atoms[0]])
    stabiliser = np.flatnonzero(fixed[:, atoms[0]])
    if len(stabiliser) * len(atoms) != len(fixed):
        raise InconsistencyError(
            f"Site {site + 1} of the cell is kept by {len(stabiliser)} of {len(fixed)} operations but has {len(atoms)} "
            "equivalent places in the primitive cell: that does not fit.",
            "Atoms lie too close to a symmetry element for this tolerance; try another --tolerance.",
        )
    return Orbit(atoms, site, found.wyckoffs[site], len(atoms) * lattice_points, stabiliser)
