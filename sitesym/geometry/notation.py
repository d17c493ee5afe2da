"""Scattering geometries ki(ei es)ks after Damen, Porto and Tell (Phys. Rev. 142, 570, 1966).

Directions are those of travelling light inside the crystal. In typed input `-z` stands for z̄, and a bracketed direction
[uvw] or the normal of a face (hkl) may take a letter's place. A polarization may be turned about the incident beam, or
about its own where that travels along another line, by degrees: `x+30°`. It may also be `R` or `L` (circular, seen
against the beam) or `*` (unpolarized light, or no analyser): `z(xy)-z`, `[001]([110][1-10])[00-1]`, `x(z*)y`,
`z(x+30° x+120°)-z`.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np

from sitesym.errors import UsageError
from sitesym.geometry.directions import Direction, parse_direction, turned
from sitesym.groups.operation import Floats

Complexes = np.typing.NDArray[np.complex128]
_WORD = r"-?(?:\[[^\]]*\]|\([-+\d\s,]+\)|[xyz])"
_ANGLE = r"[-+]\d+(?:\.\d+)?°?"
_POLARIZATION = rf"(?:{_WORD}(?:{_ANGLE})?|[RL*])"
_TURNED = re.compile(rf"({_WORD})({_ANGLE})")
_NOTATION = re.compile(rf"\s*({_WORD})\s*\(\s*({_POLARIZATION})\s*({_POLARIZATION})\s*\)\s*({_WORD})\s*")
_TRANSVERSE = 1e-3
_SAME_LINE = 1e-9


@dataclass(frozen=True, eq=False)
class Polarization:
    """The state of light of one beam.

    name     as printed.
    vectors  (m, 3) complex unit vectors; intensities are averaged over them (one for polarized light, two for `*`).
    """

    name: str
    vectors: Complexes

    @property
    def is_linear(self) -> bool:
        """One real vector."""
        return len(self.vectors) == 1 and not np.iscomplex(self.vectors).any()


@dataclass(frozen=True, eq=False)
class Geometry:
    """One scattering geometry in the Cartesian axes of the report, inside the crystal.

    incident, scattered      directions in which the light travels.
    incoming, outgoing       polarizations of the laser and of the analyser.
    """

    incident: Direction
    incoming: Polarization
    outgoing: Polarization
    scattered: Direction

    @property
    def notation(self) -> str:
        """`z(xy)-z`, as typed."""
        gap = "" if len(self.incoming.name + self.outgoing.name) <= 2 else " "
        return f"{self.incident.name}({self.incoming.name}{gap}{self.outgoing.name}){self.scattered.name}"

    @property
    def phonon(self) -> Floats | None:
        """Unit vector of the phonon's wavevector ki - ks, or None in exact forward scattering."""
        difference = self.incident.vector - self.scattered.vector
        length = float(np.linalg.norm(difference))
        return None if length < 1e-6 else np.asarray(difference / length)

    def __repr__(self) -> str:
        return f"Geometry({self.notation})"


def linear(direction: Direction) -> Polarization:
    """Light polarized linearly along a direction."""
    return Polarization(direction.name, direction.vector[None].astype(complex))


def circular(hand: str, along: Direction) -> Polarization:
    """`R` or `L`: the electric vector turns clockwise or anticlockwise seen against the beam (Hecht, Optics, 2017)."""
    first, second = _transverse_pair(along.vector)
    sign = -1.0 if hand == "R" else 1.0
    return Polarization(hand, ((first + 1j * sign * second) / np.sqrt(2))[None])


def unpolarized(along: Direction) -> Polarization:
    """Natural light, or detection without an analyser: two equal incoherent parts."""
    return Polarization("*", np.array(_transverse_pair(along.vector), dtype=complex))


def _transverse_pair(along: Floats) -> tuple[Floats, Floats]:
    helper = np.eye(3)[int(np.argmin(np.round(np.abs(along), 9)))]
    first = np.cross(along, helper)
    first /= np.linalg.norm(first)
    return first, np.cross(along, first)


def parse_geometry(text: str, lattice: Floats) -> Geometry:
    """Read a notation. `lattice` (3, 3) has the rows a, b, c in the Cartesian axes of the report.

    Raises UsageError where it cannot be read or a polarization is not transverse to its beam.
    """
    found = _NOTATION.fullmatch(text)
    if found is None:
        raise UsageError(
            f"'{text}' is no scattering geometry.", "Write ki(ei es)ks, such as z(xy)-z or [001]([110][1-10])[00-1]."
        )
    incident, scattered = (parse_direction(found[k], lattice) for k in (1, 4))
    one_line = bool(abs(incident.vector @ scattered.vector) > 1 - _SAME_LINE)
    incoming = _polarization(found[2], incident, incident, lattice)
    outgoing = _polarization(found[3], scattered, incident if one_line else scattered, lattice)
    return Geometry(incident, incoming, outgoing, scattered)


def _polarization(word: str, beam: Direction, axis: Direction, lattice: Floats) -> Polarization:
    if word == "*":
        return unpolarized(beam)
    if word in ("R", "L"):
        return circular(word, beam)
    with_angle = _TURNED.fullmatch(word)
    direction = parse_direction(with_angle[1] if with_angle else word, lattice)
    if abs(direction.vector @ beam.vector) > _TRANSVERSE:
        angle = np.degrees(np.arccos(min(1.0, abs(float(direction.vector @ beam.vector)))))
        raise UsageError(
            f"Light along {beam.name} cannot be polarized along {direction.name}: they enclose {angle:.1f}°, not 90°.",
            "Choose a polarization across the beam; in oblique crystals [uvw] and (uvw) differ.",
        )
    if with_angle:
        direction = turned(direction, axis, float(with_angle[2].removesuffix("°")))
    return linear(direction)
