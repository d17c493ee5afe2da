"""Usual names and wavenumbers of the vibrations of common molecules and ions, from the cited table in the data folder.

Reading the whole table takes longer than the analysis of a small crystal. So an index of formulas and groups is made
first, and only the entries that are asked for are parsed.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache, lru_cache
from importlib.resources import files
from typing import Any

Composition = frozenset[tuple[str, int]]

_FORMULA = re.compile(r'^formula = "(.*)"$', re.MULTILINE)
_GROUP = re.compile(r'^point_group = "(.*)"$', re.MULTILINE)


@dataclass(frozen=True, slots=True)
class KnownVibration:
    """One fundamental of a free unit: usual name, species, wavenumber in cm⁻¹ (None where only the name is known).

    `given` marks a wavenumber that the user gave.
    """

    name: str
    species: str
    kind: str
    wavenumber: float | None
    given: bool = False


@dataclass(frozen=True, slots=True)
class KnownUnit:
    """A unit of the table. `composition` is its formula as a set of element counts, `charge` as tabulated."""

    formula: str
    name: str
    charge: int
    composition: Composition
    group: str
    vibrations: tuple[KnownVibration, ...]
    source: str


@dataclass(frozen=True, slots=True)
class Entry:
    """A unit of the table that is not parsed yet: what it is looked up by, and its text."""

    composition: Composition
    group: str
    text: str

    @property
    def unit(self) -> KnownUnit:
        """The parsed unit."""
        return _parsed(self.text)

    @property
    def shape(self) -> list[int]:
        """The numbers of atoms of its elements, ascending."""
        return sorted(count for _, count in self.composition)


def composition_of(formula: str) -> Composition:
    """`SO4` and `O4S` alike as {(S, 1), (O, 4)}."""
    counts: dict[str, int] = {}
    for element, number in re.findall(r"([A-Z][a-z]?)(\d*)", formula):
        counts[element] = counts.get(element, 0) + int(number or 1)
    return frozenset(counts.items())


@lru_cache(maxsize=1)
def index() -> tuple[Entry, ...]:
    """Every unit of the table, to be looked up."""
    text = files("sitesym").joinpath("data", "free_units.toml").read_text(encoding="utf-8")
    return tuple(_entry(part) for part in re.split(r"(?m)^\[\[unit\]\]$", text)[1:])


def _entry(text: str) -> Entry:
    formula, group = _FORMULA.search(text), _GROUP.search(text)
    if formula is None or group is None:
        raise ValueError(f"A unit of free_units.toml lacks formula or point_group: {text[:80]!r}")
    return Entry(composition_of(formula[1]), group[1].replace("inf", "∞"), text)


def known_units() -> Iterator[KnownUnit]:
    """Every unit of the table."""
    return (entry.unit for entry in index())


@cache
def _parsed(text: str) -> KnownUnit:
    import tomllib

    return _unit(tomllib.loads(text))


def _unit(entry: dict[str, Any]) -> KnownUnit:
    vibrations = tuple(map(_vibration, entry["vibrations"]))
    return KnownUnit(
        entry["formula"], entry["name"], int(entry.get("charge", 0)), composition_of(entry["formula"]),
        entry["point_group"].replace("inf", "∞"), vibrations, entry["source"],
    )  # fmt: skip


def _vibration(entry: dict[str, Any]) -> KnownVibration:
    wavenumber = float(entry["wavenumber"]) if "wavenumber" in entry else None
    return KnownVibration(entry["name"], entry["species"], entry["kind"], wavenumber)


@lru_cache(maxsize=256)
def known_groups(formula: str) -> frozenset[str]:
    """Point groups of the tabulated units of this composition; empty where none is known."""
    wanted = composition_of(formula)
    return frozenset(entry.group for entry in index() if entry.composition == wanted)
