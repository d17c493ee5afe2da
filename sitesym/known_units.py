"""Usual names and wavenumbers of the vibrations of common molecules and ions, from the cited table in the data folder."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import lru_cache
from importlib.resources import files
from typing import Any


@dataclass(frozen=True, slots=True)
class KnownVibration:
    """One fundamental of a free unit: usual name, species, wavenumber in cm⁻¹ (None where only the name is known)."""

    name: str
    species: str
    kind: str
    wavenumber: float | None


@dataclass(frozen=True, slots=True)
class KnownUnit:
    """A unit of the table. `composition` is its formula as a set of element counts, `charge` as tabulated."""

    formula: str
    name: str
    charge: int
    composition: frozenset[tuple[str, int]]
    group: str
    vibrations: tuple[KnownVibration, ...]
    source: str


def composition_of(formula: str) -> frozenset[tuple[str, int]]:
    """`SO4` and `O4S` alike as {(S, 1), (O, 4)}."""
    counts: dict[str, int] = {}
    for element, number in re.findall(r"([A-Z][a-z]?)(\d*)", formula):
        counts[element] = counts.get(element, 0) + int(number or 1)
    return frozenset(counts.items())


@lru_cache(maxsize=1)
def known_units() -> tuple[KnownUnit, ...]:
    """Every unit of the table."""
    import tomllib

    text = files("sitesym").joinpath("data", "free_units.toml").read_text(encoding="utf-8")
    return tuple(_unit(entry) for entry in tomllib.loads(text)["unit"])


def _unit(entry: dict[str, Any]) -> KnownUnit:
    vibrations = tuple(
        KnownVibration(one["name"], one["species"], one["kind"], one.get("wavenumber")) for one in entry["vibrations"]
    )
    return KnownUnit(
        entry["formula"], entry["name"], int(entry.get("charge", 0)), composition_of(entry["formula"]),
        entry["point_group"].replace("inf", "∞"), vibrations, entry["source"],
    )  # fmt: skip


def known_groups(formula: str) -> frozenset[str]:
    """Point groups of the tabulated units of this composition; empty where none is known."""
    wanted = composition_of(formula)
    return frozenset(unit.group for unit in known_units() if unit.composition == wanted)
