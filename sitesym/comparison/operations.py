"""Whether the child's space group, laid into the parent's by its actual operations, is among the parent's."""

from __future__ import annotations

import numpy as np

from sitesym.comparison.lattice import LatticeRelation, PrimitiveLattice
from sitesym.groups.operation import Floats
from sitesym.symmetry.crystal import CrystalSymmetry

_REACH = 0.35
"""Å. How far an operation may be from the parent's before the origin is made exact: displacements average out."""
_EXACT = 0.02
"""Fractional: what the translations of tabulated operations and origins from atoms leave at most."""


def exact_origin(
    parent: CrystalSymmetry, child: CrystalSymmetry, lattice: PrimitiveLattice, relation: LatticeRelation,
    origin: Floats,
) -> tuple[Floats, Floats] | None:  # fmt: skip
    """The origin (3,) made exact, and for each operation of the child the lattice translation by which it differs.

    Both are in the parent's a, b, c; the translations (g, 3) are those in x -> W x + t + translation, where W x + t is
    the parent's operation. None if some operation of the child is none of the parent's from this origin.
    """
    rotations = parent.rotations[relation.operations]
    translations = child.translations @ relation.axes - parent.translations[relation.operations]
    unity = np.eye(3) - rotations
    whole, left = _split(translations + unity @ origin, lattice)
    if np.linalg.norm(left @ lattice.vectors, axis=1).max() > _REACH:
        return None
    system, wanted = unity.reshape(-1, 3), (left @ lattice.basis).reshape(-1)
    correction = np.linalg.lstsq(system, -wanted, rcond=None)[0]
    whole, left = _split(translations + unity @ (origin + correction), lattice)
    if np.abs(left).max() > _EXACT:
        return None
    return origin + correction, whole @ lattice.basis


def _split(translations: Floats, lattice: PrimitiveLattice) -> tuple[Floats, Floats]:
    """Whole lattice translations and what is left of them, both in the primitive basis."""
    inside = translations @ np.linalg.inv(lattice.basis)
    whole = np.rint(inside)
    return whole, inside - whole
