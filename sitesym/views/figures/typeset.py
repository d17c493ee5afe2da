"""Symbols with subscripts and superscripts as text of SVG, and how wide a text is about to be."""

from __future__ import annotations

import re
import unicodedata
from html import unescape

from sitesym.views.figures.svg import element, number, words

_SCRIPT = re.compile(r"<(sub|sup)>(.*?)</\1>")
_OVERLINE = re.compile(r'<span style="text-decoration:overline">(.*?)</span>')
_DROP = {"sub": 0.28, "sup": -0.38}
_SMALL = 0.74
_NARROW = set("iljtfrI.,:;'|()[]·′″ ")
_WIDE = set("mwMWGOQDHNABCEKRUVXYπΣΔΠ∥→−+=≈×")


def symbols(html: str, x: float, y: float, size: float, **attributes: str | float) -> str:
    """One line of text at a point from what `labels.HTML` makes: plain text with `<sub>` and `<sup>`.

    Everything else in it is text, its entities taken back; nothing of it becomes an element.
    """
    parts: list[str] = []
    shift = 0.0
    for piece, kind in _pieces(html):
        drop = round(_DROP.get(kind, 0.0) * size, 1)
        style: dict[str, str | float] = {"font_size": f"{_SMALL * size:.1f}"} if kind else {}
        if drop != shift:
            style["dy"] = number(drop - shift)
        parts.append(element("tspan", words(piece), **style) if style else words(piece))
        shift = drop
    return element("text", *parts, x=x, y=y, font_size=size, **attributes)


def _pieces(html: str) -> list[tuple[str, str]]:
    """(text, "", "sub" or "sup") in reading order."""
    flat = _OVERLINE.sub(lambda found: "".join(f"{one}\u0304" for one in found[1]), html)
    pieces, end = [], 0
    for found in _SCRIPT.finditer(flat):
        pieces += [(unescape(flat[end : found.start()]), ""), (unescape(found[2]), found[1])]
        end = found.end()
    pieces.append((unescape(flat[end:]), ""))
    return [piece for piece in pieces if piece[0]]


def symbols_width(html: str, size: float) -> float:
    """About how wide `symbols` draws it, in user units."""
    return sum(text_width(piece, size * (_SMALL if kind else 1)) for piece, kind in _pieces(html))


def text_width(text: str, size: float) -> float:
    """About how wide a text is in a serif face of this size; rather too wide than too narrow."""
    return size * sum(_width(one) for one in text)


def _width(one: str) -> float:
    if unicodedata.combining(one):
        return 0.0
    if unicodedata.east_asian_width(one) in "WF":
        return 1.0
    return 0.36 if one in _NARROW else 0.76 if one in _WIDE else 0.54


def wrapped(parts: list[str], size: float, room: float) -> list[str]:
    """The parts joined by commas, in lines no wider than `room` unless a single part is."""
    lines: list[str] = []
    for part in parts:
        longer = f"{lines[-1]}, {part}" if lines else part
        if lines and text_width(longer, size) <= room:
            lines[-1] = longer
        else:
            lines.append(part)
    return [f"{one}," for one in lines[:-1]] + lines[-1:]
