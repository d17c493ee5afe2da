"""A sketch of one measurement: the sample, the beams, and the polarizations as double arrows on them.

Oblique parallel projection of three axes: the first to the right, the second away from the viewer, the third up. On one
beam line the face lies on top; at an angle the laser comes from the left and the scattered light leaves downwards.
"""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from sitesym.views import plan_symbols as symbols
from sitesym.views import plan_words as words
from sitesym.views.figures.svg import ACCENT, INK, PAPER, drawing, element, number, path, text

if TYPE_CHECKING:
    from sitesym.experiment.layout import Layout
    from sitesym.experiment.run_sheet import Step
    from sitesym.geometry.notation import Polarization
    from sitesym.groups.operation import Floats

_SCALE = 33.0
_HALF, _THICK, _CUBE = 1.45, 0.45, 0.75
_DEPTH = 0.5 * np.array([np.cos(np.radians(42)), np.sin(np.radians(42))])
_BOX = (-88.0, -86.0, 176.0, 136.0)
_MARK = 0.6
_SIZE = 13.0


def sketch(step: Step, name: str) -> str:
    """The drawing as SVG; `name` makes its ids unique in a page."""
    layout = step.layout
    parts = _one_line(step) if layout.one_line else _at_an_angle(step)
    shown = step.measurement.result.geometry
    title = f"Set-up for {symbols.geometry(shown)}"
    described = "; ".join(filter(None, (words.place(step.measurement), words.lights(step))))
    return drawing(name, title, f"{described}.", _BOX, *parts)


def _flat(point: Floats) -> tuple[float, float]:
    """Page coordinates of a laboratory point (3,)."""
    x, y = point[0] + _DEPTH[0] * point[1], point[2] + _DEPTH[1] * point[1]
    return float(_SCALE * x), float(-_SCALE * y)


def _one_line(step: Step) -> list[str]:
    layout, geometry = step.layout, step.measurement.result.geometry
    through = float(geometry.incident.vector @ geometry.scattered.vector) > 0
    left = np.array([0.0 if through else -0.72, 0.0, 0.0])
    right = -left
    up, down = np.array([0.0, 0.0, 1.0]), np.array([0.0, 0.0, -1.0])
    parts = [*_slab(np.array([_HALF, _HALF]), -_THICK), *_axes_of_face(layout)]
    parts += [
        _beam(left + 1.75 * up, left, ACCENT),
        *_light(left + 1.0 * up, geometry.incoming, layout.frame, up, ACCENT),
    ]
    if through:
        parts += [_inside(left, left + _THICK * down), _beam(left + _THICK * down, left + 1.35 * down, INK)]
        parts += _light(left + 0.95 * down, geometry.outgoing, layout.frame, up, INK)
        labels = [*_named("laser", (-12, -62), ACCENT), *_named("out", (12, 44), INK)]
        return [element("g", *parts, *labels, transform="translate(0,-16)")]
    parts += [_beam(right, right + 1.75 * up, INK), *_light(right + 1.0 * up, geometry.outgoing, layout.frame, up, INK)]
    return [*parts, *_named("laser", (-32, -64), ACCENT), *_named("out", (32, -64), INK)]


def _at_an_angle(step: Step) -> list[str]:
    """Laser along the first axis to the centre, scattered light in the plane of the page."""
    layout, geometry = step.layout, step.measurement.result.geometry
    right, up, out = layout.frame
    frame = np.array([right, -out, up])
    first, leaving = np.array([1.0, 0.0, 0.0]), frame @ geometry.scattered.vector
    edge = _CUBE / float(np.abs(leaving).max())
    parts = [*_block(_CUBE), _beam(-2.2 * first, -_CUBE * first, ACCENT), _inside(-_CUBE * first, 0.0 * first)]
    parts += [_inside(0.0 * first, edge * leaving), _beam(edge * leaving, (edge + 1.4) * leaving, INK)]
    parts += _light(-1.55 * first, geometry.incoming, frame, first, ACCENT)
    parts += _light((edge + 0.62) * leaving, geometry.outgoing, frame, leaving, INK)
    x, y = _flat((edge + 1.25) * leaving)
    labels = [*_named("laser", (-52, -26), ACCENT), *_named("out", (x + 10, y + 2), INK), *_directions(layout)]
    return [element("g", *parts, *labels, transform="translate(14,-34)")]


# Pieces ---------------------------------------------------------------------------------------------------------------


def _slab(half: Floats, bottom: float) -> list[str]:
    """A plate whose upper face is at height zero; the sides that are seen."""
    corners = [(-1, -1), (1, -1), (1, 1), (-1, 1)]
    top = [np.array([x * half[0], y * half[1], 0.0]) for x, y in corners]
    low = [np.array([x * half[0], y * half[1], bottom]) for x, y in corners]
    sides = [[top[0], top[1], low[1], low[0]], [top[1], top[2], low[2], low[1]]]
    return [*(_area(one, 0.0) for one in sides), _area(top, 0.1)]


