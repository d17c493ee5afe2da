"""Harmonics of degree two and three, and how the icosahedral group divides the latter into T2 and G.

The canonical group has twofold axes along x', y', z' and a fivefold one along (0, 1, golden ratio).
"""

from __future__ import annotations

from functools import lru_cache
from itertools import product

import numpy as np

from sitesym.groups.operation import Floats, closure

_GOLDEN = (1 + np.sqrt(5)) / 2


def on_quadratic(rotations: Floats) -> Floats:
    """Action on the five traceless symmetric tensors of second rank, shape (n, 5, 5)."""
    basis = _traceless(2)
    return np.asarray(basis @ _kronecker(rotations, 2) @ basis.T)


def on_cubic(rotations: Floats) -> Floats:
    """Action on the seven traceless symmetric tensors of third rank, shape (n, 7, 7)."""
    basis = _traceless(3)
    return np.asarray(basis @ _kronecker(rotations, 3) @ basis.T)


@lru_cache(maxsize=1)
def cubic_harmonics() -> tuple[Floats, Floats]:
    """Orthonormal bases of T2 (3, 7) and G (4, 7) in the space of `on_cubic`."""
    group = canonical_group()
    traces = np.trace(group, axis1=1, axis2=2)
    fifth, two_fifths = np.isclose(traces, _GOLDEN), np.isclose(traces, 1 - _GOLDEN)
    conjugate = np.select([fifth, two_fifths], [1 - _GOLDEN, _GOLDEN], traces)
    projector = 3 / 60 * np.einsum("g,gij->ij", conjugate, on_cubic(group))
    values, vectors = np.linalg.eigh(projector)
    return vectors[:, values > 0.5].T, vectors[:, values < 0.5].T


@lru_cache(maxsize=1)
def canonical_group() -> Floats:
    """The 60 rotations, shape (60, 3, 3)."""
    five = _rotation(np.array([0, 1, _GOLDEN]), 2 * np.pi / 5)
    return closure(np.array([five, np.diag([-1.0, -1.0, 1.0]), np.diag([1.0, -1.0, -1.0])]))


def _rotation(direction: Floats, angle: float) -> Floats:
    x, y, z = direction / np.linalg.norm(direction)
    cross = np.array([[0, -z, y], [z, 0, -x], [-y, x, 0]])
    return np.asarray(np.eye(3) + np.sin(angle) * cross + (1 - np.cos(angle)) * cross @ cross)


def _kronecker(rotations: Floats, rank: int) -> Floats:
    result = rotations
    for _ in range(rank - 1):
        size = result.shape[1] * 3
        result = np.einsum("gij,gkl->gikjl", result, rotations).reshape(-1, size, size)
    return result


@lru_cache(maxsize=2)
def _traceless(rank: int) -> Floats:
    """Orthonormal rows that span the symmetric tensors of this rank whose every trace is zero."""
    size = 3**rank
    indices = list(product(range(3), repeat=rank))
    conditions = []
    for index in indices:
        row = np.zeros(size)
        row[indices.index(index)] += 1
        row[indices.index(tuple(sorted(index)))] -= 1
        conditions.append(row)
    for rest in product(range(3), repeat=rank - 2):
        row = np.zeros(size)
        for k in range(3):
            row[indices.index((k, k, *rest))] = 1
        conditions.append(row)
    _, singular, rows = np.linalg.svd(np.array(conditions))
    return rows[int((singular > 1e-9).sum()) :]
