"""The molecular side of an analysis: every unit followed into the crystal, named, oriented, checked by the atoms."""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import product

import numpy as np

from sitesym.bond_stretches import BondStretches, bond_stretches
from sitesym.bonding import BondRules
from sitesym.correlation import UnitCorrelation, check_against_sites, correlate
from sitesym.decomposition import site_contribution
from sitesym.expected_bands import ExpectedBand, expected_bands
from sitesym.fate import Fate, fate_of, fates_of_motions
from sitesym.groups.operation import Floats
from sitesym.groups.subduction import Multiplicities, added, in_order, subtracted
from sitesym.known_units import KnownUnit, composition_of
from sitesym.molecules import FreeMolecule, UnitSet, units_of_crystal
from sitesym.selection import vector_species
from sitesym.symmetry.crystal import CrystalSymmetry
from sitesym.symmetry.site_symbol import oriented_symbol
from sitesym.symmetry.wyckoff import wyckoff_letter
from sitesym.vibration_names import Names, known_vibrations
from sitesym.wavenumbers import Target, Wavenumbers, assigned


@dataclass(frozen=True, slots=True)
class AxisRelation:
    """How one axis of the free molecule lies in the crystal.

    name       of the molecular axis: "z" (the main axis), "x" or "y".
    direction  (3,) unit vector in the Cartesian axes of the report.
    nearest    the crystal axis (a, b, c, a*, b*, c*) closest to it, or a lattice direction like [110] that it follows
               exactly, and the angle between the two lines in degrees.
    """

    name: str
    direction: tuple[float, float, float]
    nearest: str
    angle: float


@dataclass(frozen=True, eq=False)
class MoleculeRow:
    """One set of equivalent molecules or complex ions.

    wyckoff, multiplicity  position of their centres in the conventional cell.
    symbol                 oriented Hermann-Mauguin symbol of the site group.
    fates                  what becomes of each entry of `correlation.vibrations`.
    librations             what becomes of the librations, one entry for each species of the free molecule.
    translations           what becomes of the translations, likewise.
    names                  for each entry of `correlation.vibrations` the usual names and wavenumbers, if known.
    known                  the unit of the table from which they come, or None.
    source                 where tabulated wavenumbers come from, or "".
    remark                 what else to know about names and wavenumbers, or "".
    alone                  whether the crystal holds nothing but units of this formula, which then bear no charge.
    stretches              the stretches of the free molecule by kinds of bonds.
    orientation            the molecule's axes in the crystal.
    """

    correlation: UnitCorrelation
    wyckoff: str
    multiplicity: int
    symbol: str
    fates: tuple[Fate, ...]
    librations: tuple[Fate, ...]
    translations: tuple[Fate, ...]
    names: Names
    known: KnownUnit | None
    source: str
    remark: str
    alone: bool
    stretches: tuple[BondStretches, ...]
    orientation: tuple[AxisRelation, ...]

    @property
    def units(self) -> UnitSet:
        """The units themselves."""
        return self.correlation.units

    @property
    def free(self) -> FreeMolecule:
        """The representative as a free molecule."""
        assert self.units.free is not None
        return self.units.free

    @property
    def formula(self) -> str:
        """Formula in Hill order."""
        return self.units.unit.formula

    @property
    def name(self) -> str:
        """Formula as chemists write it."""
        return self.units.unit.name

    @property
    def bond_pairs(self) -> tuple[str, ...]:
        """The kinds of its bonds, as `O-H`."""
        return tuple(one.pair for one in self.stretches)

    def __repr__(self) -> str:
        groups = f"{self.free.group.schoenflies} on {self.symbol}"
        return f"MoleculeRow({self.units.count} {self.formula}, {groups})"


@dataclass(frozen=True, slots=True)
class Origin:
    """Where the optic modes of one species come from.

    translational excludes the acoustic branches; `framework` counts the modes of the atoms of nets, layers and chains.
    """

    translational: int
    librational: int
    internal: int
    framework: int


