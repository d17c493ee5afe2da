"""Whether light keeps its polarization inside the crystal: birefringence and optical activity by symmetry.

Which directions are principal ones of the optical indicatrix follows from the crystal system (Nye, Physical Properties
of Crystals, 1957, chapter XIII): all in cubic crystals; c in tetragonal, trigonal and hexagonal ones; a, b, c in
orthorhombic ones; only the unique axis in monoclinic ones; none in triclinic ones. Elsewhere the indices decide.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.analysis import Analysis
from sitesym.geometry.directions import Direction
from sitesym.geometry.notation import Geometry, Polarization
from sitesym.groups.operation import Floats

_SAME = 1e-6


@dataclass(frozen=True, slots=True)
class BeamNote:
    """What becomes of the polarization of one beam.

    fraction  the largest share of its intensity that a thick crystal may turn into the crossed polarization; None where
              symmetry does not tell.
    """

    beam: str
    polarization: str
    fraction: float | None
    words: str


def beam_notes(analysis: Analysis, geometry: Geometry) -> tuple[BeamNote, ...]:
    """Notes on both beams of a geometry; beams whose polarization is kept, or is not defined, are left out."""
    pairs = ((geometry.incident, geometry.incoming), (geometry.scattered, geometry.outgoing))
    notes = (_note(analysis, beam, light) for beam, light in pairs)
    return tuple(note for note in notes if note is not None)


def _note(analysis: Analysis, beam: Direction, light: Polarization) -> BeamNote | None:
    if not light.is_linear:
        return None
    directions = principal_directions(analysis, beam.vector)
    vector = light.vectors[0].real
    if directions is None:
        words = (
            f"light along {beam.name}: symmetry does not fix the directions in which light vibrates unchanged, so find "
            "them between crossed polarizers and polarize along one"
        )
        return BeamNote(beam.name, light.name, None, words)
    if not len(directions):
        return None
    cosine = float(np.abs(directions @ vector).max())
    if cosine > 1 - _SAME:
        return None
    angle = float(np.arccos(cosine))
    fraction = float(np.sin(2 * angle) ** 2)
    words = (
        f"light along {beam.name} polarized along {light.name} lies {np.degrees(angle):.0f}° off a principal "
        f"direction: birefringence may turn up to {100 * fraction:.0f} % of it into the crossed polarization (thin "
        "samples less)"
    )
    return BeamNote(beam.name, light.name, fraction, words)


def principal_directions(analysis: Analysis, beam: Floats) -> Floats | None:
    """(2, 3) directions across a beam in which light vibrates unchanged; empty if all do; None if not known."""
    number = analysis.symmetry.number
    if number >= 195:
        return np.zeros((0, 3))
    if number >= 75:
        return _uniaxial(beam)
    if number >= 16:
        return _known_across(beam, np.eye(3))
    if number >= 3:
        return _known_across(beam, unique_axis(analysis)[None])
    return None


def _uniaxial(beam: Floats) -> Floats:
    ordinary = np.cross(np.array([0.0, 0.0, 1.0]), beam)
    if np.linalg.norm(ordinary) < _SAME:
        return np.zeros((0, 3))
    ordinary /= np.linalg.norm(ordinary)
    return np.array([ordinary, np.cross(beam, ordinary)])


def _known_across(beam: Floats, axes: Floats) -> Floats | None:
    """A principal axis of the indicatrix across the beam is one of the two directions."""
    for axis in axes:
        if abs(axis @ beam) < _SAME:
            return np.array([axis, np.cross(beam, axis)])
    return None


def unique_axis(analysis: Analysis) -> Floats:
    """Unit vector of the unique axis of a monoclinic crystal: the only axis among its operations."""
    elements = analysis.factor_group.elements
    return np.asarray(elements.axes[elements.orders > 1][0])


def optical_activity(analysis: Analysis, geometry: Geometry) -> str:
    """A sentence where symmetry lets the plane of polarization turn along a beam that is not birefringent, else "".

    The eleven classes without improper operations; across the optic axis birefringence hides the effect.
    """
    if (~analysis.factor_group.elements.proper).any():
        return ""
    beams = [
        beam.name
        for beam in (geometry.incident, geometry.scattered)
        if (directions := principal_directions(analysis, beam.vector)) is not None and not len(directions)
    ]
    if not beams:
        return ""
    return (
        f"the crystal may be optically active: along {' and '.join(dict.fromkeys(beams))} the plane of polarization "
        "can turn (quartz: about 22° per mm at 589 nm along c), so keep the path short"
    )
