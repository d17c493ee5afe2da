"""What a geometry shows of one set of Raman tensors: amplitudes linear in the letters, and the intensity.

The intensity of a component with tensor T is |es* · T · ei|² (Born and Huang 1954; Loudon 1964), added up over the
components of a species and averaged over incoherent polarizations.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from sitesym.geometry.notation import Geometry
from sitesym.groups.operation import Floats
from sitesym.tensors import TensorSpecies

Complexes = np.typing.NDArray[np.complex128]
_VISIBLE = 1e-9


def amplitudes(geometry: Geometry, basis: Floats) -> Complexes:
    """Coefficients (m, k) of the k letters in es* · T · ei, for each of the m incoherent pairs of polarizations.

    basis (k, 3, 3): the tensor is the sum of letter times basis.
    """
    incoming, outgoing = geometry.incoming.vectors, geometry.outgoing.vectors
    contracted = np.einsum("sa,kab,ib->sik", outgoing.conj(), basis, incoming)
    return np.asarray(contracted.reshape(-1, len(basis)))


def quadratic_form(geometry: Geometry, bases: list[Floats]) -> Complexes:
    """Hermitian (k, k) matrix Q with intensity = letters^H Q letters, summed over components (each (k, 3, 3))."""
    count = len(bases[0]) if bases else 0
    form = np.zeros((count, count), dtype=complex)
    weight = 1.0 / len(geometry.incoming.vectors)
    for basis in bases:
        found = amplitudes(geometry, basis)
        form += weight * found.conj().T @ found
    return form


def intensity(form: Complexes, letters: Complexes | Floats) -> float:
    """letters^H Q letters, real and not negative."""
    return float(np.real(np.conj(letters) @ form @ letters))


def visible_species(species: Sequence[TensorSpecies], geometry: Geometry) -> frozenset[str]:
    """Labels of the species of which a geometry shows some component, whatever the phonon's wavevector."""
    return frozenset(
        one.label
        for one in species
        if one.letters
        and np.abs(quadratic_form(geometry, [component.basis for component in one.components])).max() > _VISIBLE
    )
