"""How much of a species that a geometry forbids is seen all the same: misorientation and aperture.

Figures are relative to the strongest signal that the species shows for polarizations along x, y and z, averaged over
tensors of its shape with independent letters of equal size: an order of magnitude, not a prediction.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import product

import numpy as np

from sitesym.analysis import Analysis, SpeciesRow
from sitesym.errors import UsageError
from sitesym.experiment.shown import raman_rows
from sitesym.geometry.directions import Direction
from sitesym.geometry.notation import Geometry, Polarization
from sitesym.groups.operation import Floats

Complexes = np.typing.NDArray[np.complex128]
_TILTS = 32
_RINGS, _SPOKES = 8, 24
_SMALL = 1e-9
_LARGEST_INDEX = 10.0


@dataclass(frozen=True, slots=True)
class Leak:
    """What leaks of one forbidden species in one geometry, as fractions of its strongest signal.

    misorientation  averaged over tilts of the stated angle in all directions.
    aperture        averaged over the cones of light of the stated aperture.
    """

    label: str
    misorientation: float
    aperture: float


def leaks(
    analysis: Analysis, geometry: Geometry, *, tilt: float = 2.0, aperture: float = 0.0, index: float = 1.5
) -> tuple[Leak, ...]:
    """Leakage of every species that the geometry forbids.

    tilt      degrees of misorientation. aperture: numerical aperture of the objective (0: parallel light), index the
              refractive index of the crystal, which narrows the cone inside.

    Raises UsageError for values that make no sense.
    """
    check_conditions(tilt, aperture, index)
    found = []
    for row in raman_rows(analysis):
        tensors = _tensors(row)
        if _signal(tensors, *_states(geometry)) > _SMALL:
            continue
        best = _strongest(tensors)
        found.append(
            Leak(
                row.label,
                max(0.0, _tilted(tensors, geometry, tilt) / best),
                max(0.0, _coned(tensors, geometry, aperture, index) / best),
            )
        )
    return tuple(found)


def check_conditions(tilt: float, aperture: float, index: float) -> None:
    """Raise UsageError for a tilt, a numerical aperture or a refractive index that make no sense."""
    if not 0 <= tilt <= 45 or not 1 <= index <= _LARGEST_INDEX or not 0 <= aperture < index:
        raise UsageError(
            f"A tilt of {tilt:g}°, an aperture of {aperture:g} and an index of {index:g} do not go together.",
            f"Give a tilt of 0 to 45°, an index of 1 to {_LARGEST_INDEX:g} and an aperture below it.",
        )


def _tensors(row: SpeciesRow) -> Floats:
    """(d k, 3, 3) tensors of each component with each letter alone: independent letters add their intensities."""
    return np.concatenate([component.basis for component in row.tensor.components])


def _density(polarization: Polarization) -> Complexes:
    """(3, 3) average of e e^H over the incoherent states of light."""
    vectors = polarization.vectors
    return np.asarray(np.einsum("mi,mj->ij", vectors, vectors.conj()))


def _states(geometry: Geometry) -> tuple[Complexes, Complexes]:
    incoming = _density(geometry.incoming) / len(geometry.incoming.vectors)
    return incoming, _density(geometry.outgoing)


def _signal(tensors: Floats, incoming: Complexes, outgoing: Complexes) -> float:
    """Σ over the tensors of tr(outgoing T incoming T^T)."""
    return float(np.einsum("ab,kbc,cd,kad->", outgoing, tensors, incoming, tensors, optimize=True).real)


def _strongest(tensors: Floats) -> float:
    axes = np.eye(3)
    return max(float((np.einsum("a,kab,b->k", e, tensors, f) ** 2).sum()) for e, f in product(axes, axes))


def _tilted(tensors: Floats, geometry: Geometry, degrees: float) -> float:
    incoming, outgoing = _states(geometry)
    signals = []
    for axis in _sphere(_TILTS):
        turn = _rotation(axis, np.radians(degrees))
        signals.append(_signal(tensors, turn @ incoming @ turn.T, turn @ outgoing @ turn.T))
    return float(np.mean(signals))


def _coned(tensors: Floats, geometry: Geometry, aperture: float, index: float) -> float:
    half = float(np.arcsin(aperture / index))
    incoming, outgoing = _states(geometry)
    first = _over_cone(incoming, geometry.incident, half)
    second = _over_cone(outgoing, geometry.scattered, half)
    return _signal(tensors, first, second)


def _over_cone(density: Complexes, beam: Direction, half: float) -> Complexes:
    """Average over the rays of a cone; a lens turns a ray's polarization with it in the meridional plane."""
    if half < 1e-9:
        return density
    cosines = 1 - (np.arange(_RINGS) + 0.5) / _RINGS * (1 - np.cos(half))
    total = np.zeros((3, 3), dtype=complex)
    for cosine, spoke in product(cosines, range(_SPOKES)):
        turn = _rotation(_across(beam.vector, 2 * np.pi * spoke / _SPOKES), float(np.arccos(cosine)))
        total += turn @ density @ turn.T
    return np.asarray(total / (_RINGS * _SPOKES))


def _across(beam: Floats, azimuth: float) -> Floats:
    helper = np.eye(3)[int(np.argmin(np.abs(beam)))]
    first = np.cross(beam, helper)
    first /= np.linalg.norm(first)
    return np.asarray(np.cos(azimuth) * first + np.sin(azimuth) * np.cross(beam, first))


def _sphere(count: int) -> Floats:
    """Directions spread evenly (Fibonacci lattice; González, Math. Geosci. 42, 49, 2010)."""
    steps = np.arange(count) + 0.5
    z = 1 - 2 * steps / count
    azimuth = np.pi * (1 + np.sqrt(5)) * steps
    radius = np.sqrt(1 - z**2)
    return np.column_stack([radius * np.cos(azimuth), radius * np.sin(azimuth), z])


def _rotation(axis: Floats, angle: float) -> Floats:
    x, y, z = axis
    cross = np.array([[0, -z, y], [z, 0, -x], [-y, x, 0]])
    return np.asarray(np.eye(3) + np.sin(angle) * cross + (1 - np.cos(angle)) * cross @ cross)
