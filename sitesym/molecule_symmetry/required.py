"""Operations that the molecule must have because the crystal has them: the site group."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sitesym.errors import InconsistencyError, UsageError
from sitesym.molecule_symmetry.closure import matrix_group
from sitesym.molecule_symmetry.fit import averaged
from sitesym.molecule_symmetry.result import Matrices, Permutations, Vectors

ORTHOGONAL = 1e-6


@dataclass(frozen=True, eq=False)
class RequiredGroup:
    """The closed group of required operations: matrices (m, 3, 3), permutations (m, n) and signs (m,)."""

    matrices: Matrices
    permutations: Permutations
    signs: Vectors

    def symmetrised(self, positions: Vectors) -> Vectors:
        """Return the positions (n, 3) averaged over the required operations."""
        return averaged(positions, self.matrices, self.permutations)


def required_group(
    required: Sequence[NDArray[np.float64]] | None, kinds: NDArray[np.int64], positions: Vectors, tolerance: float
) -> RequiredGroup:
    """Close the required matrices to a group and find the permutations of the atoms (positions about the centre).

    Raises UsageError where a matrix is not orthogonal, InconsistencyError where the atoms do not have the operations.
    """
    matrices = matrix_group([_orthogonal(matrix) for matrix in required or []])
    permutations = np.array([_permutation(matrix, kinds, positions, tolerance) for matrix in matrices])
    return RequiredGroup(matrices, permutations, np.sign(np.linalg.det(matrices)))


def _orthogonal(matrix: NDArray[np.float64]) -> Matrices:
    """Check one required matrix."""
    values = np.asarray(matrix, dtype=float)
    if values.shape != (3, 3) or not np.abs(values @ values.T - np.eye(3)).max() < ORTHOGONAL:
        raise UsageError(
            f"A required operation is not an orthogonal 3 x 3 matrix: {values.tolist()}.",
            "Give Cartesian matrices, not those of the oblique cell.",
        )
    return values


def _permutation(matrix: Matrices, kinds: NDArray[np.int64], positions: Vectors, tolerance: float) -> NDArray[np.int64]:
    """Return the permutation (n,) of the atoms by one required operation."""
    gaps = ((positions @ matrix.T)[:, None] - positions[None]) ** 2
    distances = np.where(kinds[:, None] == kinds[None], np.sqrt(gaps.sum(axis=2)), np.inf)
    permutation = distances.argmin(axis=1)
    worst = float(distances.min(axis=1).max())
    if len(set(permutation.tolist())) < len(kinds) or worst > 2 * tolerance:
        raise InconsistencyError(
            f"A required operation does not map the molecule onto itself (an atom misses its image by {worst:.3f} Å): "
            f"{np.round(matrix, 4).tolist()}.",
            "Check that the unit is whole, that its centre lies on the site, and that the site group belongs to it.",
        )
    return np.asarray(permutation, dtype=np.int64)
