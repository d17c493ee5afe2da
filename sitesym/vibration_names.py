"""Usual names (ν1, ν2, …) and free wavenumbers for the vibrations of a unit."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from typing import Protocol

from sitesym.known_units import Entry, KnownUnit, KnownVibration, composition_of, index

Names = tuple[tuple[KnownVibration, ...], ...]


class VibrationRow(Protocol):
    """All vibrations of one species and one kind of a free molecule: `count` of them."""

    @property
    def species(self) -> str:
        """Species of the free molecule, in plain ASCII."""

    @property
    def kind(self) -> str:
        """One of `sitesym.vibrations.KINDS`."""

    @property
    def count(self) -> int:
        """How many there are."""


@dataclass(frozen=True, slots=True)
class Naming:
    """What the table of common units says about a unit.

    names   for each row of vibrations the known ones; empty tuples where the unit is not known.
    unit    the tabulated unit itself; None where only one of the same shape, or none, is known.
    source  of the wavenumbers, or "".
    remark  a sentence where the table could not be used as it stands, or "".
    """

    names: Names
    unit: KnownUnit | None
    source: str
    remark: str


def known_vibrations(formula: str, group: str, vibrations: Sequence[VibrationRow], *, alone: bool) -> Naming:
    """Names and wavenumbers for the `vibrations` of a unit with this formula and free group.

    alone  whether nothing but such units is there, so that it bears no charge. Where the table lists several charges, a
           unit beside others is taken for an ion.

    A unit that is not in the table but has the shape of one that is (the same group and the same species) gets the
    names of that type, without wavenumbers.
    """
    wanted = composition_of(formula)
    same_group = [entry for entry in index() if entry.group == group]
    exact = list(_fitting((entry for entry in same_group if entry.composition == wanted), vibrations))
    suiting = [unit for unit in exact if (unit.charge == 0) == alone] or exact
    if len(suiting) == 1:
        return Naming(_assigned(suiting[0].vibrations, vibrations), suiting[0], suiting[0].source, "")
    if suiting:
        charges = " and ".join(f"{unit.charge:+d}" if unit.charge else "0" for unit in suiting).replace("-", "−")
        remark = f"The table lists this unit with the charges {charges}, so no wavenumbers were taken from it."
        return Naming(_assigned(_bare(suiting[0]), vibrations), None, "", remark)
    shape = sorted(count for _, count in wanted)
    like = next(_fitting((entry for entry in same_group if entry.shape == shape), vibrations), None)
    names = _assigned(_bare(like), vibrations) if like else ((),) * len(vibrations)
    return Naming(names, None, "", "")


def _fitting(entries: Iterable[Entry], vibrations: Sequence[VibrationRow]) -> Iterator[KnownUnit]:
    """Those for which the table lists as many vibrations of each species as the molecule has."""
    found: dict[str, int] = {}
    for one in vibrations:
        found[one.species] = found.get(one.species, 0) + one.count
    return (entry.unit for entry in entries if _listed(entry.unit) == found)


def _listed(unit: KnownUnit) -> dict[str, int]:
    listed: dict[str, int] = {}
    for known in unit.vibrations:
        listed[known.species] = listed.get(known.species, 0) + 1
    return listed


def _bare(unit: KnownUnit) -> tuple[KnownVibration, ...]:
    return tuple(KnownVibration(one.name, one.species, one.kind, None) for one in unit.vibrations)


def _assigned(known: tuple[KnownVibration, ...], vibrations: Sequence[VibrationRow]) -> Names:
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
