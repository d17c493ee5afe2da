"""What the columns of a file of measurements mean: names in the words of the trade, with their units."""

from __future__ import annotations

import re
import tomllib
import unicodedata
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from importlib.resources import files
from typing import Any

_DASHES = str.maketrans("−–—‐‑˗", "------")
_LONGEST_NAME = 6


@dataclass(frozen=True, slots=True)
class Column:
    """One column of a table.

    text   its name as it stands in the file; `name` in lower case, its unit taken off.
    field  what it means: wavenumber, intensity, width, half_width, uncertainty, geometry, technique, note, or "".
    unit   "cm-1", "nm", "um", "meV", "THz", or "" where none of these is stated.
    other  a unit in brackets or behind a stroke that is none of these, or "".
    """

    text: str
    name: str
    field: str
    unit: str = ""
    other: str = ""


@lru_cache(maxsize=1)
def _words() -> dict[str, Any]:
    return tomllib.loads(files("sitesym").joinpath("data", "band_columns.toml").read_text(encoding="utf-8"))


@lru_cache(maxsize=1)
def _fields() -> dict[str, str]:
    return {_bare(name): field for field, names in _words()["columns"].items() for name in names}


@lru_cache(maxsize=1)
def _units() -> dict[str, str]:
    return {plain(name): unit for unit, names in _words()["units"].items() for name in names}


@lru_cache(maxsize=1)
def _unit_at_end() -> re.Pattern[str]:
    listed = "|".join(re.escape(name) for name in sorted(_units(), key=len, reverse=True))
    return re.compile(rf"(?:^|^(.*?)[\s,;:/\[(_|]+)(?:in\s+)?({listed})[\])\s.]*$")


def plain(text: str) -> str:
    """Lower case, compatible signs alike (`cm⁻¹` as `cm-1`), spaces single, quotation marks gone."""
    folded = unicodedata.normalize("NFKC", text).translate(_DASHES).lower().strip("\"' \t\ufeff")
    return " ".join(folded.split())


def _bare(text: str) -> str:
    """Without the signs that join or end words."""
    return " ".join(re.sub(r"[._\-:,]+", " ", plain(text)).split())


def column_of(text: str) -> Column:
    """The meaning of one name."""
    whole = plain(text)
    found = _unit_at_end().match(whole)
    if found:
        name, unit = _bare(found[1] or ""), _units()[found[2]]
        return Column(text, name, _fields().get(name, "") if name else "wavenumber", unit)
    if _bare(whole) in _fields():
        return Column(text, _bare(whole), _fields()[_bare(whole)])
    inside = re.fullmatch(r"(.*?)\s*(?:[\[(](.*?)[\])]|/\s*(.*))\s*", whole)
    if inside is None:
        return Column(text, _bare(whole), "")
    name = _bare(inside[1])
    return Column(text, name, _fields().get(name, ""), "", inside[2] or inside[3] or "")


def split_names(line: str) -> list[str]:
    """Names of columns parted by spaces, where a name may hold spaces itself: the longest known names win."""
    words, names = line.split(), []
    while words:
        size = next(
            (n for n in range(min(_LONGEST_NAME, len(words)), 1, -1) if column_of(" ".join(words[:n])).field), 1
        )  # fmt: skip
        names.append(" ".join(words[:size]))
        words = words[size:]
    return names


def is_header(columns: Sequence[Column]) -> bool:
    """Whether a row names columns: a wavenumber, or units alone, and most of the others known."""
    known = [column for column in columns if column.field]
    if any(column.text[:1].isdigit() and not column.unit for column in columns):
        return False
    return any(column.field == "wavenumber" for column in columns) and 2 * len(known) >= len(columns)


def technique_of(word: str) -> str:
    """What a cell says, "raman" or "infrared"; "" where it says neither."""
    bare = _bare(word)
    return next((name for name, words in _words()["techniques"].items() if bare in map(_bare, words)), "")


def unit_of(word: str) -> str:
    """The unit that a word stands for, "" where it is none of those known."""
    return _units().get(plain(word), "")


def direction_of(name: str) -> str:
    """What the name of an ordinate says: "dips", "reflectance", "peaks", or "" for nothing."""
    bare = _bare(name)
    return next((way for way, words in _words()["directions"].items() if bare in map(_bare, words)), "")


def letters(word: str) -> float | None:
    """The order of magnitude of an intensity given in letters such as `vs` or `w`; None for other words."""
    first = re.split(r"[\s,;(]+", plain(word))[0]
    value = _words()["letters"].get(first)
    return None if value is None else float(value)
