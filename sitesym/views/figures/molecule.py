"""The picture of a molecule alone, in its own axes."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from sitesym.views.figures.atoms import Ball
from sitesym.views.figures.colours import drawn_radius, element_colours
from sitesym.views.figures.scene import (
    Picture,
    atom_strokes,
    back_to_front,
    bond_strokes,
    box_around,
    legend,
    tripod,
    with_tripod,
)
from sitesym.views.figures.svg import drawing
from sitesym.views.figures.view import Fog, fitted
from sitesym.views.labels import TEXT

if TYPE_CHECKING:
    from sitesym.groups.operation import Floats
    from sitesym.molecule_analysis import MoleculeAnalysis

_WIDTH, _HEIGHT = 340.0, 300.0
_LARGEST_SCALE = 72.0
_FLAT = 0.5


def molecule_picture(result: MoleculeAnalysis, name: str = "molecule") -> Picture:
    """Atoms as measured, bonds and the molecule's axes; `name` makes the ids of the drawing unique."""
    free = result.free
    turn = _facing(free.measured)
    points = free.measured @ turn
    colours = element_colours(free.elements)
    balls = [Ball(((colours[one], 1.0),), drawn_radius([one]), one) for one in free.elements]
    view = fitted(points, _WIDTH, _HEIGHT, _LARGEST_SCALE)
    fog = Fog.over(view.depth(points))
    bonds = np.array(free.bonds, dtype=np.int64).reshape(-1, 2)
    strokes = [*bond_strokes(points, bonds, balls, view, fog), *atom_strokes(points, balls, view, fog)]
    box = box_around(points, max(ball.radius for ball in balls), view)
    axes = dict(zip("xyz", np.eye(3) @ turn, strict=True))
    formula = TEXT.formula(result.formula)
    description = f"{len(free.elements)} atoms and {len(bonds)} bonds, seen across the molecule's flattest side."
    body = [*back_to_front(strokes), tripod(box, axes)]
    svg = drawing(name, f"The molecule {formula}", description, with_tripod(box), *body)
    return Picture(svg, legend(zip(free.elements, balls, strict=True)), ())


def _facing(points: Floats) -> Floats:
    """(3, 3) cyclic exchange of the axes that turns the flat side of a molecule to the viewer, who looks along x."""
    extent = np.ptp(points, axis=0)
    thin = int(np.argmin(extent))
    if extent[thin] > _FLAT * np.sort(extent)[1]:
        thin = 0
    return np.roll(np.eye(3), -thin, axis=1).astype(np.float64)
