"""Molecules and complex ions in a crystal: which there are, their own point group, and their site group."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from sitesym.bonding import BondRules, Bonds
from sitesym.errors import InconsistencyError
from sitesym.groups.kind import Family, Kind
from sitesym.groups.operation import Floats, Integers
from sitesym.groups.point_group import PointGroup
from sitesym.known_units import known_groups
from sitesym.molecule_frame import molecule_group
from sitesym.molecule_symmetry import DEFAULT_TOLERANCE, MoleculeSymmetry, find_operations
from sitesym.structure import FULL
from sitesym.symmetry.crystal import CrystalSymmetry
from sitesym.symmetry.primitive import PrimitiveCell, moved, primitive_cell
from sitesym.units import Unit, bonds_of, find_units

KNOWN_UNIT_TOLERANCE = 0.6
"""Å. How far a unit may be distorted and still pass for the tabulated ion of its composition (SiO4 of zircon: 0.3)."""

_TOGETHER = 0.6
"""Å. Two atoms closer than this are never there together; the shortest bond, H-H, is 0.74 Å."""

_IN_PART = (
    "some of its atoms are there only in part of the cells, so that the average is no molecule that could be followed"
)

_TIGHTER = (0.12, 0.06)
"""Å. Tried where the default makes a tabulated unit more symmetric than it is (a water molecule straight)."""

_BIAXIAL = (Kind(Family.CNV, 2), Kind(Family.DN, 2), Kind(Family.DNH, 2))

LocalBonds = tuple[tuple[int, int], ...]


@dataclass(frozen=True, eq=False)
class FreeMolecule:
    """One finite unit taken out of its crystal, or a molecule alone.

    elements   names of its n atoms; positions (n, 3) Å from the centre, idealised to the symmetry of `group`.
    measured   (n, 3) Å from the centre, as they were.
    bonds      pairs of its atoms.
    symmetry   the operations found, with the deviation from them; group the same with labels on the molecule's axes.
    """

    elements: tuple[str, ...]
    labels: tuple[str, ...]
    positions: Floats
    measured: Floats
    bonds: LocalBonds
    symmetry: MoleculeSymmetry
    group: PointGroup

    @property
    def higher_group(self) -> str:
        """Schoenflies symbol of the next higher group within reach (see `symmetry.next_higher`), "" if none is."""
        higher = self.symmetry.next_higher
        if higher is None:
            return ""
        return higher.linear or PointGroup.of(higher.operations).schoenflies

    @property
    def is_planar(self) -> bool:
        """Whether all atoms lie in one plane but not on one line."""
        spread = np.linalg.svd(self.positions, compute_uv=False)
        return bool(len(self.elements) > 2 and spread[2] < 1e-3 < spread[1])


@dataclass(frozen=True, eq=False)
class UnitSet:
    """Symmetry-equivalent units of a crystal.

    unit        the representative; `count` of them in the primitive cell.
    stabiliser  indices of the operations of the factor group that keep the representative (for a net: None).
    site_group  that group, its labels following the crystal's axes (for a net: None).
    centre      (3,) fractional coordinates of the representative's centre in the axes of the report.
    atoms       indices among the primitive atoms of all the units of the set.
    free        the representative as a free molecule; None for single atoms and nets.
    obstacle    why a finite unit is treated by its atomic sites like a net, or "".
    """

    unit: Unit
    count: int
    stabiliser: Integers | None
    site_group: PointGroup | None
    centre: Floats
    atoms: Integers
    free: FreeMolecule | None
    obstacle: str = ""

    @property
    def is_molecule(self) -> bool:
        """Finite, and more than one atom."""
        return self.free is not None


def units_of_crystal(
    symmetry: CrystalSymmetry, rules: BondRules | None = None, tolerance: float | None = None
) -> tuple[UnitSet, ...]:
    """All units of a crystal, one set for each kind of symmetry-equivalent ones, in the order of their first atoms.

    rules      the user's word on bonds and units.
    tolerance  Å for the free molecules' own symmetry. By default that of `molecule_symmetry`, and a unit whose
               composition is tabulated may deviate more (`KNOWN_UNIT_TOLERANCE`) from a tabulated group.

    Raises UsageError for rules that name what is not there, InconsistencyError when symmetry does not carry units
    into units.
    """
    cell = primitive_cell(symmetry)
    bonds = bonds_of(cell.structure, rules)
    sites = cell.structure.sites
    contents = [{one.element: one.occupancy for one in site.occupants} for site in sites]
    labels = [site.label for site in sites]
    units = find_units(bonds, len(sites), cell.structure.elements, labels, contents=contents)
    division = _Partition.of(units, len(sites))
    sets: list[UnitSet] = []
    done: set[int] = set()
    for index, unit in enumerate(units):
        if index not in done:
            reached = division.owner[symmetry.images[0][:, unit.atoms]]
            members = sorted(set(reached.ravel().tolist()))
            done.update(members)
            sets.append(_unit_set(symmetry, cell, bonds, division, index, members, tolerance))
    return tuple(sets)


@dataclass(frozen=True, eq=False)
class _Partition:
    """The units as a division of all n atoms: (n,) number of each atom's unit and (n, 3) its translation there."""

    units: Sequence[Unit]
    owner: Integers
    shifts: Integers

    @classmethod
    def of(cls, units: Sequence[Unit], count: int) -> _Partition:
        owner, shifts = np.zeros(count, dtype=np.int64), np.zeros((count, 3), dtype=np.int64)
        for index, unit in enumerate(units):
            owner[unit.atoms] = index
            shifts[unit.atoms] = unit.shifts
        return cls(units, owner, shifts)


