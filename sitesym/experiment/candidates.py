"""The measurements that a sample allows: faces, mounts and the polarizations worth trying on each."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import combinations, product

import numpy as np

from sitesym.errors import UsageError
from sitesym.geometry.directions import Direction, face_normal, format_indices, in_plane, parse_direction, turned
from sitesym.geometry.notation import Geometry, linear, unpolarized
from sitesym.groups.operation import Floats

MOUNTS = ("backscattering", "right-angle", "forward")
_PARALLEL = 1 - 1e-8
_ACROSS = 1e-3
_SMALL = sorted(
    (t for t in product(range(-3, 4), repeat=3) if any(t) and t > (0, 0, 0)), key=lambda t: (sum(map(abs, t)), t)
)


@dataclass(frozen=True, eq=False)
class Candidate:
    """One possible measurement.

    faces  names of the faces that light passes: one, or two in right-angle scattering.
    mount  "backscattering", "right-angle" or "forward".
    ease   0 for the simplest; grows with turned polarizers, missing analysers and difficult mounts.
    """

    geometry: Geometry
    faces: tuple[str, ...]
    mount: str
    ease: int


def candidates(
    lattice: Floats, faces: Sequence[str], mounts: Sequence[str] = ("backscattering",), *, analyser: bool = True
) -> tuple[Candidate, ...]:
    """All measurements on these faces.

    lattice   (3, 3) rows a, b, c in the Cartesian axes of the report.
    faces     indices, three or four, such as "001" or "1 0 -1 0".
    analyser  False when the scattered light is not analysed.

    Raises UsageError for indices that are none, an unknown mount, or right-angle scattering with no two faces at 90°.
    """
    unknown = [mount for mount in mounts if mount not in MOUNTS]
    if unknown:
        raise UsageError(f"'{unknown[0]}' is no mount.", f"Choose from {', '.join(MOUNTS)}.")
    normals = [face_normal(face, lattice) for face in dict.fromkeys(faces)]
    found: list[Candidate] = []
    for normal in normals:
        for mount in ("backscattering", "forward"):
            if mount in mounts:
                found += _along_one_line(normal, mount, lattice, analyser)
    if "right-angle" in mounts:
        across = [pair for pair in combinations(normals, 2) if abs(pair[0].vector @ pair[1].vector) < _ACROSS]
        if not across:
            raise UsageError(
                "Right-angle scattering needs two faces at 90°, and none of the faces given are.",
                "Add a face across one of them with --face.",
            )
        for first, second in across:
            found += _at_right_angle(first, second, lattice, analyser)
    return tuple(found)


def axes_of_face(normal: Direction, lattice: Floats) -> tuple[Direction, Direction]:
    """Two perpendicular directions in a face: a Cartesian axis, or else the simplest lattice direction, and another."""
    first = _first_in_plane(normal, lattice)
    return first, named(np.cross(normal.vector, first.vector), lattice) or turned(first, normal, 90)


def _first_in_plane(normal: Direction, lattice: Floats) -> Direction:
    for axis in "xyz":
        direction = parse_direction(axis, lattice)
        if abs(direction.vector @ normal.vector) < 1e-8:
            return direction
    for triple in _SMALL:
        vector = np.array(triple, dtype=float) @ lattice
        vector /= np.linalg.norm(vector)
        if abs(vector @ normal.vector) < 1e-8:
            return Direction(f"[{format_indices(list(triple))}]", vector)
    return in_plane(parse_direction("x", lattice), normal)


def named(vector: Floats, lattice: Floats) -> Direction | None:
    """The simplest name of a line: a Cartesian axis, [uvw] or (hkl) with indices up to three; None if there is none."""
    reciprocal = np.linalg.inv(lattice).T
    for axis in "xyz":
        direction = parse_direction(axis, lattice)
        if abs(direction.vector @ vector) > _PARALLEL:
            return direction
    for triple, (rows, left, right) in product(_SMALL, ((lattice, "[", "]"), (reciprocal, "(", ")"))):
        line = np.array(triple, dtype=float) @ rows
        line /= np.linalg.norm(line)
        if abs(line @ vector) > _PARALLEL:
            return Direction(f"{left}{format_indices(list(triple))}{right}", line)
    return None


def _beam(normal: Direction, lattice: Floats) -> Direction:
    return _simplest(normal, lattice)


def _simplest(direction: Direction, lattice: Floats) -> Direction:
    return named(direction.vector, lattice) or direction


def _along_one_line(normal: Direction, mount: str, lattice: Floats, analyser: bool) -> Iterator[Candidate]:
    beam = _beam(normal, lattice)
    scattered = -beam if mount == "backscattering" else beam
    u, v = axes_of_face(normal, lattice)
    plus, minus = (_simplest(turned(u, beam, angle), lattice) for angle in (45, -45))
    base = 3 if mount == "forward" else 0
    natural = unpolarized(scattered)
    pairs = [(u, natural, 0), (v, natural, 0), (plus, natural, 2)]
    if analyser:
        lines = [(u, u, 0), (v, v, 0), (u, v, 0), (plus, plus, 2), (plus, minus, 2)]
        pairs = [(incoming, linear(outgoing), ease) for incoming, outgoing, ease in lines]
    for incoming, outgoing, ease in pairs:
        geometry = Geometry(beam, linear(incoming), outgoing, scattered)
        yield Candidate(geometry, (normal.name,), mount, base + ease)


def _at_right_angle(first: Direction, second: Direction, lattice: Floats, analyser: bool) -> Iterator[Candidate]:
    incident, scattered = _beam(first, lattice), _beam(second, lattice)
    normal = named(np.cross(first.vector, second.vector), lattice)
    out = normal or Direction("out of plane", np.cross(first.vector, second.vector))
    for incoming in (scattered, out):
        states = [linear(incident), linear(out)] if analyser else [unpolarized(scattered)]
        for state in states:
            geometry = Geometry(incident, linear(incoming), state, scattered)
            yield Candidate(geometry, (first.name, second.name), "right-angle", 5)
