"""Free molecule -> site group -> factor group: what becomes of every motion of a unit in its crystal.

Each species of the free molecule is restricted to the site group by the site group's actual operations, and induced
from there to the factor group (Halford, J. Chem. Phys. 14, 8, 1946; Hornig, J. Chem. Phys. 16, 1063, 1948; Winston and
Halford, J. Chem. Phys. 17, 607, 1949). Nothing is looked up by the name of a group.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from sitesym.errors import InconsistencyError
from sitesym.groups.point_group import PointGroup
from sitesym.groups.subduction import (
    Multiplicities,
    added,
    in_order,
    induce,
    reduce_characters,
    subduce,
    total,
)
from sitesym.molecules import FreeMolecule, UnitSet
from sitesym.selection import Activity, activity_of
from sitesym.vibrations import FreeVibrations, free_vibrations, rotation_characters


@dataclass(frozen=True, eq=False)
class Vibration:
    """All internal vibrations of one species and one kind of a unit, followed into the crystal.

    species  of the free molecule; count how many vibrations of that kind belong to it.
    free     its selection rules in the free molecule.
    site     species of the site group to which ONE such vibration belongs; crystal those of the factor group.
    """

    species: str
    dimension: int
    count: int
    kind: str
    free: Activity
    site: Multiplicities
    crystal: Multiplicities


@dataclass(frozen=True, slots=True)
class Motions:
    """Translations or librations of a unit: species of the free molecule, of the site group, of the factor group."""

    free: Multiplicities
    site: Multiplicities
    crystal: Multiplicities


@dataclass(frozen=True, eq=False)
class UnitCorrelation:
    """One set of equivalent units followed into the crystal.

    vibrations  internal ones, in the order of the free molecule's species and of kinds; empty for single atoms.
    librations  crystal part empty for single atoms. translations include the acoustic branches.
    internal    species of the factor group of all internal vibrations.
    """

    units: UnitSet
    vibrations: tuple[Vibration, ...]
    librations: Motions
    translations: Motions
    internal: Multiplicities

    @property
    def everything(self) -> Multiplicities:
        """Species of the factor group of all motions of these units."""
        return added(self.internal, self.librations.crystal, self.translations.crystal)


def correlate(factor_group: PointGroup, units: UnitSet) -> UnitCorrelation:
    """Follow the motions of a set of finite units into the crystal.

    Raises InconsistencyError when the sums by way of the site do not keep the number of branches.
    """
    site_group = units.site_group
    if site_group is None:
        raise InconsistencyError("A net has no site group.", "Treat it by its atomic sites.")
    up = induce(factor_group, site_group)
    translations = _vectors(units, site_group, up, factor_group)
    if units.free is None:
        return UnitCorrelation(units, (), Motions({}, {}, {}), translations, {})
    motions = free_vibrations(units.free.group, units.free.positions, units.free.bonds)
    librations = _librations(units.free, motions, site_group, up, factor_group)
    vibrations = _vibrations(units.free, motions, site_group, up, factor_group)
    internal = in_order(factor_group, added(*(_times(one.crystal, one.count) for one in vibrations)))
    result = UnitCorrelation(units, vibrations, librations, translations, internal)
    _check_branches(factor_group, result)
    return result


def _vectors(
    units: UnitSet, site_group: PointGroup, up: dict[str, Multiplicities], factor_group: PointGroup
) -> Motions:
    site = reduce_characters(site_group.species, np.trace(site_group.matrices, axis1=1, axis2=2))
    free: Multiplicities = {}
    if units.free is not None:
        group = units.free.group
        free = reduce_characters(group.species, np.trace(group.matrices, axis1=1, axis2=2))
    return Motions(free, site, in_order(factor_group, total(site, up)))


def _librations(
    free: FreeMolecule, motions: FreeVibrations, site_group: PointGroup, up: dict[str, Multiplicities],
    factor_group: PointGroup,
) -> Motions:  # fmt: skip
    site = reduce_characters(site_group.species, rotation_characters(site_group, free.positions))
    return Motions(motions.rotations, site, in_order(factor_group, total(site, up)))


def _vibrations(
    free: FreeMolecule, motions: FreeVibrations, site_group: PointGroup, up: dict[str, Multiplicities],
    factor_group: PointGroup,
) -> tuple[Vibration, ...]:  # fmt: skip
    down = subduce(free.group, site_group)
    sizes = {one.label: one.dimension for one in free.group.species}
    found = []
    for label in motions.internal:
        site = in_order(site_group, down[label])
        crystal = in_order(factor_group, total(site, up))
        for kind, parts in motions.kinds.items():
            if label in parts:
                rule = activity_of(free.group, label)
                found.append(Vibration(label, sizes[label], parts[label], kind, rule, site, crystal))
    return tuple(found)


def _times(parts: Multiplicities, count: int) -> Multiplicities:
    return {label: times * count for label, times in parts.items()}


def _check_branches(factor_group: PointGroup, result: UnitCorrelation) -> None:
    sizes = {one.label: one.dimension for one in factor_group.species}
    branches = sum(sizes[label] * count for label, count in result.everything.items())
    expected = 3 * len(result.units.unit.atoms) * result.units.count
    if branches != expected:
        raise InconsistencyError(
            f"The motions of {result.units.unit.formula} add up to {branches} branches of the crystal, not {expected}.",
            "The free molecule's group does not contain its site group; try another --molecule-tolerance.",
        )


def check_against_sites(
    factor_group: PointGroup, correlations: Iterable[UnitCorrelation], nets: Multiplicities, whole: Multiplicities
) -> None:
    """Compare the sum over all units, and the atomic sites of nets, with the analysis by atomic sites.

    Raises InconsistencyError where a species differs.
    """
    summed = in_order(factor_group, added(nets, *(one.everything for one in correlations)))
    if summed != in_order(factor_group, whole):
        raise InconsistencyError(
            f"By way of the molecules the crystal has {summed}, by way of its atoms {in_order(factor_group, whole)}.",
            "The free molecules' groups do not fit the crystal; try another --molecule-tolerance.",
        )