def _unit_set(
    symmetry: CrystalSymmetry, cell: PrimitiveCell, bonds: Bonds, division: _Partition,
    index: int, members: list[int], tolerance: float | None,
) -> UnitSet:  # fmt: skip
    unit = division.units[index]
    atoms = np.concatenate([division.units[member].atoms for member in members])
    points = cell.structure.fractional[unit.atoms] + unit.shifts
    centre = points.mean(axis=0) @ cell.basis
    shares = [cell.structure.sites[atom].occupancy for atom in unit.atoms]
    obstacle = _obstacle(points @ cell.structure.lattice, shares)
    if unit.dimension > 0 or obstacle:
        return UnitSet(unit, len(members), None, None, centre, atoms, None, obstacle)
    kept = _stabiliser(symmetry, cell, division, index)
    if len(kept) * len(members) != len(symmetry.factor_group):
        raise InconsistencyError(
            f"{len(members)} equivalent units {unit.formula} and a site group of order {len(kept)} do not make a "
            f"factor group of order {len(symmetry.factor_group)}.",
            "Name the units yourself with --unit, --bond or --no-bond, or try another --tolerance.",
        )
    site_group = symmetry.factor_group.subgroup(kept)
    free = None
    if len(unit.atoms) > 1:
        free = _free_molecule(cell, bonds, unit, points @ cell.structure.lattice, site_group, tolerance)
        site_group = _in_molecule_axes(site_group, free)
    return UnitSet(unit, len(members), kept, site_group, centre, atoms, free)


def _obstacle(points: Floats, shares: Sequence[float]) -> str:
    """Atoms of a finite unit that are not there together: alternatives of a disordered one, or atoms there in part."""
    if len(points) < 2:
        return ""
    distance = np.linalg.norm(points[:, None] - points[None], axis=2)
    np.fill_diagonal(distance, np.inf)
    if distance.min() >= _TOGETHER:
        return "" if min(shares) >= FULL * max(shares) else _IN_PART
    return (
        f"two of its atoms are only {distance.min():.2f} Å apart, alternatives of a disordered unit, so that the "
        "average is no molecule that could be followed"
    )


