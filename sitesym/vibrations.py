"""The vibrations of a free molecule by species and by kind: stretching, bending, out-of-plane, torsion.

The representation of all displacements, less translations and rotations, gives the internal vibrations (Wilson, Decius
and Cross, Molecular Vibrations, 1955, chapter 6). Each kind of internal coordinate spans a subspace that the group
keeps; what a kind adds to those named before it is counted as its own, so redundant coordinates count nothing.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from sitesym.errors import InconsistencyError
from sitesym.groups.operation import Floats, Integers, determinants
from sitesym.groups.point_group import PointGroup
from sitesym.groups.subduction import Multiplicities, added, in_order, reduce_characters, subtracted
from sitesym.internal_coordinates import bends, neighbours, out_of_plane_bends, stretches, torsions

KINDS = ("stretching", "bending", "out-of-plane", "torsion", "skeletal")
"""In the order in which they are counted; `skeletal` is what the graph of bonds does not reach."""

_NEARLY_REDUNDANT = (1e-3, 0.1)
"""Singular values below count as zero, those above as independent, relative to the largest coordinate vector."""


_NOTHING = 1e-8
"""1/Å. Coordinates whose vectors are all shorter than this are zero but for rounding (torsions in a ring of three)."""


@dataclass(frozen=True, slots=True)
class FreeVibrations:
    """Species of a free molecule's motions.

    internal      all internal vibrations; kinds the same divided by kind (kinds that do not occur are left out).
    translations  species of the three translations; rotations of the two or three rotations (none for an atom).
    """

    internal: Multiplicities
    kinds: dict[str, Multiplicities]
    translations: Multiplicities
    rotations: Multiplicities


def free_vibrations(group: PointGroup, positions: Floats, bonds: Sequence[tuple[int, int]]) -> FreeVibrations:
    """Decompose the motions of a molecule.

    group      its point group, matrices in the frame of `positions` about their common centre.
    positions  (n, 3) Å, exactly of that symmetry, the centre at the origin.
    bonds      pairs of atoms.

    Raises InconsistencyError when the positions do not have the symmetry of the group.
    """
    permutations = permutations_of(group, positions)
    traces = np.trace(group.matrices, axis1=1, axis2=2)
    fixed = (permutations == np.arange(len(positions))).sum(axis=1)
    everything = reduce_characters(group.species, fixed * traces)
    translations = reduce_characters(group.species, traces)
    rotations = reduce_characters(group.species, rotation_characters(group, positions))
    internal = in_order(group, subtracted(everything, added(translations, rotations)))
    return FreeVibrations(internal, _by_kind(group, positions, bonds, permutations, internal), translations, rotations)


def rotation_characters(group: PointGroup, positions: Floats) -> Floats:
    """Characters of the rotations that a molecule of this shape can make: three, two if linear, none if an atom."""
    matrices = group.matrices
    signs = determinants(matrices)
    axial = np.asarray(np.trace(matrices, axis1=1, axis2=2) * signs)
    spread = np.linalg.svd(positions - positions.mean(axis=0), full_matrices=False)
    if spread[1][0] < 1e-6:
        return np.zeros(len(matrices))
    if spread[1][1] < 1e-6 * spread[1][0]:
        along = spread[2][0]
        return np.asarray(axial - signs * (matrices @ along @ along))
    return axial


def permutations_of(group: PointGroup, positions: Floats) -> Integers:
    """(g, n) the atom to which each operation takes each atom.

    Raises InconsistencyError when an image lies at no atom.
    """
    images = np.einsum("gij,nj->gni", group.matrices, positions)
    distance = np.linalg.norm(images[:, :, None] - positions[None, None], axis=3)
    if distance.min(axis=2).max() > 1e-3:
        raise InconsistencyError(
            f"A molecule's atoms are {distance.min(axis=2).max():.3f} Å away from the symmetry {group.schoenflies}.",
            "Its positions must be idealised before its vibrations are counted.",
        )
    return np.asarray(distance.argmin(axis=2), dtype=np.int64)


def _by_kind(
    group: PointGroup, positions: Floats, bonds: Sequence[tuple[int, int]], permutations: Integers,
    internal: Multiplicities,
) -> dict[str, Multiplicities]:  # fmt: skip
    near = neighbours(len(positions), bonds)
    makers: tuple[Callable[[], Floats], ...] = (
        lambda: stretches(positions, bonds),
        lambda: bends(positions, near),
        lambda: out_of_plane_bends(positions, near),
        lambda: torsions(positions, bonds, near),
    )
    kinds: dict[str, Multiplicities] = {}
    basis = _rigid_motions(positions)
    rest, wanted = internal, len(basis) + _size(group, internal)
    for kind, make in zip(KINDS, makers, strict=False):
        if len(basis) == wanted:
            break
        fresh = _new_directions(basis, make())
        if len(fresh):
            found = reduce_characters(group.species, _subspace_characters(group, permutations, fresh))
            kinds[kind], rest = in_order(group, found), subtracted(rest, found)
            basis = np.vstack([basis, fresh])
    if rest:
        kinds[KINDS[-1]] = in_order(group, rest)
    return kinds


def _rigid_motions(positions: Floats) -> Floats:
    """Orthonormal displacement vectors (3, 5 or 6; 3n) of the translations and rotations about the origin."""
    axes = np.eye(3)
    shifts = np.tile(axes, (1, len(positions)))
    turns = np.array([np.cross(axis, positions).ravel() for axis in axes])
    return _new_directions(np.zeros((0, positions.size)), np.vstack([shifts, turns]))


def _size(group: PointGroup, parts: Multiplicities) -> int:
    sizes = {one.label: one.dimension for one in group.species}
    return sum(sizes[label] * count for label, count in parts.items())


def _new_directions(basis: Floats, rows: Floats) -> Floats:
    """Orthonormal basis of what `rows` span beyond an orthonormal `basis`.

    Coordinates that are redundant but for a small distortion (angles round a nearly planar atom) span next to nothing
    new; the cut is made at the widest gap of the singular values, so that it never parts a symmetric set of them.
    """
    largest = float(np.linalg.norm(rows, axis=1).max(initial=0.0))
    if largest < _NOTHING:
        return rows[:0]
    rest = rows - (rows @ basis.T) @ basis
    squares, vectors = np.linalg.eigh(rest.T @ rest)
    sizes = np.sqrt(np.clip(squares, 0, None)) / largest
    fresh = vectors[:, sizes > _cut(sizes)]
    fresh = fresh - basis.T @ (basis @ fresh)
    return np.asarray(np.linalg.qr(fresh)[0].T)


def _cut(sizes: Floats) -> float:
    """A value in the middle of the widest gap, on a scale of ratios, between the singular values near zero."""
    low, high = _NEARLY_REDUNDANT
    inside = np.sort(sizes[(sizes > low) & (sizes < high)])
    marks = np.log(np.concatenate([[low], inside, [high]]))
    widest = int(np.argmax(np.diff(marks)))
    return float(np.exp((marks[widest] + marks[widest + 1]) / 2))


def _subspace_characters(group: PointGroup, permutations: Integers, basis: Floats) -> Floats:
    """Traces of the operations on the space of orthonormal displacement vectors `basis` (m, 3n)."""
    vectors = basis.reshape(len(basis), -1, 3)
    characters = np.zeros(len(group))
    for members in group.classes:
        first = members[0]
        moved = vectors @ group.matrices[first].T
        characters[list(members)] = np.einsum("mni,mni->", vectors[:, permutations[first]], moved)
    return characters
