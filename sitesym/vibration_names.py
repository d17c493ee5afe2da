"""Usual names (ν1, ν2, …) and free wavenumbers for the vibrations of a unit."""

from __future__ import annotations

from collections.abc import Sequence

from sitesym.correlation import Vibration
from sitesym.known_units import KnownUnit, KnownVibration, composition_of, known_units


def known_vibrations(
    formula: str, group: str, vibrations: Sequence[Vibration]
) -> tuple[tuple[tuple[KnownVibration, ...], ...], str]:
    """Names for each of `vibrations` of a unit, and their source; empty tuples and "" where the unit is not known.

    A unit that is not in the table but has the shape of one that is (the same group and the same species) gets the
    names of that type, without wavenumbers.
    """
    same_group = [unit for unit in known_units() if unit.group == group]
    wanted = composition_of(formula)
    exact = next((unit for unit in same_group if unit.composition == wanted and _fits(unit, vibrations)), None)
    if exact is not None:
        return _assigned(exact.vibrations, vibrations), exact.source
    shape = sorted(count for _, count in wanted)
    like = (unit for unit in same_group if sorted(count for _, count in unit.composition) == shape)
    model = next((unit for unit in like if _fits(unit, vibrations)), None)
    if model is None:
        return ((),) * len(vibrations), ""
    bare = tuple(KnownVibration(one.name, one.species, one.kind, None) for one in model.vibrations)
    return _assigned(bare, vibrations), ""


def _fits(unit: KnownUnit, vibrations: Sequence[Vibration]) -> bool:
    """Whether the table lists as many vibrations of each species as the molecule has."""
    found: dict[str, int] = {}
    for one in vibrations:
        found[one.species] = found.get(one.species, 0) + one.count
    listed: dict[str, int] = {}
    for known in unit.vibrations:
        listed[known.species] = listed.get(known.species, 0) + 1
    return found == listed


def _assigned(
    known: tuple[KnownVibration, ...], vibrations: Sequence[Vibration]
) -> tuple[tuple[KnownVibration, ...], ...]:
    """Give each row the known vibrations of its species, those of its own kind first."""
    free = list(known)
    result: list[tuple[KnownVibration, ...]] = []
    for row in vibrations:
        mine = [one for one in free if one.species == row.species]
        mine.sort(key=lambda one: one.kind != row.kind)
        taken = mine[: row.count]
        free = [one for one in free if one not in taken]
        result.append(tuple(taken))
    return tuple(result)
