"""Which lower symmetry of a unit's site would allow a vibration that the assumed site forbids.

Unlike a lowering of the whole crystal this is local: a neighbour replaced, a vacancy, a unit turned at random. Every
subgroup of the site group, up to conjugacy, is tried by its operations; the highest that allow the band are returned.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from sitesym.analysis import Analysis
from sitesym.bands.inventory import Family
from sitesym.bands.measurement import RAMAN, Band
from sitesym.groups.point_group import PointGroup
from sitesym.groups.subduction import subduce
from sitesym.groups.subgroups import subgroups
from sitesym.molecular import MoleculeRow
from sitesym.selection import activity_of


@dataclass(frozen=True, slots=True)
class SiteLowering:
    """A lower site symmetry of one kind of unit: Schoenflies symbols of the site assumed and of what would be left."""

    family: Family
    assumed: str
    left: str


def site_lowerings(analysis: Analysis, family: Family, technique: str) -> tuple[SiteLowering, ...]:
    """The highest subgroups of the site group that show a vibration which the site assumed does not show."""
    if analysis.molecular is None or family.capacity(technique):
        return ()
    rows = [row for row in analysis.molecular.molecules if row.name == family.unit]
    return tuple(one for row in rows for one in _of_row(row, family, technique))


def _of_row(row: MoleculeRow, family: Family, technique: str) -> list[SiteLowering]:
    site = row.units.site_group
    assert site is not None
    found: list[SiteLowering] = []
    kept: list[set[int]] = []
    for subgroup in subgroups(site)[1:]:
        inside = any(set(subgroup.indices.tolist()) < larger for larger in kept)
        if not inside and _shows(row.free.group, subgroup.group, family.free_species, technique):
            kept.append(set(subgroup.indices.tolist()))
            found.append(SiteLowering(family, site.schoenflies, subgroup.group.schoenflies))
    return found[:2]


def _shows(free: PointGroup, group: PointGroup, species: str, technique: str) -> bool:
    rules = [activity_of(group, label) for label in subduce(free, group)[species]]
    return any(rule.raman if technique == RAMAN else rule.infrared for rule in rules)


def nearest_forbidden(band: Band, families: Sequence[Family]) -> tuple[Family | None, float]:
    """The fundamental of known wavenumber, forbidden in the band's technique, that lies nearest; how near (0 to 1)."""
    best: tuple[Family | None, float] = (None, 0.0)
    for family in families:
        if family.wavenumber is None or family.capacity(band.technique):
            continue
        near = 1 - abs(band.wavenumber - family.wavenumber) / (12 + 0.012 * family.wavenumber) / 3
        if near > best[1]:
            best = family, near
    return best
