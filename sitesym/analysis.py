"""From a structure to its zone-centre analysis: the one result that plans, explanations and views read."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

from sitesym.bonding import BondRules
from sitesym.cautions import cautions_of
from sitesym.decomposition import checked_sum, site_contribution
from sitesym.errors import UsageError
from sitesym.groups.point_group import PointGroup
from sitesym.groups.subduction import Multiplicities, reduce_characters, subtracted
from sitesym.molecular import MolecularAnalysis, analyse_molecules
from sitesym.selection import Activity, activities, vector_species
from sitesym.structure import OpenQuestion, Structure, reduced
from sitesym.symmetry.axes import SettingLabels, describe_axes, orthorhombic_labels
from sitesym.symmetry.crystal import DEFAULT_TOLERANCE, CrystalSymmetry, Orbit, find_symmetry
from sitesym.symmetry.scan import Scan, scan_tolerance
from sitesym.symmetry.site_symbol import oriented_symbol
from sitesym.tensors import TensorSpecies, tensor_species
from sitesym.units import customary
from sitesym.wavenumbers import Wavenumbers

AXES = ("auto", "input", "standard")
"""Which axes a report may follow: see `analyse`."""


@dataclass(frozen=True, eq=False)
class SpeciesRow:
    """One species of the factor group.

    total     how often it occurs among all 3N branches (counting a degenerate species once).
    acoustic  how often among the three acoustic branches.
    activity  selection rules; tensor its Raman tensors and polar directions in the axes of the report.
    """

    label: str
    dimension: int
    total: int
    acoustic: int
    activity: Activity
    tensor: TensorSpecies

    @property
    def optic(self) -> int:
        """Distinct optic frequencies of this species."""
        return self.total - self.acoustic

    def __repr__(self) -> str:
        return f"SpeciesRow({self.label}: {self.optic} optic, {self.acoustic} acoustic)"


@dataclass(frozen=True, eq=False)
class SiteRow:
    """One set of equivalent sites.

    multiplicity   in the conventional cell of the report; `count` in the primitive cell.
    symbol         oriented Hermann-Mauguin symbol of the site group.
    site_species   the species of the site group to which the three displacements belong.
    contribution   species of the factor group that the displacements give, acoustic ones included.
    position       fractional coordinates of the representative in the axes of the report.
    """

    label: str
    element: str
    occupancy: float
    wyckoff: str
    multiplicity: int
    count: int
    group: PointGroup
    symbol: str
    site_species: Multiplicities
    contribution: Multiplicities
    position: tuple[float, float, float]

    def __repr__(self) -> str:
        return f"SiteRow({self.label}: {self.multiplicity}{self.wyckoff}, {self.symbol})"


@dataclass(frozen=True, slots=True)
class Totals:
    """Counts of distinct fundamental frequencies of optic branches; a degenerate species counts once.

    `branches` is 3N; `optic` counts distinct optic frequencies.
    """

    atoms_primitive: int
    branches: int
    optic: int
    infrared: int
    raman: int
    infrared_and_raman: int
    silent: int
    hyper_raman: int


@dataclass(frozen=True, eq=False)
class Analysis:
    """The zone-centre analysis of a crystal.

    cautions  what to know before believing it, the most serious first.
    axes      a sentence on the Cartesian axes of all labels and tensors.
    scan      how the space group depends on the tolerance; None when it was not asked for.
    molecular molecules and complex ions followed into the crystal; None when it was not asked for.
    """

    structure: Structure
    symmetry: CrystalSymmetry
    sites: tuple[SiteRow, ...]
    species: tuple[SpeciesRow, ...]
    totals: Totals
    axes: str
    scan: Scan | None
    molecular: MolecularAnalysis | None
    cautions: tuple[OpenQuestion, ...]

    def __repr__(self) -> str:
        totals = self.totals
        return (
            f"Analysis({self.formula}, {self.space_group}, {self.factor_group.schoenflies}: "
            f"{totals.infrared} infrared, {totals.raman} Raman, {totals.silent} silent)"
        )

    def _repr_html_(self) -> str:
        from sitesym.views.notebook import summary_html

        return summary_html(self)

    @cached_property
    def formula(self) -> str:
        """Empirical formula as chemists write it: CaCO3, K2PtCl6; in Hill order for organic compounds."""
        return customary(reduced(self.structure.composition))

    @property
    def space_group(self) -> str:
        """Hermann-Mauguin symbol in the axes of the report: `R-3c`, `P2_1/c`, `P 1 1 2_1/b` where c is unique."""
        return self.symmetry.setting.symbol

    @cached_property
    def settings(self) -> tuple[SettingLabels, ...]:
        """For orthorhombic crystals the labels in all six settings, the report's own first; else empty."""
        return orthorhombic_labels(self.symmetry)

    @property
    def factor_group(self) -> PointGroup:
        """Point group of the crystal in the axes of the report."""
        return self.symmetry.factor_group

    @cached_property
    def factor_group_symbol(self) -> str:
        """Hermann-Mauguin symbol of the class with its orientation: `-3m`, `-4m2`, `2mm`."""
        symbol = oriented_symbol(self.factor_group, self.symmetry.lattice, self.symmetry.number)
        return symbol.replace(".", "")

    @cached_property
    def is_ordered(self) -> bool:
        """Whether every site is fully occupied by one element."""
        return self.structure.is_ordered

    def species_row(self, label: str) -> SpeciesRow:
        """The row of one species. Raises KeyError for a label that the factor group does not have."""
        return {row.label: row for row in self.species}[label]