def _block(half: float) -> list[str]:
    """A clear cube: its twelve edges, those behind paler."""
    signs = [np.array([x, y, z]) * half for x in (-1.0, 1.0) for y in (-1.0, 1.0) for z in (-1.0, 1.0)]
    hidden = np.array([-half, half, -half])
    edges = []
    for i, one in enumerate(signs):
        for other in signs[i + 1 :]:
            if np.count_nonzero(one != other) == 1:
                behind = bool(np.array_equal(one, hidden) or np.array_equal(other, hidden))
                edges.append(_line(one, other, INK, stroke_opacity=".25" if behind else ".7"))
    return edges


def _area(corners: list[Floats], shade: float) -> str:
    points = " ".join(f"{number(x)},{number(y)}" for x, y in map(_flat, corners))
    return element(
        "g",
        element("polygon", points=points, fill=PAPER),
        element("polygon", points=points, fill=ACCENT, fill_opacity=f"{shade:g}", stroke=INK, stroke_opacity=".7"),
    )


def _line(start: Floats, end: Floats, colour: str, **style: str | float) -> str:
    return element("path", d=path([_flat(start), _flat(end)]), stroke=colour, fill="none", **style)


def _inside(start: Floats, end: Floats) -> str:
    """A beam in the sample."""
    return _line(start, end, INK, stroke_dasharray="2 3", stroke_opacity=".7")


def _beam(start: Floats, end: Floats, colour: str) -> str:
    """A beam of light with its arrow head."""
    return element("g", _line(start, end, colour, stroke_width=1.6), _head(_flat(start), _flat(end), colour, 7.0))


def _head(start: tuple[float, float], end: tuple[float, float], colour: str, size: float) -> str:
    along = np.array(end) - np.array(start)
    length = float(np.linalg.norm(along))
    if length < 1e-6:
        return ""
    along /= length
    across = np.array([-along[1], along[0]])
    tip = np.array(end)
    points = [tip, tip - size * along + 0.38 * size * across, tip - size * along - 0.38 * size * across]
    return element("polygon", points=" ".join(f"{number(x)},{number(y)}" for x, y in points), fill=colour)


def _light(at: Floats, light: Polarization, frame: Floats, along: Floats, colour: str) -> list[str]:
    """The polarization on a beam: a ring across the beam with a double arrow, or a sign where it is not linear."""
    ring = _ring(at, along)
    if not light.is_linear:
        return [ring, *_turning(at, light, along, colour)]
    vector = _MARK * (frame @ light.vectors[0].real)
    start, end = _flat(at - vector), _flat(at + vector)
    shaft = element("path", d=path([start, end]), stroke=colour, stroke_width=2.4, fill="none")
    return [ring, shaft, _head(end, start, colour, 7.5), _head(start, end, colour, 7.5)]


def _ring(at: Floats, along: Floats) -> str:
    """A circle across the beam, as a path."""
    helper = np.eye(3)[int(np.abs(along).argmin())]
    u = np.cross(along, helper)
    u /= np.linalg.norm(u)
    v = np.cross(along, u)
    angles = np.linspace(0, 2 * np.pi, 37)
    points = [_flat(at + _MARK * (np.cos(a) * u + np.sin(a) * v)) for a in angles]
    return element("path", d=path(points), fill=PAPER, fill_opacity=".55", stroke=INK, stroke_opacity=".3")


def _turning(at: Floats, light: Polarization, along: Floats, colour: str) -> list[str]:
    """`R` or `L` for circular light, a star for light that is not polarized or not analysed."""
    x, y = _flat(at)
    sign = light.name if light.name in ("R", "L") else "∗"
    style: dict[str, str | float] = {"text_anchor": "middle", "fill": colour, "font_size": 14, "font_weight": "bold"}
    return [text(sign, x + 1, y + 5, **style)]


def _axes_of_face(layout: Layout) -> list[str]:
    """Names of two directions in the face along its front and right edge; an edge that was named is drawn heavier."""
    front, back = np.array([_HALF, -_HALF, 0.0]), np.array([_HALF, _HALF, 0.0])
    corner = np.array([-_HALF, -_HALF, 0.0])
    x, y = _flat(np.array([-0.5, -_HALF, -_THICK]))
    u, v = _flat(np.array([_HALF, 0.0, -_THICK]))
    parts = []
    if layout.from_edge:
        parts.append(_line(front, back, INK, stroke_width=3.2))
    pairs = pairwise([corner, front, back])
    arrows = [_head(_flat(start), _flat(end), INK, 6.0) for start, end in pairs]
    return [
        *parts,
        *arrows,
        text(symbols.direction(layout.right.name), x, y + 13, text_anchor="middle", fill=INK, font_size=_SIZE),
        text(symbols.direction(layout.up.name), u + 5, v + 10, fill=INK, font_size=_SIZE),
    ]


def _directions(layout: Layout) -> list[str]:
    """Names of the directions of the laser, below its beam, and of the axis against which scattered light leaves."""
    x, y = _flat(np.array([-1.55, 0.0, 0.0]))
    return [text(symbols.direction(layout.right.name), x, y + 36, text_anchor="middle", fill=INK, font_size=_SIZE)]


def _named(what: str, place: tuple[float, float], colour: str) -> list[str]:
    side = "end" if place[0] < 0 else "start"
    return [text(what, place[0], place[1], text_anchor=side, fill=colour, font_size=_SIZE)]
