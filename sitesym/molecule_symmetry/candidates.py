"""Permutations of a molecule's atoms that nearly keep all distances: the candidates for its symmetry operations.

Every operation keeps the centre, so the images of two reference atoms that are not on one line with it fix the
operation up to the reflection in their plane. The images are pruned by element, distance from the centre, environment
and mutual distance; each surviving pair gives a proper and an improper matrix, which must bring every atom near an
atom of its element, one to one.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sitesym.molecule_symmetry.fit import best_matrices
from sitesym.molecule_symmetry.result import Matrices, Permutations, Vectors

DISTANCE_FACTOR = 2.0
"""Two distances that an operation should make equal may differ by this many tolerances, in the pruning."""

MISFIT_FACTOR = 2.0
"""An atom's image under a candidate may miss the atom that it falls on by this many tolerances."""

_COLUMNS = 16
_TESTED_ATOMS = 8
_BATCH = 400_000


@dataclass(frozen=True, eq=False)
class Candidates:
    """Candidate operations: permutations (k, n), signs (k,) of the determinant, and misfit (k,) Å.

    The misfit is the largest distance of an atom's image from the atom that it falls on, over the square root of two:
    for an operation of order two that is the tolerance which the operation needs.
    base: the two atoms whose images, with the sign, tell all operations apart.
    """

    permutations: Permutations
    signs: Vectors
    misfit: Vectors
    base: tuple[int, int]


def find_candidates(kinds: NDArray[np.int64], positions: Vectors, reach: float) -> Candidates:
    """Return the candidates with a misfit below `MISFIT_FACTOR` times `reach` (Å).

    kinds: (n,) integers, equal for equal elements. positions: (n, 3) Å about the centre, not all on one line.
    """
    distances = np.sqrt(((positions[:, None] - positions[None]) ** 2).sum(axis=2))
    alike = alike_atoms(kinds, positions, distances, DISTANCE_FACTOR * reach)
    base = choose_base(positions, alike)
    images = _base_images(base, distances, alike, DISTANCE_FACTOR * reach)
    matrices, signs = _base_matrices(positions, base, images)
    near = _bring_atoms_home(positions, alike, base, matrices, MISFIT_FACTOR * reach)
    return _assign(positions, kinds, base, matrices[near], signs[near], MISFIT_FACTOR * reach)


def alike_atoms(kinds: NDArray[np.int64], positions: Vectors, distances: Vectors, limit: float) -> NDArray[np.bool_]:
    """Return (n, n): may atom j be the image of atom i? Same element, and environments that differ by `limit` at most.

    The environment is the sorted list of distances to all atoms of one element. Sorting never enlarges the largest
    difference, so no true image is lost.
    """
    radii = np.sqrt((positions**2).sum(axis=1))
    alike: NDArray[np.bool_] = (kinds[:, None] == kinds[None]) & (np.abs(radii[:, None] - radii[None]) <= limit)
    for kind in np.unique(kinds):
        columns = np.sort(distances[:, kinds == kind], axis=1)
        picked = np.unique(np.linspace(0, columns.shape[1] - 1, _COLUMNS).astype(int))
        for column in columns[:, picked].T:
            alike &= np.abs(column[:, None] - column[None]) <= limit
    return alike


def choose_base(positions: Vectors, alike: NDArray[np.bool_]) -> tuple[int, int]:
    """Choose two atoms with few images that span, with the centre, a triangle of good size."""
    area = np.sqrt((np.cross(positions[:, None], positions[None]) ** 2).sum(axis=2))
    counts = alike.sum(axis=1).astype(float)
    cost = counts[:, None] * counts[None] - area / (2 * area.max())
    cost[area < 0.35 * area.max()] = np.inf
    first, second = np.unravel_index(np.argmin(cost), cost.shape)
    return int(first), int(second)


def _base_images(base: tuple[int, int], distances: Vectors, alike: NDArray[np.bool_], limit: float) -> Permutations:
    """Return (p, 2): the pairs of atoms to which the two atoms of the base may go."""
    first, second = base
    possible = alike[first][:, None] & alike[second][None]
    possible &= np.abs(distances - distances[first, second]) <= limit
    np.fill_diagonal(possible, False)
    return np.argwhere(possible)


def _base_matrices(positions: Vectors, base: tuple[int, int], images: Permutations) -> tuple[Matrices, Vectors]:
    """Return the matrices (2p, 3, 3), first the proper ones, and their signs, that take the base to its images."""
    home = _frames(positions[[base[0]]], positions[[base[1]]])[0]
    frames = _frames(positions[images[:, 0]], positions[images[:, 1]])
    mirrored = frames * np.array([1.0, 1.0, -1.0])
    signs = np.repeat([1.0, -1.0], len(images))
    return np.concatenate([frames, mirrored]) @ home.T, signs


