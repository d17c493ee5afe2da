"""What becomes of one motion of a unit on its way from the free molecule through its site into the crystal.

Two steps, each with its own cause. The site group, having fewer operations than the free molecule, may lift
degeneracies and allow what the free molecule forbids. The correlation field couples the equivalent units of the
primitive cell: every species of the site becomes as many components as the factor group holds of it (Hornig, J. Chem.
Phys. 16, 1063, 1948; Winston and Halford, J. Chem. Phys. 17, 607, 1949).

By Frobenius reciprocity a species of the site is active in infrared or Raman exactly when at least one of the
components that it gives in the crystal is. So no activity is ever lost as a whole, and whatever is allowed anew is
allowed by the site; what the correlation field can do is to forbid single components, in which the units move against
each other.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import Enum
from functools import lru_cache

from sitesym.correlation import Motions, Vibration
from sitesym.groups.point_group import PointGroup
from sitesym.groups.subduction import Multiplicities, in_order, induce, subduce
from sitesym.selection import Activity, activity_of


class Degeneracy(Enum):
    """What the site does to the degeneracy of a free motion."""

    NONE = "not degenerate"
    KEPT = "kept"
    PARTLY = "partly lifted"
    LIFTED = "lifted"


@dataclass(frozen=True, slots=True)
class Component:
    """`count` motions of one species at one stage, with its selection rules."""

    count: int
    activity: Activity

    @property
    def label(self) -> str:
        """The species, in plain ASCII."""
        return self.activity.label


Components = tuple[Component, ...]


@dataclass(frozen=True, slots=True)
class Branch:
    """One species of the site, and the components of the crystal that it gives for each time that it occurs."""

    site: Component
    crystal: Components


@dataclass(frozen=True, slots=True)
class Counts:
    """Distinct bands that one motion gives at one stage, a degenerate one counted once: all, and the active ones."""

    components: int
    infrared: int
    raman: int
    both: int

    @property
    def silent(self) -> int:
        """Those that neither infrared nor Raman shows."""
        return self.components - self.infrared - self.raman + self.both


@dataclass(frozen=True, slots=True)
class Fate:
    """One kind of motion of a unit followed into the crystal.

    free      its species in the free molecule; `free.count` motions of that kind share this fate.
    branches  the species of the site group that ONE of them becomes, each with its components in the crystal.
    crystal   all components in the crystal of ONE of them, polar axes along x, y, z of the report.
    """

    free: Component
    branches: tuple[Branch, ...]
    crystal: Components

    @property
    def site(self) -> Components:
        """All species of the site that ONE of the motions becomes."""
        return tuple(branch.site for branch in self.branches)

    @property
    def degeneracy(self) -> Degeneracy:
        """Whether the site keeps or lifts the degeneracy of the free motion."""
        dimension = self.free.activity.dimension
        if dimension == 1:
            return Degeneracy.NONE
        if counts(self.site).components == 1:
            return Degeneracy.KEPT
        left = max(part.activity.dimension for part in self.site)
        return Degeneracy.LIFTED if left == 1 else Degeneracy.PARTLY

    @property
    def is_split_by_correlation(self) -> bool:
        """Whether some species of the site gives more than one component."""
        return any(counts(branch.crystal).components > 1 for branch in self.branches)

    @property
    def gained(self) -> tuple[str, ...]:
        """What the site allows and the free molecule does not: of "infrared" and "raman", in this order."""
        free, site = counts((Component(1, self.free.activity),)), counts(self.site)
        allowed = (("infrared", free.infrared, site.infrared), ("raman", free.raman, site.raman))
        return tuple(name for name, before, after in allowed if after and not before)

    @property
    def cancelled(self) -> Components:
        """Silent components of the crystal that come from an active species of the site: the units' moments cancel."""
        return tuple(
            part
            for branch in self.branches
            if not branch.site.activity.silent
            for part in branch.crystal
            if part.activity.silent
        )

    @property
    def at_free(self) -> Counts:
        """Bands of ONE motion in the free molecule."""
        return counts((Component(1, self.free.activity),))

    @property
    def at_site(self) -> Counts:
        """Bands of ONE motion on its site."""
        return counts(self.site)

    @property
    def in_crystal(self) -> Counts:
        """Bands of ONE motion in the crystal."""
        return counts(self.crystal)


def fate_of(vibration: Vibration, site_group: PointGroup, factor_group: PointGroup) -> Fate:
    """The fate of the vibrations of one row of a correlation, in their site group and factor group."""
    free = Component(vibration.count, vibration.free)
    return _followed(free, vibration.site, vibration.crystal, site_group, factor_group)


def fates_of_motions(
    motions: Motions, free_group: PointGroup, site_group: PointGroup, factor_group: PointGroup
) -> tuple[Fate, ...]:
    """The fates of translations or librations, one for each species of the free molecule that they span."""
    down = _subduced(free_group, site_group)
    up = _induced(factor_group, site_group)
    found = []
    for label, count in motions.free.items():
        crystal: Multiplicities = {}
        for part, times in down[label].items():
            for target, number in up[part].items():
                crystal[target] = crystal.get(target, 0) + times * number
        free = Component(count, activity_of(free_group, label))
        site = in_order(site_group, down[label])
        found.append(_followed(free, site, in_order(factor_group, crystal), site_group, factor_group))
    return tuple(found)


def _followed(
    free: Component,
    site: Mapping[str, int],
    crystal: Mapping[str, int],
    site_group: PointGroup,
    factor_group: PointGroup,
) -> Fate:
    up = _induced(factor_group, site_group)
    branches = tuple(
        Branch(part, components(factor_group, in_order(factor_group, up[part.label])))
        for part in components(site_group, site)
    )
    return Fate(free, branches, components(factor_group, crystal))


def components(group: PointGroup, parts: Mapping[str, int]) -> Components:
    """Multiplicities of species of a group with the selection rules of each."""
    return tuple(Component(count, activity_of(group, label)) for label, count in parts.items() if count)


def counts(parts: Components) -> Counts:
    """How many distinct bands some components give, and how many of them are active."""

    def total(chosen: list[Component]) -> int:
        return sum(part.count for part in chosen)

    return Counts(
        total(list(parts)),
        total([part for part in parts if part.activity.infrared]),
        total([part for part in parts if part.activity.raman]),
        total([part for part in parts if part.activity.infrared and part.activity.raman]),
    )


@lru_cache(maxsize=64)
def _induced(factor_group: PointGroup, site_group: PointGroup) -> dict[str, Multiplicities]:
    return induce(factor_group, site_group)


@lru_cache(maxsize=64)
def _subduced(free_group: PointGroup, site_group: PointGroup) -> dict[str, Multiplicities]:
    return subduce(free_group, site_group)
