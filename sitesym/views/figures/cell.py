"""The picture of the conventional cell in the axes of the report."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import product
from typing import TYPE_CHECKING

import numpy as np

from sitesym.structure import FULL
from sitesym.views.figures.atoms import Ball, atom_mark
from sitesym.views.figures.colours import drawn_radius, element_colours
from sitesym.views.figures.contents import Contents, cell_contents
from sitesym.views.figures.edges import edges
from sitesym.views.figures.svg import INK, PAPER, drawing, element, line, path, text
from sitesym.views.figures.view import TOWARD, Fog, Stroke, View, fitted

if TYPE_CHECKING:
    from sitesym.analysis import Analysis
    from sitesym.groups.operation import Floats
    from sitesym.structure import Site, Structure

_WIDTH, _HEIGHT = 430.0, 440.0
_LARGEST_SCALE = 62.0
_MARGIN = 22.0
_TRIPOD = 34.0
_LETTERED = 130
_AT_CORNER = 0.3


@dataclass(frozen=True, slots=True)
class LegendEntry:
    """One kind of site: a small drawing of its mark and its occupants in words."""

    mark: str
    words: str


@dataclass(frozen=True, slots=True)
class Picture:
    """The drawing as SVG, its legend, and what must be said about it in plain words."""

    svg: str
    legend: tuple[LegendEntry, ...]
    remarks: tuple[str, ...]


def cell_picture(analysis: Analysis, name: str = "cell") -> Picture:
    """Atoms, bonds, edges and axes of the cell; `name` makes the ids of the drawing unique."""
    symmetry = analysis.symmetry
    contents = cell_contents(symmetry, TOWARD)
    balls = _balls(analysis.structure)
    corners = np.array(list(product((0, 1), repeat=3))) @ symmetry.lattice
    view = fitted(np.vstack([corners, contents.points]), _WIDTH, _HEIGHT, _LARGEST_SCALE)
    fog = Fog.over(view.depth(np.vstack([corners, contents.points])))
    radii = np.array([balls[site].radius for site in contents.sites.tolist()])
    strokes = [
        *edges(symmetry.lattice, contents.points, radii, view, fog),
        *_bonds(contents, balls, view, fog),
        *_atoms(contents, balls, view, fog),
    ]
    box = _box(np.vstack([corners, contents.points]), float(radii.max()), view)
    body = [*_back_to_front(strokes), *_axis_letters(symmetry.lattice, contents, balls, view), _tripod(box)]
    svg = drawing(name, _title(analysis), _description(analysis, contents), _with_tripod(box), *body)
    return Picture(svg, _legend(analysis.structure, balls), _remarks(contents))


def _back_to_front(strokes: list[Stroke]) -> list[str]:
    return [stroke.svg for stroke in sorted(strokes, key=lambda stroke: stroke.depth)]


def _balls(structure: Structure) -> list[Ball]:
    """How each site of the structure is drawn."""
    colours = element_colours(one.element for site in structure.sites for one in site.occupants)
    return [_ball(site, colours) for site in structure.sites]


def _ball(site: Site, colours: dict[str, str]) -> Ball:
    shares = tuple((colours[one.element], one.occupancy) for one in site.occupants)
    letters = "" if len(site.occupants) > 1 else site.element
    return Ball(shares, drawn_radius(one.element for one in site.occupants), letters if len(letters) <= 2 else "")


def _bonds(contents: Contents, balls: list[Ball], view: View, fog: Fog) -> list[Stroke]:
    strokes = []
    for first, second in contents.bonds.tolist():
        start, end = contents.points[first], contents.points[second]
        along = (end - start) / np.linalg.norm(end - start)
        start = start + along * balls[contents.sites[first]].radius
        end = end - along * balls[contents.sites[second]].radius
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


def _atoms(contents: Contents, balls: list[Ball], view: View, fog: Fog) -> list[Stroke]:
    lettered = len(contents.sites) <= _LETTERED
    strokes = []
    for site, point in zip(contents.sites.tolist(), contents.points, strict=True):
        (x, y), depth = view.place(point), float(view.depth(point))
        mark = atom_mark(balls[site], x, y, view.scale, lettered=lettered, veiled=fog.at(depth))
        strokes.append(Stroke(depth, mark))
    return strokes


def _axis_letters(lattice: Floats, contents: Contents, balls: list[Ball], view: View) -> list[str]:
    """a, b, c beyond the corners, and the atoms there, at the ends of the edges from the origin."""
    letters = []
    for axis, letter in enumerate("abc"):
        here = contents.sites[np.linalg.norm(contents.points - lattice[axis], axis=1) < _AT_CORNER]
        radius = max((balls[site].radius for site in here.tolist()), default=0.0)
        end = view.flat(lattice[axis])
        away = end / max(float(np.linalg.norm(end)), 1e-6)
        letters.append(_letter(letter, end + away * (radius * view.scale + 12), font_style="italic"))
    return letters


def _letter(letter: str, at: Floats, **attributes: str) -> str:
    """A letter with a rim of paper, so that it can be read on top of strokes."""
    return text(
        letter, float(at[0]), float(at[1]) + 5, font_size=16, fill=INK, text_anchor="middle", stroke=PAPER,
        stroke_width=5, stroke_linejoin="round", paint_order="stroke", **attributes,
    )  # fmt: skip


def _box(points: Floats, radius: float, view: View) -> tuple[float, float, float, float]:
    flat = view.flat(points)
    rim = radius * view.scale + _MARGIN
    left, top = (flat.min(axis=0) - rim).tolist()
    right, bottom = (flat.max(axis=0) + rim).tolist()
    return left, top, right - left, bottom - top


def _with_tripod(box: tuple[float, float, float, float]) -> tuple[float, float, float, float]:
    """Room for the tripod on the left of the cell."""
    return box[0] - 2.2 * _TRIPOD, box[1], box[2] + 2.2 * _TRIPOD, max(box[3], 2.4 * _TRIPOD)


def _tripod(box: tuple[float, float, float, float]) -> str:
    """The Cartesian axes x, y, z of all labels and tensors."""
    foot = np.array([box[0] - 1.45 * _TRIPOD, box[1] + max(box[3], 2.4 * _TRIPOD) - 0.85 * _TRIPOD])
    parts = []
    for direction, letter in zip(View(_TRIPOD).flat(np.eye(3)), "xyz", strict=True):
        tip, aside = foot + direction, np.array([-direction[1], direction[0]]) * 0.09
        neck = foot + 0.8 * direction
        ends = [tuple(point.tolist()) for point in (neck + aside, tip, neck - aside)]
        parts.append(line(*foot.tolist(), *neck.tolist(), stroke_width=1.4))
        parts.append(element("path", d=f"{path(ends)}Z", fill=INK))
        parts.append(_letter(letter, foot + direction * 1.3 + direction / np.linalg.norm(direction) * 3))
    return element("g", *parts)


def _title(analysis: Analysis) -> str:
    return f"The cell of {analysis.formula}"


def _description(analysis: Analysis, contents: Contents) -> str:
    lengths = ", ".join(
        f"{letter} {length:.3f} Å"
        for letter, length in zip("abc", np.linalg.norm(analysis.symmetry.lattice, axis=1), strict=True)
    )
    return (
        f"Conventional cell with edges {lengths}, seen with z up, y to the right and x to the viewer; "
        f"{len(contents.sites)} atoms are drawn."
    )


def _legend(structure: Structure, balls: list[Ball]) -> tuple[LegendEntry, ...]:
    first: dict[str, Ball] = {}
    for site, ball in zip(structure.sites, balls, strict=True):
        first.setdefault(_occupants(site), ball)
    return tuple(LegendEntry(_swatch(ball), words) for words, ball in first.items())


def _occupants(site: Site) -> str:
    """`O`, `Ca 0.9, Mg 0.1`, `Na 0.5, empty 0.5`."""
    if site.is_ordered:
        return site.element
    parts = [f"{one.element} {one.occupancy:.3g}" for one in site.occupants]
    empty = 1 - site.occupancy
    return ", ".join(parts + ([f"empty {empty:.3g}"] if empty > 1 - FULL else []))


def _swatch(ball: Ball) -> str:
    mark = atom_mark(ball, 10, 10, 9 / ball.radius, lettered=True)
    return element("svg", mark, viewBox="0 0 20 20", width=20, height=20, class_="swatch", aria_hidden="true")


def _remarks(contents: Contents) -> tuple[str, ...]:
    remarks = ["Atoms on the border are repeated."]
    if contents.whole:
        remarks = ["Atoms on the border are repeated; molecules and complex ions are drawn whole."]
    if contents.omitted:
        total = len(contents.sites) + contents.omitted
        remarks.append(f"Only the {len(contents.sites)} of {total} atoms nearest to the viewer are drawn.")
    return tuple(remarks)
