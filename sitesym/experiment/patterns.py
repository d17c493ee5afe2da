"""How to read the measurements of a plan together: in which of them each band must appear and in which not."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from sitesym.experiment.phonons import OBLIQUE
from sitesym.experiment.shown import GeometryResult


@dataclass(frozen=True, slots=True)
class Pattern:
    """Where one species, or one kind of its phonons, is seen.

    name    `A1g`, `E(LO)`; label the species, phonon its kind.
    seen    one entry for each measurement, in order.
    like    names of others that are seen in exactly the same measurements.
    moves   whether its wavenumber differs from one measurement to the next (oblique phonons).
    """

    name: str
    label: str
    phonon: str | None
    seen: tuple[bool, ...]
    like: tuple[str, ...]
    moves: bool


@dataclass(frozen=True, slots=True)
class Comparison:
    """What changes from an earlier measurement to this one: names that stay, that go and that are new.

    `other` is the number of the earlier one, counted from 0.
    """

    other: int
    stay: tuple[str, ...]
    go: tuple[str, ...]
    new: tuple[str, ...]


def patterns_of(results: Sequence[GeometryResult]) -> tuple[Pattern, ...]:
    """One pattern for everything that any of the measurements shows, in the order of the species."""
    rows = [{one.name: one for one in result.allowed} for result in results]
    order = {one.name: one for result in results for one in result.shown if one.allowed}
    labels = list(dict.fromkeys(one.label for result in results for one in result.shown))
    names = sorted(order, key=lambda name: (labels.index(order[name].label), name))
    seen = {name: tuple(name in row for row in rows) for name in names}
    return tuple(
        Pattern(
            name,
            order[name].label,
            order[name].phonon,
            seen[name],
            tuple(other for other in names if other != name and seen[other] == seen[name]),
            order[name].phonon == OBLIQUE,
        )
        for name in names
    )


def comparisons_of(results: Sequence[GeometryResult]) -> tuple[Comparison | None, ...]:
    """Each measurement against the earlier one that it differs from least; None for the first."""
    names = [tuple(one.name for one in result.allowed) for result in results]
    return tuple(_comparison(names, k) for k in range(len(names)))


def _comparison(names: Sequence[tuple[str, ...]], k: int) -> Comparison | None:
    if not k:
        return None
    here = names[k]
    other = min(range(k), key=lambda j: (len(set(names[j]) ^ set(here)), j))
    before = names[other]
    return Comparison(
        other,
        tuple(name for name in here if name in before),
        tuple(name for name in before if name not in here),
        tuple(name for name in here if name not in before),
    )
