"""Displacements of the undistorted parent at the folded wavevectors, as species of the child's factor group.

The space of all displacements with the child's lattice translations is the sum over the wavevectors that fold to its
zone centre. An operation {W | w} turns a wave q into q W⁻¹ and contributes to the character where that is q again: the
trace of W times exp(-2πi q·T) for each atom that it carries into itself displaced by the lattice vector T.
"""

from __future__ import annotations

import numpy as np

from sitesym.comparison.relation import Embedding
from sitesym.comparison.wavevectors import Star
from sitesym.errors import InconsistencyError
from sitesym.groups.operation import Floats
from sitesym.groups.subduction import Multiplicities, reduce_characters


def folded_species(embedding: Embedding, star: Star) -> tuple[Multiplicities, ...]:
    """For each orbit of the parent's atoms the child species that its displacements at this star give."""
    species = embedding.child.factor_group.species
    return tuple(reduce_characters(species, row) for row in _characters(embedding, star))


def _characters(embedding: Embedding, star: Star) -> Floats:
    """(orbits, g) characters of the displacements of each orbit of atoms under the child's operations."""
    parent, operations = embedding.parent, embedding.operations
    target, shift = parent.images
    stays = target[operations] == np.arange(len(parent.positions))
    moved = shift[operations] + embedding.translations[:, None]
    arms = np.array(star.arms, dtype=float) @ np.linalg.inv(embedding.lattices[0].basis).T
    waves = np.zeros(stays.shape, dtype=complex)
    for arm in arms:
        phases = np.exp(-2j * np.pi * (moved @ arm))
        waves += np.where(stays, phases, 0) * _keeps(embedding, arm)[:, None]
    traces = np.trace(parent.factor_group.matrices[operations], axis1=1, axis2=2)
    rows = np.array([waves[:, list(orbit.atoms)].sum(axis=1) * traces for orbit in parent.orbits])
    if np.abs(rows.imag).max() > 1e-6:
        raise InconsistencyError(
            "The characters of the folded wavevectors are not real.", "Try another --tolerance for both structures."
        )
    return np.asarray(rows.real)


def _keeps(embedding: Embedding, arm: Floats) -> Floats:
    """(g,) 1 where an operation turns the wavevector (in a*, b*, c* of the parent) into itself, else 0."""
    rotations = embedding.parent.rotations[embedding.operations]
    difference = (arm @ rotations - arm) @ embedding.lattices[0].basis.T
    return np.asarray((np.abs(difference - np.rint(difference)) < 1e-6).all(axis=1), dtype=float)
