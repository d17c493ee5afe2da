"""How a run sheet sets directions, geometries, species with their phonons and intensities.

Functions take a `Style` and return text that is ready and safe for that kind of document.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING

from sitesym.views.labels import HTML, TEXT, Style

if TYPE_CHECKING:
    from sitesym.geometry.notation import Geometry

_BAR = "\u0304"
_COMPACT = re.compile(r"([+-]\d+(?:\.\d+)?°)|-([xyz]|\d)")
_SPACED = re.compile(r"([+-]\d+(?:\.\d+)?°)|-([xyz]|\d+)")
_NAMED = re.compile(r"([A-Z][A-Za-z0-9_']*)(\(.*\))?")


def direction(name: str, style: Style = TEXT) -> str:
    """`z̄`, `[11̄0]`, `(001)`, `x+45°` from the name of a direction."""
    parts, end = [], 0
    for found in (_SPACED if " " in name else _COMPACT).finditer(name):
        parts.append(style.plain(name[end : found.start()]))
        parts.append(style.plain(found[1].replace("-", "−")) if found[1] else _barred(found[2], style))
        end = found.end()
    return "".join(parts) + style.plain(name[end:])


def _barred(symbol: str, style: Style) -> str:
    if style is HTML:
        return f'<span class="bar">{symbol}</span>'
    return "".join(one + _BAR for one in symbol)


def geometry(shown: Geometry, style: Style = TEXT) -> str:
    """`z(xy)z̄`."""
    light = [direction(one.name, style) for one in (shown.incoming, shown.outgoing)]
    gap = "" if len(shown.incoming.name + shown.outgoing.name) <= 2 else " "
    return f"{direction(shown.incident.name, style)}({gap.join(light)}){direction(shown.scattered.name, style)}"


def species(name: str, style: Style = TEXT) -> str:
    """`A₁g`, `E(TO)` from a name with or without the kind of phonon."""
    found = _NAMED.fullmatch(name)
    if found is None:
        raise ValueError(f"'{name}' is no name of a species.")
    return style.species(found[1]) + style.plain(found[2] or "")


def many(names: Iterable[str], style: Style = TEXT) -> str:
    """`A₁g, B₁g and E(TO)`."""
    made = [species(name, style) for name in names]
    return made[0] if len(made) == 1 else f"{', '.join(made[:-1])} and {made[-1]}"


def expression(words: str, style: Style = TEXT) -> str:
    """An intensity in letters, with proper minus signs."""
    return style.plain(words.replace("-", "−"))


def faces(names: Sequence[str], style: Style = TEXT) -> str:
    """`(001) and (010)` from indices."""
    made = [direction(f"({name})", style) for name in names]
    return made[0] if len(made) == 1 else f"{style.plain(', ').join(made[:-1])}{style.plain(' and ')}{made[-1]}"


def minus(text: str) -> str:
    """Numbers with a proper minus sign; words with hyphens stay as they are."""
    return re.sub(r"(?<![A-Za-z0-9])-(?=[\d.])", "−", text)
