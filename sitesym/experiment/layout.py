"""How a measurement stands in the laboratory: which crystal direction lies where, at what angle the polarizations are.

The observer looks at the face from the laser's side. Angles count anticlockwise from a reference direction in the face:
an edge that the user names, or else the first simple direction in it (the same as in angle-resolved curves).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from sitesym.analysis import Analysis
from sitesym.errors import UsageError
from sitesym.experiment.candidates import Candidate, axes_of_face, named
from sitesym.geometry.directions import Direction, face_normal, lattice_direction, turned
from sitesym.geometry.notation import Polarization
from sitesym.groups.operation import Floats

_IN_FACE = np.cos(np.radians(88.0))
_ONE_LINE = 1 - 1e-6


@dataclass(frozen=True, eq=False)
class Layout:
    """One measurement in the laboratory.

    frame      (3, 3) rows are three laboratory axes in the crystal's axes. One beam line: to the right, up in the face,
               and out of the face to the observer. Otherwise: along the laser, against the scattered light as seen from
               it, and normal to the plane of scattering.
    right, up  the first two as directions with names.
    one_line   whether laser and scattered light travel on one line.
    reference  where angles are zero; None off one line. from_edge whether the user named it.
    incoming, outgoing  angles in degrees, 0 to 180, from the reference; None for light that is not linear.
    """

    frame: Floats
    right: Direction
    up: Direction
    one_line: bool
    reference: Direction | None
    from_edge: bool
    incoming: float | None
    outgoing: float | None


def edges_of(analysis: Analysis, edges: Sequence[str]) -> tuple[Direction, ...]:
    """Edges as lattice directions, from indices such as "110" or "[1-10]"; UsageError for what is none."""
    lattice = analysis.symmetry.lattice
    return tuple(lattice_direction(edge.strip().removeprefix("[").removesuffix("]"), lattice) for edge in edges)


def check_edges(analysis: Analysis, edges: Sequence[Direction], faces: Sequence[str]) -> None:
    """Raise UsageError for an edge that lies in none of the faces."""
    normals = [face_normal(face, analysis.symmetry.lattice) for face in faces]
    for edge in edges:
        if not any(_lies_in(edge, normal) for normal in normals):
            raise UsageError(
                f"The edge {edge.name} lies in none of the faces {', '.join(normal.name for normal in normals)}.",
                "Name an edge [uvw] with hu + kv + lw = 0 for one of them.",
            )


def edge_in(normal: Direction, edges: Sequence[Direction]) -> Direction | None:
    """The first of the edges that lies in a face, None if there is none."""
    return next((edge for edge in edges if _lies_in(edge, normal)), None)


def _lies_in(edge: Direction, normal: Direction) -> bool:
    return bool(abs(edge.vector @ normal.vector) < _IN_FACE)


def layout_of(analysis: Analysis, candidate: Candidate, edges: Sequence[Direction] = ()) -> Layout:
    """The layout of a measurement; edges of the sample that lie in its face serve as reference."""
    geometry = candidate.geometry
    if abs(geometry.incident.vector @ geometry.scattered.vector) < _ONE_LINE:
        return _at_an_angle(analysis, candidate)
    lattice = analysis.symmetry.lattice
    normal = face_normal(candidate.faces[0][1:-1], lattice) if candidate.faces else _without_minus(geometry.incident)
    edge = edge_in(normal, edges)
    if edge is not None:
        flat = edge.vector - (edge.vector @ normal.vector) * normal.vector
        up = Direction(edge.name, np.asarray(flat / np.linalg.norm(flat)))
        right = _named(np.cross(up.vector, normal.vector), lattice) or turned(up, normal, -90)
    else:
        right, up = _pair_in(normal, lattice)
    reference = up if edge is not None else axes_of_face(normal, lattice)[0]
    angles = [_angle(light, reference, normal) for light in (geometry.incoming, geometry.outgoing)]
    frame = np.array([right.vector, up.vector, normal.vector])
    return Layout(frame, right, up, True, reference, edge is not None, angles[0], angles[1])


def _without_minus(beam: Direction) -> Direction:
    """The side of a face is not told by a geometry: the one whose name has no minus sign in front is drawn."""
    return -beam if beam.name.startswith("-") else beam


def _pair_in(normal: Direction, lattice: Floats) -> tuple[Direction, Direction]:
    """Directions to the right and up for one who looks at a face, without minus signs where that can be."""
    first = axes_of_face(normal, lattice)[0]
    second = _named(np.cross(normal.vector, first.vector), lattice) or turned(first, normal, 90)
    return (-second, first) if second.name.startswith("-") else (first, second)


def _at_an_angle(analysis: Analysis, candidate: Candidate) -> Layout:
    geometry = candidate.geometry
    right, scattered = geometry.incident, geometry.scattered
    out = np.cross(scattered.vector, right.vector)
    out = np.asarray(out / np.linalg.norm(out))
    up = np.cross(out, right.vector)
    names = analysis.symmetry.lattice
    return Layout(
        np.array([right.vector, up, out]),
        right,
        _named(up, names) or Direction("", up),
        False,
        None,
        False,
        None,
        None,
    )


def _named(vector: Floats, lattice: Floats) -> Direction | None:
    """The direction by its name, with the sign of the vector."""
    line = named(vector, lattice)
    if line is None:
        return None
    return line if line.vector @ vector > 0 else -line


def _angle(light: Polarization, reference: Direction, normal: Direction) -> float | None:
    """From the reference to a linear polarization, anticlockwise about the normal, 0 to 180 degrees."""
    if not light.is_linear:
        return None
    vector = light.vectors[0].real
    across = np.cross(normal.vector, reference.vector)
    degrees = float(np.degrees(np.arctan2(vector @ across, vector @ reference.vector)))
    return round(degrees % 180.0, 6) % 180.0