@dataclass(frozen=True, eq=False)
class MolecularAnalysis:
    """All units of a crystal.

    molecules  sets of molecules and complex ions; atoms single-atom units; nets chains, layers and nets.
    unfollowed finite units that could not be followed (see `UnitSet.obstacle`) and are counted with the nets.
    origins    species of the factor group -> origin of its optic modes.
    bands      where internal vibrations of known wavenumber are expected.
    tolerance  Å, that the user gave for the free molecules' groups; None for the default.
    """

    molecules: tuple[MoleculeRow, ...]
    atoms: tuple[UnitCorrelation, ...]
    nets: tuple[UnitSet, ...]
    unfollowed: tuple[UnitSet, ...]
    origins: dict[str, Origin]
    bands: tuple[ExpectedBand, ...]
    tolerance: float | None

    @property
    def inequivalent(self) -> tuple[tuple[MoleculeRow, ...], ...]:
        """Molecules of one composition that symmetry does not carry into each other: two or more sets together."""
        kinds: dict[frozenset[tuple[str, int]], list[MoleculeRow]] = {}
        for row in self.molecules:
            kinds.setdefault(composition_of(row.formula), []).append(row)
        return tuple(tuple(rows) for rows in kinds.values() if len(rows) > 1)


def analyse_molecules(
    symmetry: CrystalSymmetry,
    whole: Multiplicities,
    rules: BondRules | None = None,
    tolerance: float | None = None,
    wavenumbers: Wavenumbers | None = None,
) -> MolecularAnalysis:
    """Find the units of a crystal and correlate their motions.

    whole        species of all 3N displacements by the atomic sites: the sum over all units must equal it.
    wavenumbers  the user's own, in the place of the tabulated ones.

    Raises UsageError for rules or wavenumbers that name what is not there, InconsistencyError when the sums differ.
    """
    sets = units_of_crystal(symmetry, rules, tolerance)
    finite = [correlate(symmetry.factor_group, one) for one in sets if one.site_group is not None]
    by_sites = [one for one in sets if one.site_group is None]
    nets = tuple(one for one in by_sites if not one.obstacle)
    unfollowed = tuple(one for one in by_sites if one.obstacle)
    framework = _framework(symmetry, by_sites)
    check_against_sites(symmetry.factor_group, finite, framework, whole)
    alone = len({one.unit.formula for one in sets}) == 1
    molecules = tuple(_row(symmetry, one, alone) for one in finite if one.units.is_molecule)
    if wavenumbers is not None:
        molecules = _with_wavenumbers(molecules, wavenumbers)
    atoms = tuple(one for one in finite if not one.units.is_molecule)
    origins = _origins(symmetry, finite, framework)
    return MolecularAnalysis(molecules, atoms, nets, unfollowed, origins, _bands(molecules), tolerance)


def _with_wavenumbers(molecules: tuple[MoleculeRow, ...], wavenumbers: Wavenumbers) -> tuple[MoleculeRow, ...]:
    targets = [Target(row.name, row.units.unit.labels, row.correlation.vibrations, row.names) for row in molecules]
    found = assigned(wavenumbers, targets)
    return tuple(replace(row, names=names) for row, names in zip(molecules, found, strict=True))


def _bands(molecules: tuple[MoleculeRow, ...]) -> tuple[ExpectedBand, ...]:
    found = [
        band
        for number, row in enumerate(molecules)
        for band in expected_bands(row.name, number, row.correlation.vibrations, row.names, row.fates)
    ]
    return tuple(sorted(found, key=lambda band: band.wavenumber))


def _framework(symmetry: CrystalSymmetry, nets: list[UnitSet]) -> Multiplicities:
    """Species of the atoms of nets, by their atomic sites."""
    inside = {atom for net in nets for atom in net.atoms.tolist()}
    orbits = (orbit for orbit in symmetry.orbits if orbit.atoms[0] in inside)
    return in_order(symmetry.factor_group, added(*(site_contribution(symmetry, orbit) for orbit in orbits)))