def _frames(first: Vectors, second: Vectors) -> Matrices:
    """Return (p, 3, 3) right-handed frames, axes in columns, that treat two directions (p, 3) alike."""
    first, second = _units(first), _units(second)
    total, difference = _units(first + second), _units(first - second)
    return np.stack([total, difference, np.cross(total, difference)], axis=2)


def _units(vectors: Vectors) -> Vectors:
    """Return unit vectors along the vectors (p, 3); a vector of no length stays so."""
    return np.asarray(vectors / np.maximum(np.sqrt((vectors**2).sum(axis=1)), 1e-9)[:, None])


def _bring_atoms_home(
    positions: Vectors,
    alike: NDArray[np.bool_],
    base: tuple[int, int],
    matrices: Matrices,
    limit: float,
) -> NDArray[np.int64]:
    """Return the indices of the matrices that bring a few telling atoms within `limit` of an atom like them."""
    radii = np.sqrt((positions**2).sum(axis=1))
    telling = [i for i in np.lexsort((-radii, alike.sum(axis=1))) if i not in base][:_TESTED_ATOMS]
    left = np.arange(len(matrices))
    for atom in telling:
        images = matrices[left] @ positions[atom]
        left = left[_nearest_squares(images, positions[alike[atom]]) <= limit**2]
    return left


def _nearest_squares(points: Vectors, targets: Vectors) -> Vectors:
    """Return (k,): the square of the distance from each point (k, 3) to the nearest target (t, 3)."""
    nearest, squares = np.empty(len(points)), (targets**2).sum(axis=1)
    step = max(1, _BATCH // len(targets))
    for start in range(0, len(points), step):
        part = points[start : start + step]
        nearest[start : start + step] = (squares - 2 * part @ targets.T).min(axis=1) + (part**2).sum(axis=1)
    return nearest


def _assign(
    positions: Vectors,
    kinds: NDArray[np.int64],
    base: tuple[int, int],
    matrices: Matrices,
    signs: Vectors,
    limit: float,
) -> Candidates:
    """Turn matrices into one-to-one permutations: nearest atoms, best matrices for them, nearest atoms again."""
    rough = _nearest_atoms(positions, kinds, matrices)
    permutations = _nearest_atoms(positions, kinds, best_matrices(positions, rough, signs))
    whole = (np.sort(permutations, axis=1) == np.arange(len(positions))).all(axis=1)
    permutations, signs = permutations[whole], signs[whole]
    keys = operation_keys(permutations, signs, base)
    _, first = np.unique(keys, return_index=True)
    permutations, signs = permutations[first], signs[first]
    misfit = largest_misfit(positions, permutations, signs)
    good = misfit <= limit / np.sqrt(2)
    order = np.flatnonzero(good)[np.argsort(misfit[good], kind="stable")]
    return Candidates(permutations[order], signs[order], misfit[order], base)


def _nearest_atoms(positions: Vectors, kinds: NDArray[np.int64], matrices: Matrices) -> Permutations:
    """Return (k, n): for each matrix and atom the nearest atom of the same element to the atom's image."""
    count = len(positions)
    nearest = np.empty((len(matrices), count), dtype=np.int64)
    unlike = np.where(kinds[:, None] == kinds[None], 0.0, np.inf)
    squares = (positions**2).sum(axis=1)
    step = max(1, _BATCH // count**2)
    for start in range(0, len(matrices), step):
        images = positions @ np.swapaxes(matrices[start : start + step], 1, 2)
        nearest[start : start + step] = (squares - 2 * (images @ positions.T) + unlike).argmin(axis=2)
    return nearest


def largest_misfit(positions: Vectors, permutations: Permutations, signs: Vectors) -> Vectors:
    """Return (k,) Å: the largest distance of an image from its atom under the best matrices, over the root of two."""
    matrices = best_matrices(positions, permutations, signs)
    gaps = positions @ np.swapaxes(matrices, 1, 2) - positions[permutations]
    return np.asarray(np.sqrt((gaps**2).sum(axis=2).max(axis=1, initial=0.0) / 2))


def operation_keys(permutations: Permutations, signs: Vectors, base: tuple[int, int]) -> NDArray[np.int64]:
    """Return (k,) integers that tell operations apart: the images of the base and the sign of the determinant."""
    count = permutations.shape[1]
    return np.asarray((permutations[:, base[0]] * count + permutations[:, base[1]]) * 2 + (signs < 0), dtype=np.int64)