def _stabiliser(symmetry: CrystalSymmetry, cell: PrimitiveCell, division: _Partition, index: int) -> Integers:
    """Operations that carry a unit to itself; every other must carry it to another whole unit.

    Raises InconsistencyError where an image is no unit.
    """
    unit = division.units[index]
    kept = []
    for operation in range(len(symmetry.factor_group)):
        atoms, shifts = moved(symmetry, cell, operation, unit.atoms, unit.shifts)
        owners, away = division.owner[atoms], shifts - division.shifts[atoms]
        if (owners != owners[0]).any() or (away != away[0]).any():
            raise InconsistencyError(
                f"An operation of the crystal tears the unit {unit.formula} apart.",
                "The bonds found are not symmetric; name the units with --unit, --bond or --no-bond.",
            )
        if owners[0] == index:
            kept.append(operation)
    return np.array(kept, dtype=np.int64)


def _free_molecule(
    cell: PrimitiveCell, bonds: Bonds, unit: Unit, points: Floats, site_group: PointGroup, tolerance: float | None
) -> FreeMolecule:
    elements = tuple(cell.structure.elements[atom] for atom in unit.atoms)
    labels = tuple(cell.structure.sites[atom].label for atom in unit.atoms)
    required, local = list(site_group.matrices), _local_bonds(bonds, unit)
    found = free_molecule(
        elements, labels, points, local, DEFAULT_TOLERANCE if tolerance is None else tolerance, required
    )
    expected = known_groups(unit.formula)
    if tolerance is not None or not expected or found.group.schoenflies in expected:
        return found
    for other in (KNOWN_UNIT_TOLERANCE, *_TIGHTER):
        option = free_molecule(elements, labels, points, local, other, required)
        if option.group.schoenflies in expected:
            return option
    return found


def _in_molecule_axes(site_group: PointGroup, free: FreeMolecule) -> PointGroup:
    """Where B1, B2 and B3 of a site cannot follow the crystal's axes they follow those of the molecule."""
    along = np.abs(site_group.frame).max(axis=1) > 1 - 1e-6
    if site_group.kind not in _BIAXIAL or along.all() or free.symmetry.is_linear:
        return site_group
    return PointGroup.of(site_group.matrices, free.group.frame)


def free_molecule(
    elements: tuple[str, ...], labels: tuple[str, ...], points: Floats, bonds: LocalBonds,
    tolerance: float = DEFAULT_TOLERANCE, required: Sequence[Floats] | None = None,
) -> FreeMolecule:  # fmt: skip
    """A molecule with its own point group.

    points    (n, 3) Å in any frame; required: site operations (3, 3) in that frame which the group must contain.
    """
    found = find_operations(elements, points, tolerance=tolerance, required=required)
    positions = found.idealised - found.centre
    bonds = _closed(bonds, found)
    if found.linear and found.axis is not None:
        group = PointGroup.linear(found.axis, centred=found.linear == "D∞h")
    else:
        group = molecule_group(found.operations, positions, bonds)
    return FreeMolecule(elements, labels, positions, points - found.centre, bonds, found, group)


def _closed(bonds: LocalBonds, found: MoleculeSymmetry) -> LocalBonds:
    """The bonds with all their images: a measured molecule may miss one that its idealised form has."""
    images = {
        (min(i, j), max(i, j)) for row in found.permutations.tolist() for i, j in ((row[a], row[b]) for a, b in bonds)
    }
    return tuple(sorted(images))


def _local_bonds(bonds: Bonds, unit: Unit) -> LocalBonds:
    """Bonds between the unit's atoms as pairs of positions in its list."""
    place = {int(atom): index for index, atom in enumerate(unit.atoms)}
    return tuple(
        (place[i], place[j]) for i, j in zip(bonds.first.tolist(), bonds.second.tolist(), strict=True) if i in place
    )
