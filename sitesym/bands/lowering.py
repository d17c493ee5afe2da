"""Which loss of symmetry would account for the bands that the assumed structure does not allow.

Every subgroup of the factor group, up to conjugacy, is tried: the components of each family are restricted to it by its
operations and the bands assigned anew. A lower symmetry always allows more, so the highest groups that leave the fewest
bands without a place are returned, with what speaks against them.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import hypot

from sitesym.analysis import Analysis
from sitesym.bands.assignment import Placed, assign
from sitesym.bands.inventory import Family
from sitesym.bands.measurement import Band
from sitesym.fate import Component
from sitesym.groups.point_group import PointGroup
from sitesym.groups.subduction import Multiplicities, in_order, subduce, total
from sitesym.groups.subgroups import Subgroup, subgroups
from sitesym.selection import activity_of


@dataclass(frozen=True, eq=False)
class Lowering:
    """One lower symmetry.

    subgroup   the operations kept; order and name by `subgroup.group`.
    explains   bands that gain a place; fails those that still have none.
    infrared, raman   bands that it allows in all, for comparison with what was seen.
    """

    subgroup: Subgroup
    explains: tuple[Band, ...]
    fails: tuple[Band, ...]
    infrared: int
    raman: int

    @property
    def name(self) -> str:
        """Schoenflies symbol of the group that is left."""
        return self.subgroup.group.schoenflies


def lowerings(
    analysis: Analysis,
    families: Sequence[Family],
    bands: Sequence[Band],
    placed: Sequence[Placed],
    rivals: Sequence[Family] = (),
) -> tuple[Lowering, ...]:
    """The highest subgroups that account for bands without a place, the best first; empty when none is left over."""
    left = [one.band for one in placed if one.family is None and one.rival is None]
    if not left:
        return ()
    found: list[Lowering] = []
    for subgroup in subgroups(analysis.factor_group)[1:]:
        if any(set(other.subgroup.indices) >= set(subgroup.indices) and not other.fails for other in found):
            continue
        lowered = _lowered(analysis.factor_group, subgroup, families)
        again = assign(bands, lowered, rivals=rivals)
        crowded = _crowded(again)
        homeless = {one.band for one in again if one.family is None and one.rival is None}
        fails = tuple(one.band for one in again if one.band in homeless | crowded)
        explains = tuple(band for band in left if band not in fails)
        if explains and not _is_implied(subgroup, explains, found):
            allowed = [sum(family.capacity(technique) for family in lowered) for technique in ("infrared", "raman")]
            found.append(Lowering(subgroup, explains, fails, allowed[0], allowed[1]))
    return tuple(sorted(found, key=lambda one: (len(one.fails), -one.subgroup.order)))[:4]


def _crowded(placed: Sequence[Placed]) -> set[Band]:
    """Bands too many for their family: a mode active in both techniques has one wavenumber, not two.

    Raman and infrared bands of a family that coincide are one; what is left must not outnumber the active components.
    """
    too_many: set[Band] = set()
    for family in dict.fromkeys(one.family for one in placed if one.family is not None):
        bands = [one.band for one in placed if one.family is family]
        distinct = [band for k, band in enumerate(bands) if not any(_coincide(band, other) for other in bands[:k])]
        room = sum(part.count for part in family.components if not part.activity.silent)
        too_many.update(distinct[room:])
    return too_many


def _coincide(one: Band, two: Band) -> bool:
    return one.technique != two.technique and abs(one.wavenumber - two.wavenumber) <= hypot(
        one.uncertainty, two.uncertainty
    )


def _is_implied(subgroup: Subgroup, explains: tuple[Band, ...], found: Sequence[Lowering]) -> bool:
    """Whether a larger group that holds this one explains as much already."""
    return any(
        set(other.subgroup.indices) >= set(subgroup.indices) and set(other.explains) >= set(explains) for other in found
    )


def _lowered(group: PointGroup, subgroup: Subgroup, families: Sequence[Family]) -> list[Family]:
    table = subduce(group, subgroup.group)
    return [replace(family, components=_restricted(subgroup.group, table, family)) for family in families]


def _restricted(group: PointGroup, table: dict[str, Multiplicities], family: Family) -> tuple[Component, ...]:
    parts = total({one.label: one.count for one in family.components}, table)
    return tuple(Component(count, activity_of(group, label)) for label, count in in_order(group, parts).items())
