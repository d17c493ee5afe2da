"""Fit a group of atom permutations to measured positions, and say how large a scatter would explain what is left.

Positions in this module are relative to the centre. Each operation is given by a permutation p (atom i goes to atom
p[i]) and a sign (+1 proper, -1 improper); the matrix is the best orthogonal one of that sign (W. Kabsch, Acta Cryst.
A32 (1976) 922 and A34 (1978) 827).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.molecule_symmetry.result import Matrices, Permutations, Vectors

TOLERANCE_IN_SIGMA = 5.0
"""A tolerance of 0.25 Å speaks of a scatter of 0.05 Å in each coordinate; a free atom passes 5 sigma once in 65 000."""

NORMAL_QUANTILE = 3.5
"""The whole molecule's sum of squares may lie this many standard deviations (of a normal law) above its mean."""

SMALLEST_SHARE = 0.1
"""Floor for the share of an atom's scatter that symmetrising leaves, so that effects of second order do not count."""

_CONVERGED = 1e-13
_MOST_ROUNDS = 30


@dataclass(frozen=True, eq=False)
class Fit:
    """A group fitted to positions: the arrays of the group, the idealised shape and its distance from the measured one.

    permutations (m, n), matrices (m, 3, 3), idealised (n, 3) Å relative to the centre; the rest in Å.
    """

    permutations: Permutations
    matrices: Matrices
    idealised: Vectors
    deviation: float
    rms: float
    needed_tolerance: float


def best_matrices(positions: Vectors, permutations: Permutations, signs: Vectors) -> Matrices:
    """Return the (m, 3, 3) orthogonal matrices of the given determinants that take atom i nearest to atom p[i]."""
    left, _, right = np.linalg.svd(np.swapaxes(positions[permutations], 1, 2) @ positions)
    left[:, :, 2] *= (signs * np.sign(np.linalg.det(left @ right)))[:, None]
    return np.asarray(left @ right)


def averaged(positions: Vectors, matrices: Matrices, permutations: Permutations) -> Vectors:
    """Return the positions (n, 3) averaged over the group: each atom over the images that fall on it."""
    return np.asarray((positions[permutations] @ matrices).mean(axis=0))


def fit_group(positions: Vectors, permutations: Permutations, signs: Vectors) -> Fit:
    """Fit matrices and idealised positions to a closed set of permutations (positions are not all on one line).

    Averaging over nearly exact matrices gives a nearly exact shape, whose best matrices are exact to second order;
    repeated until nothing changes. The shape is then turned as a whole onto the measured positions.
    """
    matrices = best_matrices(positions, permutations, signs)
    shape = averaged(positions, matrices, permutations)
    for _ in range(_MOST_ROUNDS):
        before, matrices = matrices, best_matrices(shape, permutations, signs)
        if np.abs(matrices - before).max() < _CONVERGED:
            break
        shape = averaged(shape, matrices, permutations)
    turn = _best_turn(shape, positions)
    return measure(positions, turn @ matrices @ turn.T, permutations)


def _best_turn(shape: Vectors, positions: Vectors) -> Matrices:
    """Return the proper rotation (3, 3) that brings a shape (n, 3) nearest to the positions (n, 3)."""
    left, _, right = np.linalg.svd(positions.T @ shape)
    left[:, 2] *= np.sign(np.linalg.det(left @ right))
    return np.asarray(left @ right)


def measure(positions: Vectors, matrices: Matrices, permutations: Permutations) -> Fit:
    """Average the positions over an exact group and measure what is left."""
    shape = averaged(positions, matrices, permutations)
    rest = positions - shape
    distances = np.sqrt((rest**2).sum(axis=1))
    needed = needed_tolerance(rest, remaining_shares(shape, matrices, permutations))
    return Fit(permutations, matrices, shape, float(distances.max()), float(np.sqrt((distances**2).mean())), needed)


def needed_tolerance(rest: Vectors, shares: Matrices) -> float:
    """Return the least tolerance (Å) at which the displacements `rest` (n, 3) are put down to scatter.

    Let every coordinate scatter by sigma = tolerance / 5. Symmetrising absorbs a part of it; `shares` (n, 3, 3) is the
    covariance of what is left at each atom, in units of sigma squared. Two rules must hold:
    each atom: r^T shares^-1 r <= tolerance^2, so that an atom whose scatter is not absorbed at all moves by the
    tolerance at most, and one of an equivalent pair by 0.71 of it;
    the molecule: the sum of r^2 / sigma^2 is below the upper limit of chi square for the degrees of freedom left
    (Wilson and Hilferty, Proc. Natl. Acad. Sci. 17 (1931) 684), so that a small but concerted distortion of many atoms
    is not put down to scatter. Both scale with the tolerance, so the least one that passes is a number.
    """
    freedom = float(np.trace(shares, axis1=1, axis2=2).sum())
    if freedom < 0.5:
        return float(np.sqrt((rest**2).sum(axis=1)).max())
    floored = shares + SMALLEST_SHARE * (np.eye(3) - shares)
    scaled = np.linalg.solve(floored, rest[:, :, None])[:, :, 0]
    single = np.sqrt((scaled * rest).sum(axis=1).max())
    whole = TOLERANCE_IN_SIGMA * np.sqrt((rest**2).sum() / chi_square_limit(freedom))
    return float(max(single, whole))


def chi_square_limit(freedom: float) -> float:
    """Return the upper limit of chi square for the degrees of freedom (Wilson and Hilferty 1931)."""
    part = 2 / (9 * freedom)
    return float(freedom * (1 - part + NORMAL_QUANTILE * np.sqrt(part)) ** 3)


def remaining_shares(shape: Vectors, matrices: Matrices, permutations: Permutations) -> Matrices:
    """Return (n, 3, 3): the covariance of each atom's displacement after symmetrising, for unit scatter before it.

    Absorbed are the totally symmetric displacements, the translations and the rotations of the whole molecule. The
    projector on the first, at one atom, is the sum of the matrices that keep the atom over the order of the group.
    Of translations and rotations only the part that is not totally symmetric is still to be taken off.
    """
    count, order = len(shape), len(matrices)
    keeps = (permutations == np.arange(count)).astype(float)
    symmetric = (keeps.T @ matrices.reshape(order, 9)).reshape(count, 3, 3) / order
    moves = np.eye(3) - matrices.mean(axis=0)
    turns = np.eye(3) - (np.linalg.det(matrices)[:, None, None] * matrices).mean(axis=0)
    rotation = _cross_matrices(shape) @ turns
    inverse = np.linalg.pinv((np.swapaxes(rotation, 1, 2) @ rotation).sum(axis=0), rcond=1e-6, hermitian=True)
    return np.asarray(np.eye(3) - symmetric - moves / count - rotation @ inverse @ np.swapaxes(rotation, 1, 2))


def _cross_matrices(vectors: Vectors) -> Matrices:
    """Return (n, 3, 3) matrices M with M e = e x v (the displacement of v by a small rotation e)."""
    x, y, z = vectors.T
    zero = np.zeros_like(x)
    return np.array([[zero, z, -y], [-z, zero, x], [y, -x, zero]]).transpose(2, 0, 1)
