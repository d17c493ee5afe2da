"""Overtones, combinations and differences of the observed fundamentals, and resonances with them.

A binary level may be seen if its species at the zone centre, the symmetrised square or the product of its parents',
occur in the dipole (infrared) or the polarizability (Raman). Away from the centre pairs of opposite wavevectors add a
broad background with fewer restrictions (Birman, Phys. Rev. 131, 1489, 1963), which is not counted as a reason here.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from itertools import combinations_with_replacement
from math import exp

from sitesym.analysis import Analysis
from sitesym.bands.assignment import Placed
from sitesym.bands.inventory import Family
from sitesym.bands.measurement import RAMAN, Band
from sitesym.bands.reasons import Reason
from sitesym.fate import Component
from sitesym.groups.point_group import PointGroup
from sitesym.groups.products import product, symmetrised_power
from sitesym.selection import activity_of

_ABOVE, _BELOW = 1.0, 2.5
"""Per cent of the sum by which a level may lie above or below it: anharmonicity lowers most levels."""

RESONANCE_REACH = 120.0
"""cm⁻¹. Levels farther apart share little intensity: the pair of carbon dioxide lies 105 apart."""


@dataclass(frozen=True, slots=True)
class Parent:
    """A fundamental that was seen in one technique: its family and its mean wavenumber (cm⁻¹) there.

    components  those of the family that the technique shows: what was seen in Raman is g where there is inversion.
    """

    family: Family
    technique: str
    wavenumber: float

    @property
    def components(self) -> tuple[Component, ...]:
        """What was seen: the components active in the technique."""
        return self.family.active(self.technique)


def parents_of(placed: Sequence[Placed]) -> tuple[Parent, ...]:
    """The families that bands were given to, by technique; lattice modes and nets one parent for each band."""
    found: dict[tuple[str, str], list[float]] = {}
    families: dict[tuple[str, str], Family] = {}
    for one in placed:
        if one.family is not None:
            name = one.family.name if one.family.is_internal else f"{one.family.name} {one.band.wavenumber:g}"
            key = name, one.band.technique
            families[key] = one.family
            found.setdefault(key, []).append(one.band.wavenumber)
    return tuple(Parent(families[key], key[1], sum(values) / len(values)) for key, values in found.items())


def level_reasons(analysis: Analysis, band: Band, parents: Sequence[Parent]) -> list[Reason]:
    """Overtones, sums and differences of two observed fundamentals that fall on a band and are allowed there."""
    reasons = []
    for one, two in combinations_with_replacement(parents, 2):
        reasons += _sum(analysis.factor_group, band, one, two)
        if one.family is not two.family:
            reasons += _difference(analysis.factor_group, band, one, two)
    return reasons


def _sum(group: PointGroup, band: Band, one: Parent, two: Parent) -> list[Reason]:
    expected = one.wavenumber + two.wavenumber
    fit = _closeness(band, expected)
    if fit <= 0:
        return []
    species = allowed_species(group, one, two, band.technique)
    if not species:
        return []
    same = one is two or (one.family is two.family and one.family.is_internal)
    internal = one.family.is_internal and two.family.is_internal
    prior = (0.62 if same else 0.5) * (1.0 if internal else 0.55)
    name = _level_name(one, two, same)
    argument = (
        f"allowed as {name} of {_units(one, two)}: {one.wavenumber:g} + {two.wavenumber:g} = {expected:g} cm⁻¹, and "
        f"the product of their species contains {', '.join(species[:4])}"
    )
    cause = "overtone" if same else "combination"
    test = "its intensity changes with temperature and isotopic substitution as that of its parents together"
    return [Reason(cause, prior * fit, argument, (one.wavenumber, two.wavenumber), species, test)]


def _level_name(one: Parent, two: Parent, same: bool) -> str:
    """`2ν2`, `ν1 + ν4`; an overtone of a mode without a name by its wavenumber."""
    if not same:
        return f"{one.family.vibration} + {two.family.vibration}"
    return f"2{one.family.vibration}" if one.family.is_internal else f"the overtone of {one.wavenumber:g} cm⁻¹"


def _difference(group: PointGroup, band: Band, one: Parent, two: Parent) -> list[Reason]:
    upper, lower = (one, two) if one.wavenumber > two.wavenumber else (two, one)
    expected = upper.wavenumber - lower.wavenumber
    fit = _closeness(band, expected)
    if fit <= 0 or lower.wavenumber > 700 or not upper.family.is_internal:
        return []
    species = allowed_species(group, upper, lower, band.technique)
    if not species:
        return []
    argument = (
        f"allowed as the difference {upper.family.vibration} − {lower.family.vibration}: {upper.wavenumber:g} − "
        f"{lower.wavenumber:g} = {expected:g} cm⁻¹; the lower level must be populated"
    )
    test = "differences vanish on cooling"
    return [Reason("combination", 0.18 * fit, argument, (upper.wavenumber, lower.wavenumber), species, test)]


def _units(one: Parent, two: Parent) -> str:
    return one.family.unit if one.family.unit == two.family.unit else f"{one.family.unit} and {two.family.unit}"


def _closeness(band: Band, expected: float) -> float:
    """1 at the sum itself or a little below, falling to 0 at the edges."""
    if expected <= 0:
        return 0.0
    off = band.wavenumber - expected
    reach = 2 * band.uncertainty + (_ABOVE if off > 0 else _BELOW) / 100 * expected
    return max(0.0, 1 - (off / reach) ** 2)


@lru_cache(maxsize=4096)
def allowed_species(group: PointGroup, one: Parent, two: Parent, technique: str) -> tuple[str, ...]:
    """Species of a binary level of two parents that a technique shows, in the group's order."""
    found: set[str] = set()
    for first in one.components:
        for second in two.components:
            if one == two and first.label == second.label and first.count == 1:
                found |= set(symmetrised_power(group, first.label, 2))
            else:
                found |= set(product(group, (first.label, second.label)))
    rules = [activity_of(group, species.label) for species in group.species if species.label in found]
    return tuple(rule.label for rule in rules if (rule.raman if technique == RAMAN else rule.infrared))


