"""Assignments that the user insists on or rules out, from a small text file.

One a line, `#` begins a comment:

    pin 711 CO3 ν4          # this band belongs to ν4 of CO3
    not 1749 CO3 ν1         # this one does not belong to ν1

ν may be written nu or v. Names are those of the families that `explain` lists; `lattice external modes` and `net modes`
are families, too.
"""

from __future__ import annotations

import os
import re
from collections.abc import Sequence
from dataclasses import dataclass

from sitesym.bands.inventory import Family
from sitesym.bands.measurement import Band
from sitesym.errors import ReadError, UsageError
from sitesym.known_units import composition_of
from sitesym.reading.source import open_source
from sitesym.reading.text import listed, printable
from sitesym.wavenumbers import usual_name

_WORDS = ("pin", "not")
_MEND = "Write lines such as: pin 711 CO3 ν4, or: not 1749 CO3 ν1."
_MOST = 2000


@dataclass(frozen=True, slots=True)
class Pin:
    """One line: a band by its wavenumber (cm⁻¹) and the family that it belongs to, or does not (`insists` False)."""

    place: str
    wavenumber: float
    family: str
    insists: bool


Pairs = tuple[tuple[float, str], ...]


def read_pins(path: str | os.PathLike[str]) -> tuple[Pin, ...]:
    """The lines of a file. Raises ReadError, with the line, for what is none."""
    try:
        given = open_source(path)
    except ReadError as error:
        raise ReadError(error.problem, _MEND) from None
    if given.is_binary:
        raise ReadError(f"{given.name} is no text file.", _MEND)
    lines = [(number, re.split(r"#", line)[0].strip()) for number, line in enumerate(given.text.splitlines(), start=1)]
    pins = tuple(_pin(line, f"{given.name}, line {number}") for number, line in lines[:_MOST] if line)
    if len(lines) > _MOST:
        raise ReadError(f"{given.name} has {len(lines)} lines.", f"Give at most {_MOST}.")
    return pins


def _pin(line: str, place: str) -> Pin:
    words = line.replace("\ufeff", "").split(maxsplit=2)
    if len(words) < 3 or words[0].lower() not in _WORDS:
        raise ReadError(f"{place}: '{printable(line, 60)}' pins nothing.", _MEND)
    try:
        wavenumber = float(words[1].replace(",", "."))
    except ValueError:
        wavenumber = float("nan")
    if not 0 < wavenumber < 20000:
        raise ReadError(f"{place}: '{printable(words[1], 40)}' is no wavenumber.", _MEND)
    return Pin(place, wavenumber, printable(words[2]), words[0].lower() == "pin")


def resolved(pins: Sequence[Pin], bands: Sequence[Band], families: Sequence[Family]) -> tuple[Pairs, Pairs]:
    """`pinned` and `forbidden` for `explain`.

    Raises UsageError for a wavenumber at which no band lies, for a family that does not exist, and for a band pinned to
    one that symmetry forbids in its technique.
    """
    pinned: list[tuple[float, str]] = []
    forbidden: list[tuple[float, str]] = []
    for pin in pins:
        family = _family(pin, families)
        mine = _bands(pin, bands)
        if pin.insists and not any(family.capacity(band.technique) for band in mine):
            raise UsageError(
                f"{pin.place}: {family.name} is forbidden in {_technique(mine[0])} for this structure.",
                "Leave the pin out: the explanation says as what else the band is allowed.",
            )
        (pinned if pin.insists else forbidden).extend((band.wavenumber, family.name) for band in mine)
    return tuple(dict.fromkeys(pinned)), tuple(dict.fromkeys(forbidden))


def _technique(band: Band) -> str:
    return "Raman" if band.technique == "raman" else "infrared"


def _bands(pin: Pin, bands: Sequence[Band]) -> list[Band]:
    """The bands meant: those within half a wavenumber or their uncertainty, the nearest of each technique."""
    near: dict[str, Band] = {}
    for band in sorted(bands, key=lambda one: abs(one.wavenumber - pin.wavenumber)):
        if abs(band.wavenumber - pin.wavenumber) <= max(0.5, band.uncertainty):
            near.setdefault(band.technique, band)
    if not near:
        nearest = min(bands, key=lambda one: abs(one.wavenumber - pin.wavenumber))
        raise UsageError(
            f"{pin.place}: there is no band at {pin.wavenumber:g} cm⁻¹.", f"The nearest one is {nearest.words}."
        )
    return list(near.values())


def _family(pin: Pin, families: Sequence[Family]) -> Family:
    wanted = _key(pin.family)
    found = next((family for family in families if _key(family.name) == wanted), None)
    if found is None:
        names = list(dict.fromkeys(family.name for family in families))
        raise UsageError(f"{pin.place}: there is no '{pin.family}'.", f"The families are {listed(names, 12)}.")
    return found


def _key(name: str) -> tuple[object, str]:
    """Names that mean the same are equal: elements of the unit in any order, ν as nu or v."""
    unit, _, vibration = name.partition(" ")
    composition = composition_of(unit)
    return (composition or unit.lower(), " ".join(usual_name(vibration).lower().split()))
