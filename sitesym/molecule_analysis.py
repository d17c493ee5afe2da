"""A molecule alone: its point group, its vibrations by species and kind, and what infrared and Raman show of them.

Two molecules side by side, such as two conformers, show which numbers of bands tell them apart.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from sitesym.bond_stretches import BondStretches, bond_stretches
from sitesym.bonding import BondRules, Bonds, find_bonds
from sitesym.groups.point_group import PointGroup
from sitesym.known_units import KnownUnit, known_groups
from sitesym.molecule_symmetry import DEFAULT_TOLERANCE
from sitesym.molecules import FreeMolecule, LocalBonds, free_molecule
from sitesym.reading.molecule import Molecule
from sitesym.selection import Activity, activities, activity_of
from sitesym.structure import OpenQuestion
from sitesym.tensors import TensorSpecies, tensor_species
from sitesym.units import Unit, customary, find_units, hill
from sitesym.vibration_names import Names, known_vibrations
from sitesym.vibrations import KINDS, FreeVibrations, free_vibrations
from sitesym.wavenumbers import Target, Wavenumbers, assigned

EMPTY_SPACE = 20.0
"""Å of space around the molecule in the cell in which its bonds are looked for: farther than any contact reaches."""

_TIGHTER = (0.12, 0.06)
"""Å. Tried where the default makes a common molecule more symmetric than it is."""

_FIXED = 0.05
"""Å. A larger deviation from the group is worth a word."""


@dataclass(frozen=True, slots=True)
class MoleculeVibration:
    """All vibrations of one species and one kind: `count` of them, with their selection rules."""

    species: str
    dimension: int
    count: int
    kind: str
    activity: Activity


@dataclass(frozen=True, eq=False)
class MoleculeSpecies:
    """One species of the molecule's group: how often translations, rotations and internal vibrations belong to it.

    activity, tensor  selection rules and Raman tensors in the molecule's own axes.
    polarized         whether its Raman bands are polarized in a liquid or gas: the totally symmetric species alone.
    """

    label: str
    dimension: int
    translations: int
    rotations: int
    internal: int
    activity: Activity
    tensor: TensorSpecies
    polarized: bool


@dataclass(frozen=True, slots=True)
class BandCounts:
    """Distinct frequencies, a degenerate one counted once; `both` of them show in infrared and Raman."""

    total: int
    infrared: int
    raman: int
    both: int
    polarized: int

    @property
    def silent(self) -> int:
        """Those that neither shows."""
        return self.total - self.infrared - self.raman + self.both


@dataclass(frozen=True, eq=False)
class MoleculeAnalysis:
    """A free molecule analysed.

    molecule   as it was read.
    free       the same with its own point group; positions and operations in the molecule's own axes.
    formula    as chemists write it; `parts` formulas of the parts that no bond joins (one for a proper molecule).
    reason     which contacts were taken as bonds and which were not.
    species    of the point group; none for a single atom.
    vibrations by species and kind; names (usual names and wavenumbers) one entry for each of them.
    known      the unit of the table of common units that it is, or None; source of the wavenumbers, or "".
    remark     what else to know of names and wavenumbers, or "".
    stretches  by kinds of bonds.
    counts     of all internal vibrations.
    cautions   what to know before believing it.
    """

    molecule: Molecule
    free: FreeMolecule
    formula: str
    parts: tuple[str, ...]
    reason: str
    species: tuple[MoleculeSpecies, ...]
    vibrations: tuple[MoleculeVibration, ...]
    names: Names
    known: KnownUnit | None
    source: str
    remark: str
    stretches: tuple[BondStretches, ...]
    counts: BandCounts
    cautions: tuple[OpenQuestion, ...]

    def __repr__(self) -> str:
        found = self.counts
        return (
            f"MoleculeAnalysis({self.formula}, {self.point_group}: {found.infrared} infrared, {found.raman} Raman, "
            f"{found.both} in both)"
        )

    def _repr_html_(self) -> str:
        from sitesym.views.notebook import molecule_html

        return molecule_html(self)

    @property
    def point_group(self) -> str:
        """Schoenflies symbol: `C2h`, `D∞h`, `Ih`; `Kh` for a single atom."""
        return "Kh" if self.free.symmetry.is_atom else self.free.group.schoenflies

    @property
    def has_exclusion(self) -> bool:
        """Whether a centre of inversion keeps infrared and Raman bands apart."""
        return self.free.group.has_inversion and not self.free.symmetry.is_atom

    def counts_of(self, kind: str) -> BandCounts:
        """Bands of one kind of vibration, such as "stretching"."""
        parts: dict[str, int] = {}
        for one in self.vibrations:
            if one.kind == kind:
                parts[one.species] = parts.get(one.species, 0) + one.count
        return band_counts(self.free.group, parts)


@dataclass(frozen=True, slots=True)
class ComparedBands:
    """The bands of one kind of vibration or one kind of bond in two molecules."""

    what: str
    first: BandCounts
    second: BandCounts

    @property
    def differs(self) -> bool:
        """Whether the numbers tell the two apart."""
        return self.first != self.second


@dataclass(frozen=True, eq=False)
class MoleculeComparison:
    """Two molecules side by side.

    bands      all vibrations first, then by kind; `stretches` by kinds of bonds.
    cautions   what to know before believing it.
    """

    first: MoleculeAnalysis
    second: MoleculeAnalysis
    bands: tuple[ComparedBands, ...]
    stretches: tuple[ComparedBands, ...]
    cautions: tuple[OpenQuestion, ...]

    @property
    def telling(self) -> tuple[ComparedBands, ...]:
        """The lines whose numbers differ."""
        return tuple(one for one in (*self.bands, *self.stretches) if one.differs)


def analyse_molecule(
    molecule: Molecule,
    tolerance: float | None = None,
    bonds: BondRules | None = None,
    *,
    wavenumbers: Wavenumbers | None = None,
) -> MoleculeAnalysis:
    """Analyse the vibrations of a free molecule.

    tolerance    Å, for its point group; by default that of `molecule_symmetry`.
    bonds        the user's word on what is bonded; labels are element and number in the file: C1, H2, ….
    wavenumbers  the user's own, in the place of the tabulated ones.

    Raises UsageError for arguments that make no sense.
    """
    labels = tuple(f"{element}{number}" for number, element in enumerate(molecule.elements, start=1))
    found = _bonds(molecule, labels, bonds)
    units = find_units(found, len(molecule), molecule.elements, labels)
    local = tuple(zip(found.first.tolist(), found.second.tolist(), strict=True))
    free = _in_own_axes(_free(molecule, labels, local, tolerance))
    motions = free_vibrations(free.group, free.positions, free.bonds)
    vibrations = _vibrations(free, motions)
    amounts = {element: float(molecule.elements.count(element)) for element in molecule.elements}
    naming = known_vibrations(hill(amounts), free.group.schoenflies, vibrations, alone=True)
    names = naming.names
    if wavenumbers is not None:
        names = assigned(wavenumbers, [Target(customary(amounts), labels, vibrations, names)])[0]
    return MoleculeAnalysis(
        molecule, free, customary(amounts), tuple(unit.name for unit in units), _reasons(units),
        _species(free, motions), vibrations, names, naming.unit, naming.source, naming.remark,
        bond_stretches(free.group, free.positions, free.bonds, free.elements),
        band_counts(free.group, motions.internal), _cautions(free, units, tolerance),
    )  # fmt: skip


def compare_molecules(first: MoleculeAnalysis, second: MoleculeAnalysis) -> MoleculeComparison:
    """Set the bands of two molecules side by side, as of two conformers."""
    kinds = [kind for kind in KINDS if any(kind == one.kind for one in (*first.vibrations, *second.vibrations))]
    bands = [ComparedBands("all vibrations", first.counts, second.counts)]
    bands += [ComparedBands(kind, first.counts_of(kind), second.counts_of(kind)) for kind in kinds]
    pairs = sorted({one.pair for one in (*first.stretches, *second.stretches)})
    stretches = tuple(
        ComparedBands(f"{pair} stretching", _stretch_counts(first, pair), _stretch_counts(second, pair))
        for pair in pairs
    )
    cautions: tuple[OpenQuestion, ...] = ()
    if sorted(first.molecule.elements) != sorted(second.molecule.elements):
        message = f"The two are no conformers or isomers: {first.formula} and {second.formula}."
        cautions = (OpenQuestion("formulas_differ", message),)
    return MoleculeComparison(first, second, tuple(bands), stretches, cautions)


def band_counts(group: PointGroup, parts: Mapping[str, int]) -> BandCounts:
    """How many bands some species of a molecule give."""
    rules = [(activity_of(group, label), count) for label, count in parts.items()]
    symmetric = totally_symmetric(group)
    return BandCounts(
        sum(count for _, count in rules),
        sum(count for rule, count in rules if rule.infrared),
        sum(count for rule, count in rules if rule.raman),
        sum(count for rule, count in rules if rule.infrared and rule.raman),
        sum(count for rule, count in rules if rule.label == symmetric),
    )


def totally_symmetric(group: PointGroup) -> str:
    """The species of what every operation leaves as it is."""
    return next(one.label for one in group.species if np.allclose(one.characters, 1))


# Steps


def _bonds(molecule: Molecule, labels: tuple[str, ...], rules: BondRules | None) -> Bonds:
    """By the rule for crystals, in a cell so large that nothing reaches its own image."""
    spread = float(np.ptp(molecule.positions, axis=0).max(initial=0.0)) + EMPTY_SPACE
    points = (molecule.positions - molecule.positions.mean(axis=0)) / spread + 0.5
    return find_bonds(np.eye(3) * spread, points, molecule.elements, rules=rules, labels=labels)


def _free(molecule: Molecule, labels: tuple[str, ...], bonds: LocalBonds, tolerance: float | None) -> FreeMolecule:
    if tolerance is not None:
        return free_molecule(molecule.elements, labels, molecule.positions, bonds, tolerance)
    found = free_molecule(molecule.elements, labels, molecule.positions, bonds)
    amounts = {element: float(molecule.elements.count(element)) for element in molecule.elements}
    expected = known_groups(hill(amounts))
    if not expected or found.group.schoenflies in expected:
        return found
    for other in _TIGHTER:
        option = free_molecule(molecule.elements, labels, molecule.positions, bonds, other)
        if option.group.schoenflies in expected:
            return option
    return found


def _in_own_axes(free: FreeMolecule) -> FreeMolecule:
    """The same molecule turned so that the axes of its labels are x, y and z."""
    frame = free.group.frame
    if free.group.kind.is_linear:
        group = PointGroup.linear(np.array([0.0, 0.0, 1.0]), centred=free.group.has_inversion)
    else:
        group = PointGroup.of(frame @ free.group.matrices @ frame.T)
    turned = np.asarray(free.positions @ frame.T), np.asarray(free.measured @ frame.T)
    return FreeMolecule(free.elements, free.labels, *turned, free.bonds, free.symmetry, group)


def _vibrations(free: FreeMolecule, motions: FreeVibrations) -> tuple[MoleculeVibration, ...]:
    rules = {rule.label: rule for rule in activities(free.group)}
    return tuple(
        MoleculeVibration(label, rules[label].dimension, parts[label], kind, rules[label])
        for label in motions.internal
        for kind, parts in motions.kinds.items()
        if label in parts
    )


def _species(free: FreeMolecule, motions: FreeVibrations) -> tuple[MoleculeSpecies, ...]:
    if free.symmetry.is_atom:
        return ()
    symmetric = totally_symmetric(free.group)
    return tuple(
        MoleculeSpecies(
            rule.label, rule.dimension, motions.translations.get(rule.label, 0), motions.rotations.get(rule.label, 0),
            motions.internal.get(rule.label, 0), rule, tensor, rule.label == symmetric,
        )
        for rule, tensor in zip(activities(free.group), tensor_species(free.group), strict=True)
    )  # fmt: skip


def _stretch_counts(one: MoleculeAnalysis, pair: str) -> BandCounts:
    found = next((stretch.species for stretch in one.stretches if stretch.pair == pair), {})
    return band_counts(one.free.group, found)


def _reasons(units: tuple[Unit, ...]) -> str:
    return " ".join(dict.fromkeys(unit.reason for unit in units))


def _cautions(free: FreeMolecule, units: tuple[Unit, ...], tolerance: float | None) -> tuple[OpenQuestion, ...]:
    found = []
    if len(units) > 1:
        names = ", ".join(unit.name for unit in units[:6]) + (", …" if len(units) > 6 else "")
        message = f"The file holds {len(units)} parts that no bond joins ({names}); they were taken as one molecule."
        found.append(OpenQuestion("several_parts", message))
    deviation = free.symmetry.deviation
    if deviation > _FIXED and free.symmetry.needed_tolerance > 0:
        message = (
            f"The atoms lie up to {deviation:.2f} Å off {free.group.schoenflies}, which was accepted at a tolerance of "
            f"{tolerance or DEFAULT_TOLERANCE:g} Å. A smaller molecule tolerance gives the group of the positions as "
            "they are."
        )
        found.append(OpenQuestion("molecule_distorted", message))
    return tuple(found)
