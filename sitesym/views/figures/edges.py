"""The edges of the cell, left out inside atoms, in pieces so that atoms before and behind hide the right parts."""

from __future__ import annotations

from itertools import product
from typing import TYPE_CHECKING

import numpy as np

from sitesym.views.figures.svg import line
from sitesym.views.figures.view import Fog, Stroke, View

if TYPE_CHECKING:
    from sitesym.groups.operation import Floats

_PIECES = 9
_FROM_ORIGIN, _OTHER = 1.9, 1.0


def edges(lattice: Floats, points: Floats, radii: Floats, view: View, fog: Fog) -> list[Stroke]:
    """Edges of the cell with rows a, b, c among balls at `points` (k, 3) of `radii` (k,) in Å."""
    pieces: list[Stroke] = []
    for axis in range(3):
        for first, second in product((0, 1), repeat=2):
            start = np.insert(np.array([first, second]), axis, 0) @ lattice
            thickness = _OTHER if first or second else _FROM_ORIGIN
            for low, high in free_stretches(start, lattice[axis], points, radii):
                shares = np.linspace(low, high, max(round(_PIECES * (high - low)), 1) + 1)
                pieces += _pieces(start + shares[:, None] * lattice[axis], view, fog, thickness)
    return pieces


def free_stretches(start: Floats, edge: Floats, points: Floats, radii: Floats) -> list[tuple[float, float]]:
    """The parts of the line from `start` along `edge`, as fractions from 0 to 1, that lie in no ball."""
    length = float(np.linalg.norm(edge))
    along = (points - start) @ edge / length
    across = np.linalg.norm(points - start - along[:, None] * edge / length, axis=1)
    hit = across < radii
    half = np.sqrt(radii[hit] ** 2 - across[hit] ** 2)
    lows, highs = (along[hit] - half) / length, (along[hit] + half) / length
    order = np.argsort(lows)
    stretches, place = [], 0.0
    for low, high in zip([*lows[order].tolist(), 1.0], [*highs[order].tolist(), 1.0], strict=True):
        if min(low, 1.0) > place:
            stretches.append((place, min(low, 1.0)))
        place = max(place, high)
    return stretches


def _pieces(ends: Floats, view: View, fog: Fog, thickness: float) -> list[Stroke]:
    """Strokes from each point to the next."""
    depth = view.depth(ends)
    strokes = []
    for k in range(len(ends) - 1):
        (x1, y1), (x2, y2), near = view.place(ends[k]), view.place(ends[k + 1]), float(depth[k : k + 2].min())
        opacity = f"{1 - fog.at(near):.2f}"
        strokes.append(Stroke(near, line(x1, y1, x2, y2, stroke_width=thickness, stroke_opacity=opacity)))
    return strokes
