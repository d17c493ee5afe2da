"""Molecules whose atoms lie on one line: C∞v and D∞h, held as a finite stand-in."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sitesym.molecule_symmetry.closure import matrix_group
from sitesym.molecule_symmetry.fit import Fit, measure
from sitesym.molecule_symmetry.required import RequiredGroup
from sitesym.molecule_symmetry.result import Matrices, Permutations, Vectors

FOLD = 6
"""The stand-in for the axis of infinite order; six keeps Σ, Π and Δ apart with their degeneracies."""


@dataclass(frozen=True, eq=False)
class LinearFit:
    """A linear group fitted to positions; axis is a unit vector (3,)."""

    name: str
    axis: Vectors
    fit: Fit


def linear_fits(kinds: NDArray[np.int64], positions: Vectors, required: RequiredGroup, reach: float) -> list[LinearFit]:
    """Return the linear groups that the order of the atoms allows, the larger one first; positions about the centre.

    There is none where an atom lies further than `reach` (Å) from the line, for that much it would have to move.
    """
    axis = line_of_best_fit(positions)
    if (np.cross(positions, axis) ** 2).sum(axis=1).max() > reach**2:
        return []
    places = np.argsort(positions @ axis, kind="stable")
    keeping, fits = np.arange(len(kinds)), []
    if (kinds[places] == kinds[places[::-1]]).all():
        reversing = np.empty_like(places)
        reversing[places] = places[::-1]
        fits.append(_fit("D∞h", axis, positions, required, keeping, reversing))
    if (np.abs(required.matrices @ axis - axis).max(axis=1) < 1e-6).all():
        fits.append(_fit("C∞v", axis, positions, required, keeping, keeping))
    return fits


def line_of_best_fit(positions: Vectors) -> Vectors:
    """Return the unit vector (3,) along which positions about the centre are most extended."""
    return np.asarray(np.linalg.svd(positions)[2][0])


def _fit(
    name: str,
    axis: Vectors,
    positions: Vectors,
    required: RequiredGroup,
    keeping: Permutations,
    reversing: Permutations,
) -> LinearFit:
    """Fit one linear group; `reversing` is the permutation by operations that turn the axis round."""
    matrices = stand_in(axis, required.matrices, with_inversion=name == "D∞h")
    kept = matrices @ axis @ axis > 0
    permutations = np.where(kept[:, None], keeping[None], reversing[None])
    return LinearFit(name, axis, measure(positions, matrices, permutations))


def stand_in(axis: Vectors, required: Matrices, *, with_inversion: bool) -> Matrices:
    """Return C6v or D6h about the axis, enlarged where the required operations (m, 3, 3) ask for it."""
    normal = _mirror_normal(axis, required)
    frame = np.array([normal, np.cross(axis, normal), axis]).T
    angle = 2 * np.pi / FOLD
    turn = np.eye(3)
    turn[:2, :2] = [[np.cos(angle), -np.sin(angle)], [np.sin(angle), np.cos(angle)]]
    generators = [frame @ turn @ frame.T, frame @ np.diag([-1.0, 1.0, 1.0]) @ frame.T]
    generators += [-np.eye(3)] if with_inversion else []
    return matrix_group([*generators, *required])


def _mirror_normal(axis: Vectors, required: Matrices) -> Vectors:
    """Return a unit vector across the axis: normal to a required mirror or twofold axis, else a convenient one."""
    across = np.eye(3) - np.outer(axis, axis)
    for matrix in required:
        if np.linalg.det(matrix) * (axis @ matrix @ axis) < 0:
            reversed_part = (np.eye(3) - matrix) @ across
            return _longest_column(reversed_part)
    return _longest_column(across)


def _longest_column(matrix: Matrices) -> Vectors:
    """Return the longest column of a matrix as a unit vector."""
    lengths = np.sqrt((matrix**2).sum(axis=0))
    longest = int(lengths.argmax())
    return np.asarray(matrix[:, longest] / lengths[longest])