def _origins(symmetry: CrystalSymmetry, finite: list[UnitCorrelation], framework: Multiplicities) -> dict[str, Origin]:
    """The acoustic branches are taken from the translations, or from the framework where there are not enough."""
    translations = added(*(one.translations.crystal for one in finite))
    librations = added(*(one.librations.crystal for one in finite))
    internal = added(*(one.internal for one in finite))
    acoustic = vector_species(symmetry.factor_group)
    if framework and not finite:
        framework, acoustic = subtracted(framework, acoustic), {}
    elif not translations:
        acoustic = {}
    return {
        one.label: Origin(
            translations.get(one.label, 0) - acoustic.get(one.label, 0),
            librations.get(one.label, 0),
            internal.get(one.label, 0),
            framework.get(one.label, 0),
        )
        for one in symmetry.factor_group.species
    }


def _row(symmetry: CrystalSymmetry, correlation: UnitCorrelation, alone: bool) -> MoleculeRow:
    units = correlation.units
    free, site_group = units.free, units.site_group
    assert free is not None
    assert site_group is not None
    groups = free.group, site_group, symmetry.factor_group
    naming = known_vibrations(units.unit.formula, free.group.schoenflies, correlation.vibrations, alone=alone)
    return MoleculeRow(
        correlation,
        _letter(symmetry, units),
        units.count * len(symmetry.cell.centring_vectors),
        oriented_symbol(site_group, symmetry.lattice, symmetry.number),
        tuple(fate_of(one, site_group, symmetry.factor_group) for one in correlation.vibrations),
        fates_of_motions(correlation.librations, *groups),
        fates_of_motions(correlation.translations, *groups),
        naming.names,
        naming.unit,
        naming.source,
        naming.remark,
        alone,
        bond_stretches(free.group, free.positions, free.bonds, free.elements),
        _orientation(symmetry, free),
    )


def _letter(symmetry: CrystalSymmetry, units: UnitSet) -> str:
    """Wyckoff letter of the centre, put exactly on its site: the mean of its images under the site operations."""
    assert units.stabiliser is not None
    kept = units.stabiliser
    images = symmetry.rotations[kept] @ units.centre + symmetry.translations[kept]
    away = images - units.centre
    vectors = symmetry.cell.centring_vectors
    options = away[:, None] - vectors[None]
    residue = options - np.rint(options)
    nearest = np.linalg.norm(residue @ symmetry.lattice, axis=2).argmin(axis=1)
    exact = units.centre + residue[np.arange(len(kept)), nearest].mean(axis=0)
    return wyckoff_letter(symmetry, exact)


def _orientation(symmetry: CrystalSymmetry, free: FreeMolecule) -> tuple[AxisRelation, ...]:
    """The axis z first, then x and y; for linear molecules the axis only."""
    order = (2,) if free.symmetry.is_linear else (2, 0, 1)
    return tuple(_relation(symmetry.lattice, "xyz"[k], free.group.frame[k]) for k in order)


def _relation(lattice: Floats, name: str, direction: Floats) -> AxisRelation:
    reciprocal = np.linalg.inv(lattice).T
    basic = _angles(np.vstack([lattice, reciprocal]), direction)
    nearest, angle = ("a", "b", "c", "a*", "b*", "c*")[int(np.argmin(basic))], float(basic.min())
    diagonal = _angles(_DIAGONALS @ lattice, direction)
    if angle > _ALONG and diagonal.min() < _ALONG:
        indices = _DIAGONALS[int(np.argmin(diagonal))]
        nearest, angle = f"[{''.join(map(str, indices.tolist()))}]", float(diagonal.min())
    x, y, z = (float(value) for value in direction)
    return AxisRelation(name, (x, y, z), nearest, angle)


_ALONG = 0.05
"""Degrees. Two lines nearer than this are parallel."""

_DIAGONALS = np.array([one for one in product((0, 1, -1), repeat=3) if np.count_nonzero(one) > 1 and one > (0, 0, 0)])


def _angles(lines: Floats, direction: Floats) -> Floats:
    """(m,) angles in degrees between lines (m, 3) and a unit vector, to a millionth of a degree."""
    across = np.linalg.norm(np.cross(lines, direction), axis=1)
    return np.asarray(np.round(np.degrees(np.arctan2(across, np.abs(lines @ direction))), 6))