def analyse(
    structure: Structure,
    tolerance: float = DEFAULT_TOLERANCE,
    *,
    axes: str = "auto",
    setting: str | None = None,
    scan: bool = True,
    molecules: bool = True,
    bonds: BondRules | None = None,
    molecule_tolerance: float | None = None,
    wavenumbers: Wavenumbers | None = None,
) -> Analysis:
    """Analyse the zone-centre vibrations of a crystal.

    tolerance  Å, for finding the space group.
    axes       "auto": those of the input cell when it is conventional, else of the standardised cell; "input" or
               "standard" insist on one.
    setting    Hermann-Mauguin symbol of a setting of the space group, to label and orient everything in it.
    scan       also search at other tolerances, to tell how far the space group can be trusted.
    molecules  also find molecules and complex ions and follow their vibrations; `bonds` is the user's word on what is
               bonded, `molecule_tolerance` (Å) serves the free molecules' own point groups (see `molecules`),
               `wavenumbers` are those that the user gives for their vibrations.

    Raises UsageError for arguments that make no sense, InconsistencyError when two routes to a number disagree.
    """
    _check_arguments(structure, tolerance, axes, setting)
    symmetry = find_symmetry(structure, tolerance, axes=axes, setting=setting)
    sites = _site_rows(symmetry)
    whole = checked_sum(symmetry, (row.contribution for row in sites))
    species = _species_rows(symmetry, whole)
    scanned = scan_tolerance(symmetry) if scan else None
    molecular = analyse_molecules(symmetry, whole, bonds, molecule_tolerance, wavenumbers) if molecules else None
    return Analysis(
        structure, symmetry, sites, species, _totals(symmetry, species), describe_axes(symmetry),
        scanned, molecular, cautions_of(structure, symmetry, scanned),
    )  # fmt: skip


def _check_arguments(structure: object, tolerance: object, axes: object, setting: object) -> None:
    """Say in plain words what a caller of the Python interface mixed up."""
    if not isinstance(structure, Structure):
        raise UsageError(
            f"analyse takes a Structure, not a value of type {type(structure).__name__}.",
            "Make one with sitesym.read(...), which takes paths, ase.Atoms and pymatgen structures.",
        )
    if isinstance(tolerance, bool) or not isinstance(tolerance, (int, float)):
        raise UsageError(f"A tolerance is a number of Å, not {tolerance!r}.", "Give one such as 0.01.")
    if axes not in AXES:
        raise UsageError(f"{axes!r} is no choice of axes.", f"Choose from {', '.join(AXES)}.")
    if setting is not None and not isinstance(setting, str):
        raise UsageError(f"A setting is a Hermann-Mauguin symbol, not {setting!r}.", "Give one such as 'Pbnm'.")


@dataclass(frozen=True, eq=False)
class _SiteKind:
    """What all orbits kept by the same operations have in common; the names are those of `SiteRow`."""

    group: PointGroup
    symbol: str
    site_species: Multiplicities
    contribution: Multiplicities


def _site_rows(symmetry: CrystalSymmetry) -> tuple[SiteRow, ...]:
    kinds: dict[bytes, _SiteKind] = {}
    for orbit in symmetry.orbits:
        if orbit.stabiliser.tobytes() not in kinds:
            kinds[orbit.stabiliser.tobytes()] = _site_kind(symmetry, orbit)
    return tuple(_site_row(symmetry, orbit, kinds[orbit.stabiliser.tobytes()]) for orbit in symmetry.orbits)


def _site_kind(symmetry: CrystalSymmetry, orbit: Orbit) -> _SiteKind:
    group = symmetry.site_group(orbit)
    vectors = group.matrices.trace(axis1=1, axis2=2)
    return _SiteKind(
        group,
        oriented_symbol(group, symmetry.lattice, symmetry.number),
        reduce_characters(group.species, vectors),
        site_contribution(symmetry, orbit),
    )


def _site_row(symmetry: CrystalSymmetry, orbit: Orbit, kind: _SiteKind) -> SiteRow:
    site = symmetry.structure.sites[orbit.site]
    x, y, z = symmetry.positions[orbit.atoms[0]].tolist()
    return SiteRow(
        site.label, site.element, site.occupancy, orbit.wyckoff, orbit.multiplicity, len(orbit.atoms), kind.group,
        kind.symbol, kind.site_species, kind.contribution, (x, y, z),
    )  # fmt: skip


def _species_rows(symmetry: CrystalSymmetry, whole: Multiplicities) -> tuple[SpeciesRow, ...]:
    group = symmetry.factor_group
    acoustic = vector_species(group)
    subtracted(whole, acoustic)
    return tuple(
        SpeciesRow(rule.label, rule.dimension, whole.get(rule.label, 0), acoustic.get(rule.label, 0), rule, tensor)
        for rule, tensor in zip(activities(group), tensor_species(group), strict=True)
    )


def _totals(symmetry: CrystalSymmetry, species: tuple[SpeciesRow, ...]) -> Totals:
    def count(rows: list[SpeciesRow]) -> int:
        return sum(row.optic for row in rows)

    return Totals(
        len(symmetry.atoms),
        3 * len(symmetry.atoms),
        count(list(species)),
        count([row for row in species if row.activity.infrared]),
        count([row for row in species if row.activity.raman]),
        count([row for row in species if row.activity.infrared and row.activity.raman]),
        count([row for row in species if row.activity.silent]),
        count([row for row in species if row.activity.hyper_raman]),
    )
