"""Longitudinal, transverse and oblique phonons of a polar species for a given wavevector.

In a polar crystal the phonon's wavevector q singles out a direction of the dipole: along q the mode is longitudinal,
across it transverse; between, species of the dipole's parts mix and the mode is oblique (Loudon, Adv. Phys. 13, 423,
1964; Claus, Merten and Brandmüller, Light Scattering by Phonon-Polaritons, 1975). A mode's Raman tensor is the
combination of the components' tensors with the direction cosines of its dipole.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.groups.operation import Floats
from sitesym.tensors import TensorSpecies

_ZERO = 1e-6

LONGITUDINAL, TRANSVERSE, OBLIQUE = "LO", "TO", "oblique"


@dataclass(frozen=True, eq=False)
class Branch:
    """One kind of phonon of a species.

    kind   "LO", "TO", "oblique", or None for species that are not polar (or where q is zero).
    bases  one (k, 3, 3) array for each mode of that kind: tensors for the k letters of the species.
    """

    kind: str | None
    bases: tuple[Floats, ...]


def branches(species: TensorSpecies, wavevector: Floats | None) -> tuple[Branch, ...]:
    """The kinds of phonons of one species.

    wavevector  (3,) unit vector of q in the Cartesian axes of the tensors; None in exact forward scattering, where q
                is too small for the distinction and the modes are polaritons.
    """
    bases = tuple(component.basis for component in species.components)
    if wavevector is None or species.components[0].polar is None:
        return (Branch(None, bases),)
    if len(species.components) == 1:
        return (Branch(_single_kind(species.polar_space, wavevector), bases),)
    return _degenerate(species, wavevector)


def _single_kind(polar_space: Floats, wavevector: Floats) -> str:
    """A species of one component: its dipole lies on a line, or in a plane or space that symmetry leaves free."""
    along = np.linalg.norm(_orthonormal(polar_space) @ wavevector)
    if along < _ZERO:
        return TRANSVERSE
    return LONGITUDINAL if len(polar_space) == 1 and along > 1 - _ZERO else OBLIQUE


def _orthonormal(vectors: Floats) -> Floats:
    return np.asarray(np.linalg.svd(vectors, full_matrices=False)[2])


def _degenerate(species: TensorSpecies, wavevector: Floats) -> tuple[Branch, ...]:
    """E and T: turn the components so that one dipole lies along the part of q in their plane or space."""
    polar = np.array([component.polar for component in species.components])
    cosines = polar @ wavevector
    size = float(np.linalg.norm(cosines))
    bases = np.array([component.basis for component in species.components])
    if size < _ZERO:
        return (Branch(TRANSVERSE, tuple(bases)),)
    turned = np.einsum("jk,kabc->jabc", _completed(cosines / size), bases)
    first = LONGITUDINAL if size > 1 - _ZERO else OBLIQUE
    return Branch(first, (turned[0],)), Branch(TRANSVERSE, tuple(turned[1:]))


def _completed(first: Floats) -> Floats:
    """An orthogonal matrix whose first row is the unit vector `first`."""
    rows = [first]
    for axis in np.eye(len(first)):
        rest = axis - sum((axis @ row) * row for row in rows)
        if np.linalg.norm(rest) > 0.1 and len(rows) < len(first):
            rows.append(rest / np.linalg.norm(rest))
    return np.array(rows)