def resonance_reasons(
    analysis: Analysis, band: Band, placed: Sequence[Placed], parents: Sequence[Parent]
) -> list[Reason]:
    """A band near a fundamental of the same species that a binary level of the parents would meet."""
    reasons = []
    for one in placed:
        family = one.family
        near = abs(one.band.wavenumber - band.wavenumber)
        if family is None or not family.is_internal or one.band.technique != band.technique:
            continue
        if one.band is band or not 0 < near <= RESONANCE_REACH:
            continue
        reasons += _resonances(analysis.factor_group, band, one.band, family, parents)
    return reasons


def _resonances(
    group: PointGroup, band: Band, partner: Band, family: Family, parents: Sequence[Parent]
) -> list[Reason]:
    own = {component.label for component in family.active(band.technique)}
    reasons = []
    internal = [parent for parent in parents if parent.family.is_internal]
    for one, two in combinations_with_replacement(internal, 2):
        expected = one.wavenumber + two.wavenumber
        low, high = sorted((band.wavenumber, partner.wavenumber))
        if family in (one.family, two.family) or not low - 15 <= expected <= high + 15:
            continue
        shared = own & set(allowed_species(group, one, two, band.technique))
        if not shared:
            continue
        name = f"2{one.family.vibration}" if one is two else f"{one.family.vibration} + {two.family.vibration}"
        argument = (
            f"allowed as a Fermi resonance: {name} ({expected:g} cm⁻¹) and {family.name} share the species "
            f"{', '.join(sorted(shared))} and lie close, so that they mix and both are seen: {low:g} and {high:g} cm⁻¹"
        )
        test = "isotopic substitution or pressure moves the two levels apart and changes their ratio"
        score = 0.62 * (1 - (high - low) / (2 * RESONANCE_REACH)) * _sum_rule(family, expected, low + high)
        reasons.append(
            Reason("fermi_resonance", score, argument, (one.wavenumber, two.wavenumber, partner.wavenumber),
                   tuple(sorted(shared)), test)
        )  # fmt: skip
    return reasons


def _sum_rule(family: Family, level: float, seen: float) -> float:
    """Levels that repel each other keep their sum: 1 when free fundamental and level add up to what is seen."""
    if family.wavenumber is None:
        return 0.6
    return exp(-(((seen - level - family.wavenumber) / 25.0) ** 2))
