"""What pictures of cells and of molecules are made of: balls, bonds, the tripod of axes, a legend."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from sitesym.views.figures.atoms import Ball, atom_mark
from sitesym.views.figures.svg import INK, PAPER, element, line, path, text
from sitesym.views.figures.view import Fog, Stroke, View

if TYPE_CHECKING:
    from sitesym.groups.operation import Floats, Integers

PageBox = tuple[float, float, float, float]
"""Left, top, width and height on the page."""

TRIPOD = 34.0
"""Length of the axes of the tripod on the page."""

_MARGIN = 22.0
_LETTERED = 130


@dataclass(frozen=True, slots=True)
class LegendEntry:
    """One kind of mark: a small drawing of it and what it means in words."""

    mark: str
    words: str


@dataclass(frozen=True, slots=True)
class Picture:
    """The drawing as SVG, its legend, and what must be said about it in plain words."""

    svg: str
    legend: tuple[LegendEntry, ...]
    remarks: tuple[str, ...]


def back_to_front(strokes: Iterable[Stroke]) -> list[str]:
    """The strokes so that near ones hide far ones."""
    return [stroke.svg for stroke in sorted(strokes, key=lambda stroke: stroke.depth)]


def bond_strokes(points: Floats, bonds: Integers, balls: Sequence[Ball], view: View, fog: Fog) -> list[Stroke]:
    """Bonds (m, 2) between k atoms at `points` (k, 3), drawn from rim to rim of their k balls."""
    strokes = []
    for first, second in bonds.tolist():
        start, end = points[first], points[second]
        along = (end - start) / np.linalg.norm(end - start)
        start = start + along * balls[first].radius
        end = end - along * balls[second].radius
        if (end - start) @ along > 0:
            depth = float(view.depth((start + end) / 2))
            strokes.append(Stroke(depth, _bond(view.place(start), view.place(end), view.scale, fog.at(depth))))
    return strokes


def _bond(start: tuple[float, float], end: tuple[float, float], scale: float, veiled: float) -> str:
    """A stroke with a rim of paper, which sets it off from what it crosses."""
    (x1, y1), (x2, y2) = start, end
    thick = min(max(0.1 * scale, 1.2), 4.5)
    rim = element("line", x1=x1, y1=y1, x2=x2, y2=y2, stroke=PAPER, stroke_width=thick + 2)
    return rim + line(x1, y1, x2, y2, stroke_width=thick, stroke_opacity=f"{0.65 * (1 - veiled):.2f}")


def atom_strokes(points: Floats, balls: Sequence[Ball], view: View, fog: Fog) -> list[Stroke]:
    """The marks of k atoms at `points` (k, 3), with letters unless there are too many."""
    lettered = len(points) <= _LETTERED
    strokes = []
    for ball, point in zip(balls, points, strict=True):
        (x, y), depth = view.place(point), float(view.depth(point))
        mark = atom_mark(ball, x, y, view.scale, lettered=lettered, veiled=fog.at(depth))
        strokes.append(Stroke(depth, mark))
    return strokes


def letter(word: str, at: Floats, **attributes: str) -> str:
    """A letter with a rim of paper, so that it can be read on top of strokes."""
    return text(
        word, float(at[0]), float(at[1]) + 5, font_size=16, fill=INK, text_anchor="middle", stroke=PAPER,
        stroke_width=5, stroke_linejoin="round", paint_order="stroke", **attributes,
    )  # fmt: skip


def box_around(points: Floats, radius: float, view: View) -> PageBox:
    """The page around balls of this radius at `points` (k, 3)."""
    flat = view.flat(points)
    rim = radius * view.scale + _MARGIN
    left, top = (flat.min(axis=0) - rim).tolist()
    right, bottom = (flat.max(axis=0) + rim).tolist()
    return left, top, right - left, bottom - top


def with_tripod(box: PageBox) -> PageBox:
    """Room for the tripod on the left of the picture."""
    return box[0] - 2.2 * TRIPOD, box[1], box[2] + 2.2 * TRIPOD, max(box[3], 2.4 * TRIPOD)


def tripod(box: PageBox, axes: Mapping[str, Floats]) -> str:
    """Axes, unit vectors (3,) in the frame of the view by their names, in the corner below on the left."""
    foot = np.array([box[0] - 1.45 * TRIPOD, box[1] + max(box[3], 2.4 * TRIPOD) - 0.85 * TRIPOD])
    parts = []
    for name, axis in axes.items():
        direction = View(TRIPOD).flat(axis)
        tip, aside = foot + direction, np.array([-direction[1], direction[0]]) * 0.09
        neck = foot + 0.8 * direction
        ends = [tuple(point.tolist()) for point in (neck + aside, tip, neck - aside)]
        parts.append(line(*foot.tolist(), *neck.tolist(), stroke_width=1.4))
        parts.append(element("path", d=f"{path(ends)}Z", fill=INK))
        parts.append(letter(name, foot + direction * 1.3 + direction / np.linalg.norm(direction) * 3))
    return element("g", *parts)


def legend(kinds: Iterable[tuple[str, Ball]]) -> tuple[LegendEntry, ...]:
    """One entry for each word, with the mark of the first ball of that word."""
    first: dict[str, Ball] = {}
    for words, ball in kinds:
        first.setdefault(words, ball)
    return tuple(LegendEntry(_swatch(ball), words) for words, ball in first.items())


def _swatch(ball: Ball) -> str:
    mark = atom_mark(ball, 10, 10, 9 / ball.radius, lettered=True)
    return element("svg", mark, viewBox="0 0 20 20", width=20, height=20, class_="swatch", aria_hidden="true")
