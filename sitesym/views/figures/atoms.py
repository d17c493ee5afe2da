"""The mark of one atom: a flat disc; a mixed or partly empty site is divided like a pie."""

from __future__ import annotations

from dataclasses import dataclass
from math import cos, pi, sin

from sitesym.structure import FULL
from sitesym.views.figures.colours import luminance, writing_on
from sitesym.views.figures.svg import INK, PAPER, element, number, text

_SMALLEST_LETTERED = 7.5
_LARGEST_LETTERS = 16.0
_PALE = 0.3


@dataclass(frozen=True, slots=True)
class Ball:
    """How a site is drawn: colours with their shares (up to 1 in all), radius in Å, letters to write on it."""

    shares: tuple[tuple[str, float], ...]
    radius: float
    letters: str


def atom_mark(ball: Ball, x: float, y: float, scale: float, *, lettered: bool, veiled: float = 0.0) -> str:
    """The atom at a place on the page, `scale` units per Å; `veiled` is the share of the page's colour over it."""
    radius = max(ball.radius * scale, 2.0)
    parts = [_disc(ball, x, y, radius)]
    if lettered and ball.letters and radius >= _SMALLEST_LETTERED:
        parts.append(_letters(ball, x, y, radius))
    if veiled:
        parts.append(element("circle", cx=x, cy=y, r=radius, fill=PAPER, fill_opacity=f"{veiled:.2f}"))
    return "".join(parts)


def _letters(ball: Ball, x: float, y: float, radius: float) -> str:
    size = min(radius * (1.15 if len(ball.letters) == 1 else 0.95), _LARGEST_LETTERS)
    ink = writing_on(ball.shares[0][0])
    return text(ball.letters, x, y + 0.36 * size, font_size=size, text_anchor="middle", fill=ink)


def _disc(ball: Ball, x: float, y: float, radius: float) -> str:
    colour, share = ball.shares[0]
    if len(ball.shares) == 1 and share >= FULL:
        pale = luminance(colour) > _PALE
        return element("circle", cx=x, cy=y, r=radius, fill=colour, stroke=INK if pale else PAPER, stroke_width=0.8)
    base = element("circle", cx=x, cy=y, r=radius, fill=PAPER)
    rim = element("circle", cx=x, cy=y, r=radius, fill="none", stroke=INK, stroke_width=0.8)
    return base + "".join(_sectors(ball.shares, x, y, radius)) + rim


def _sectors(shares: tuple[tuple[str, float], ...], x: float, y: float, radius: float) -> list[str]:
    total = max(1.0, sum(share for _, share in shares))
    sectors, start = [], 0.0
    for colour, share in shares:
        end = start + share / total
        sectors.append(_sector(colour, start, end, x, y, radius))
        start = end
    return sectors


def _sector(colour: str, start: float, end: float, x: float, y: float, radius: float) -> str:
    """Part of a disc, clockwise from the top; start and end are fractions of the turn."""
    if end - start >= FULL:
        return element("circle", cx=x, cy=y, r=radius, fill=colour)
    (x1, y1), (x2, y2) = ((x + radius * sin(2 * pi * turn), y - radius * cos(2 * pi * turn)) for turn in (start, end))
    large = 1 if end - start > 0.5 else 0
    r = number(radius)
    d = f"M{number(x)},{number(y)}L{number(x1)},{number(y1)}A{r} {r} 0 {large} 1 {number(x2)},{number(y2)}Z"
    return element("path", d=d, fill=colour)
