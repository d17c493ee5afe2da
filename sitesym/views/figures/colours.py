"""Colours and sizes of atoms in pictures; the table with its reasons stands in sitesym/data/picture_colours.toml."""

from __future__ import annotations

import tomllib
from collections.abc import Iterable
from functools import cache
from pathlib import Path
from typing import Any
from zlib import crc32

from sitesym.bonding.chemistry import covalent_radii

_TABLE = Path(__file__).parents[2] / "data" / "picture_colours.toml"
_UNNAMED_RADIUS = 1.2


@cache
def _table() -> dict[str, Any]:
    return tomllib.loads(_TABLE.read_text(encoding="utf-8"))


def element_colours(elements: Iterable[str]) -> dict[str, str]:
    """Element -> colour `#rrggbb`, no two alike within one crystal as long as the table suffices."""
    fixed: dict[str, str] = _table()["fixed"]
    free: list[str] = _table()["free"]["colours"]
    chosen: dict[str, str] = {}
    for name in dict.fromkeys(elements):
        chosen[name] = fixed.get(name) or _next_free(_place(name), free, set(chosen.values()))
    return chosen


def _next_free(start: int, free: list[str], taken: set[str]) -> str:
    turned = [free[(start + step) % len(free)] for step in range(len(free))]
    return next((colour for colour in turned if colour not in taken), turned[0])


def _place(name: str) -> int:
    """Place in the periodic table, or a number that depends on nothing but the name."""
    names = list(covalent_radii())
    return names.index(name) if name in names else crc32(name.encode())


def writing_on(colour: str) -> str:
    """White or near-black, whichever reads better on a colour (relative luminance of WCAG 2.1)."""
    return "#ffffff" if luminance(colour) < 0.2 else "#101214"


def luminance(colour: str) -> float:
    """Relative luminance of `#rrggbb`, 0 to 1 (WCAG 2.1, definition of relative luminance)."""
    channels = [int(colour[k : k + 2], 16) / 255 for k in (1, 3, 5)]
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in channels]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def drawn_radius(elements: Iterable[str]) -> float:
    """Radius in Å of the circle of a site: part of the covalent radius, so that bonds stay visible."""
    radii = [covalent_radii().get(name, _UNNAMED_RADIUS) for name in elements]
    return 0.16 + 0.24 * max(radii)
