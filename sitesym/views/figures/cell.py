"""The picture of the conventional cell in the axes of the report."""

from __future__ import annotations

from itertools import product
from typing import TYPE_CHECKING

import numpy as np

from sitesym.structure import FULL
from sitesym.views.figures.atoms import Ball
from sitesym.views.figures.colours import drawn_radius, element_colours
from sitesym.views.figures.contents import Contents, cell_contents
from sitesym.views.figures.edges import edges
from sitesym.views.figures.scene import (
    Picture,
    atom_strokes,
    back_to_front,
    bond_strokes,
    box_around,
    legend,
    letter,
    tripod,
    with_tripod,
)
from sitesym.views.figures.svg import drawing
from sitesym.views.figures.view import TOWARD, Fog, View, fitted

if TYPE_CHECKING:
    from sitesym.analysis import Analysis
    from sitesym.groups.operation import Floats
    from sitesym.structure import Site, Structure

_WIDTH, _HEIGHT = 430.0, 440.0
_LARGEST_SCALE = 62.0
_AT_CORNER = 0.3


def cell_picture(analysis: Analysis, name: str = "cell") -> Picture:
    """Atoms, bonds, edges and axes of the cell; `name` makes the ids of the drawing unique."""
    symmetry = analysis.symmetry
    contents = cell_contents(symmetry, TOWARD)
    balls = _balls(analysis.structure)
    corners = np.array(list(product((0, 1), repeat=3))) @ symmetry.lattice
    view = fitted(np.vstack([corners, contents.points]), _WIDTH, _HEIGHT, _LARGEST_SCALE)
    fog = Fog.over(view.depth(np.vstack([corners, contents.points])))
    drawn = [balls[site] for site in contents.sites.tolist()]
    radii = np.array([ball.radius for ball in drawn])
    strokes = [
        *edges(symmetry.lattice, contents.points, radii, view, fog),
        *bond_strokes(contents.points, contents.bonds, drawn, view, fog),
        *atom_strokes(contents.points, drawn, view, fog),
    ]
    box = box_around(np.vstack([corners, contents.points]), float(radii.max()), view)
    axes = dict(zip("xyz", np.eye(3), strict=True))
    body = [*back_to_front(strokes), *_axis_letters(symmetry.lattice, contents, balls, view), tripod(box, axes)]
    svg = drawing(name, _title(analysis), _description(analysis, contents), with_tripod(box), *body)
    kinds = zip(map(_occupants, analysis.structure.sites), balls, strict=True)
    return Picture(svg, legend(kinds), _remarks(contents))


def _balls(structure: Structure) -> list[Ball]:
    """How each site of the structure is drawn."""
    colours = element_colours(one.element for site in structure.sites for one in site.occupants)
    return [_ball(site, colours) for site in structure.sites]


def _ball(site: Site, colours: dict[str, str]) -> Ball:
    shares = tuple((colours[one.element], one.occupancy) for one in site.occupants)
    letters = "" if len(site.occupants) > 1 else site.element
    return Ball(shares, drawn_radius(one.element for one in site.occupants), letters if len(letters) <= 2 else "")


def _axis_letters(lattice: Floats, contents: Contents, balls: list[Ball], view: View) -> list[str]:
    """a, b, c beyond the corners, and the atoms there, at the ends of the edges from the origin."""
    letters = []
    for axis, name in enumerate("abc"):
        here = contents.sites[np.linalg.norm(contents.points - lattice[axis], axis=1) < _AT_CORNER]
        radius = max((balls[site].radius for site in here.tolist()), default=0.0)
        end = view.flat(lattice[axis])
        away = end / max(float(np.linalg.norm(end)), 1e-6)
        letters.append(letter(name, end + away * (radius * view.scale + 12), font_style="italic"))
    return letters


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


def _occupants(site: Site) -> str:
    """`O`, `Ca 0.9, Mg 0.1`, `Na 0.5, empty 0.5`."""
    if site.is_ordered:
        return site.element
    parts = [f"{one.element} {one.occupancy:.3g}" for one in site.occupants]
    empty = 1 - site.occupancy
    return ", ".join(parts + ([f"empty {empty:.3g}"] if empty > 1 - FULL else []))


def _remarks(contents: Contents) -> tuple[str, ...]:
    remarks = ["Atoms on the border are repeated."]
    if contents.whole:
        remarks = ["Atoms on the border are repeated; molecules and complex ions are drawn whole."]
    if contents.omitted:
        total = len(contents.sites) + contents.omitted
        remarks.append(f"Only the {len(contents.sites)} of {total} atoms nearest to the viewer are drawn.")
    return tuple(remarks)
