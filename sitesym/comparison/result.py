"""What a comparison of two structures finds: relation, correlation of species, folded wavevectors, new activity."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal

from sitesym.analysis import Analysis, SiteRow
from sitesym.comparison.relation import Embedding, Refusal
from sitesym.comparison.wavevectors import Star
from sitesym.groups.subduction import Multiplicities, added, in_order
from sitesym.selection import Activity
from sitesym.structure import OpenQuestion, reduced

Relation = Literal["group-subgroup", "same", "none"]
Technique = Literal["infrared", "raman"]
TECHNIQUES: tuple[Technique, ...] = ("infrared", "raman")


def sees(activity: Activity, technique: Technique) -> bool:
    """Whether a technique sees a species with these selection rules."""
    return activity.infrared if technique == "infrared" else activity.raman


@dataclass(frozen=True, eq=False)
class CentreRow:
    """One species of the parent's factor group.

    child    what one mode of it becomes in the child; optic: how many optic modes of it the parent has.
    """

    label: str
    dimension: int
    optic: int
    activity: Activity
    child: Multiplicities

    @property
    def all_modes(self) -> Multiplicities:
        """What all its optic modes become."""
        return {label: count * self.optic for label, count in self.child.items() if self.optic}


@dataclass(frozen=True, eq=False)
class FoldedRow:
    """Modes of the parent at one star of wavevectors that folds to the child's zone centre.

    child    the species of the child that they become, all atoms together; sites: by each site of the parent.
    """

    star: Star
    child: Multiplicities
    sites: tuple[tuple[str, Multiplicities], ...]


@dataclass(frozen=True, eq=False)
class ActiveModes:
    """The child's optic modes that one technique sees, by where they come from.

    parent       number of distinct frequencies that it sees in the parent.
    kept         from species that it sees in the parent, too.
    zone_centre  from zone-centre species that it does not see in the parent.
    folding      from other wavevectors of the parent.
    silent       those of `zone_centre` that neither infrared nor Raman sees in the parent.
    """

    technique: Technique
    parent: int
    kept: Multiplicities
    zone_centre: Multiplicities
    folding: Multiplicities
    silent: Multiplicities

    def seen(self, activity: Activity) -> bool:
        """Whether the technique sees a species with these selection rules."""
        return sees(activity, self.technique)

    @property
    def new(self) -> Multiplicities:
        """Newly active ones, from zone centre and folding together."""
        return added(self.zone_centre, self.folding)

    @property
    def child(self) -> int:
        """Number of distinct frequencies that it sees in the child."""
        return sum(self.kept.values()) + sum(self.new.values())

    @property
    def split(self) -> int:
        """How many more frequencies there are because degenerate species that it sees in the parent split."""
        return sum(self.kept.values()) - self.parent


@dataclass(frozen=True, eq=False)
class SiteChange:
    """One set of equivalent sites of the child and the set of the parent from which it comes.

    displacement  Å, the longest of its atoms, the strain taken out.
    """

    parent: SiteRow
    child: SiteRow
    displacement: float


@dataclass(frozen=True, eq=False)
class Comparison:
    """Two structures compared.

    relation   "group-subgroup", "same" (the child has all the symmetry of the parent) or "none".
    embedding  the child laid into the parent, None without relation; refusal: why there is none.
    centre     the parent's zone-centre species and what they become; empty without relation.
    folded     the parent's other wavevectors that fold to the child's zone centre; None where they cannot be counted,
               because sites of the parent are only partly occupied.
    active     for infrared and Raman where the child's modes come from; empty where that cannot be counted.
    sites      where the child's atoms stand in the parent; empty without relation.
    reversed   whether the two are related the other way round: the parent's group is a subgroup of the child's.
    cautions   what to know before believing it.
    """

    parent: Analysis
    child: Analysis
    relation: Relation
    embedding: Embedding | None
    refusal: Refusal | None
    centre: tuple[CentreRow, ...]
    folded: tuple[FoldedRow, ...] | None
    active: tuple[ActiveModes, ...]
    sites: tuple[SiteChange, ...]
    reversed: bool
    cautions: tuple[OpenQuestion, ...]

    def __repr__(self) -> str:
        return f"Comparison({self.parent.space_group} to {self.child.space_group}: {self.relation})"

    def new(self, technique: Technique) -> Multiplicities:
        """Species of the child that become active, with how many modes; empty without relation."""
        found = next((one.new for one in self.active if one.technique == technique), {})
        return in_order(self.child.factor_group, found)

    @property
    def becoming_symmetric(self) -> tuple[str, ...]:
        """Species of the parent that have modes and become, in part, totally symmetric in the child but are not yet."""
        whole = self.child.factor_group.species[0].label
        return tuple(row.label for row in self.centre[1:] if row.optic and whole in row.child)


def summed(parts: Iterable[Multiplicities], analysis: Analysis) -> Multiplicities:
    """The sum in the order of the factor group's species."""
    return in_order(analysis.factor_group, added(*parts))


def formula_units(analysis: Analysis) -> int | None:
    """Formula units in the primitive cell; None where partial occupancies leave no whole number."""
    structure = analysis.structure
    share = len(analysis.symmetry.atoms) / len(structure)
    amounts = structure.composition
    element, unit = next(iter(reduced(amounts).items()))
    count = amounts[element] * share / unit
    return round(count) if abs(count - round(count)) < 0.02 * count else None
