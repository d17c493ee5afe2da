"""Selection rules of a point group: which species interact with light, and how.

Infrared absorption needs a polar vector, Raman scattering a symmetric tensor of second rank (its antisymmetric part
shows in resonance only), hyper-Raman scattering a symmetric tensor of third rank. Source: Wilson, Decius and Cross,
Molecular Vibrations (1955), chapter 3; for hyper-Raman Cyvin, Rauch and Decius, J. Chem. Phys. 43, 4083 (1965).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from sitesym.groups.operation import Floats, determinants
from sitesym.groups.point_group import PointGroup
from sitesym.groups.subduction import Multiplicities, reduce_characters

_AXES = "xyz"
_PRESENT = 1e-6


@dataclass(frozen=True, slots=True)
class Activity:
    """What one species can do.

    polar      axes (x, y, z of the group's Cartesian frame) along which its dipole may point; none: not in infrared.
    rotations  axes about which a rotation belongs to it (Rx, Ry, Rz).
    raman      in the symmetric tensor; `resonance` in the antisymmetric one.
    """

    label: str
    dimension: int
    polar: tuple[str, ...]
    rotations: tuple[str, ...]
    raman: bool
    resonance: bool
    hyper_raman: bool

    @property
    def infrared(self) -> bool:
        """Whether infrared light of some polarization excites it."""
        return bool(self.polar)

    @property
    def silent(self) -> bool:
        """Neither infrared nor Raman active."""
        return not (self.infrared or self.raman)


@lru_cache(maxsize=512)
def activities(group: PointGroup) -> tuple[Activity, ...]:
    """The selection rules of every species of the group, in its order."""
    matrices = group.matrices
    axial = matrices * determinants(matrices)[:, None, None]
    raman = reduce_characters(group.species, symmetric_square(matrices))
    resonance = reduce_characters(group.species, _traces(axial))
    hyper = reduce_characters(group.species, symmetric_cube(matrices))
    return tuple(
        Activity(
            one.label,
            one.dimension,
            _axes_in(one.characters, matrices),
            _axes_in(one.characters, axial),
            one.label in raman,
            one.label in resonance,
            one.label in hyper,
        )
        for one in group.species
    )


def activity_of(group: PointGroup, label: str) -> Activity:
    """The selection rules of one species. Raises KeyError for a label that the group does not have."""
    return _by_label(group)[label]


@lru_cache(maxsize=512)
def _by_label(group: PointGroup) -> dict[str, Activity]:
    return {one.label: one for one in activities(group)}


def vector_species(group: PointGroup) -> Multiplicities:
    """Species of a polar vector: those of the acoustic modes."""
    return reduce_characters(group.species, _traces(group.matrices))


def symmetric_square(matrices: Floats) -> Floats:
    """Characters (n,) of the symmetric second-rank tensor."""
    return np.asarray((_traces(matrices) ** 2 + _traces(matrices @ matrices)) / 2)


def symmetric_cube(matrices: Floats) -> Floats:
    """Characters (n,) of the symmetric third-rank tensor."""
    square = matrices @ matrices
    one, two, three = _traces(matrices), _traces(square), _traces(square @ matrices)
    return np.asarray((one**3 + 3 * one * two + 2 * three) / 6)


def _traces(matrices: Floats) -> Floats:
    return np.asarray(np.trace(matrices, axis1=-2, axis2=-1))


def _axes_in(characters: Floats, vectors: Floats) -> tuple[str, ...]:
    """Axes with a part in the species: the diagonal of its projector in the space of `vectors`."""
    projector = np.einsum("g,gij->ij", characters, vectors) / len(vectors)
    return tuple(axis for axis, weight in zip(_AXES, np.diag(projector), strict=True) if weight > _PRESENT)
