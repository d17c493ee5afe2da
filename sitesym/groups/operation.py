"""Geometry of single point operations: orthogonal 3x3 matrices acting on Cartesian column vectors.

All functions take stacks of shape (..., 3, 3) and know nothing of groups, crystals or files.
"""

from __future__ import annotations

from math import gcd

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]
Booleans = npt.NDArray[np.bool_]

SAME = 1e-4
"""Two orthogonal matrices whose elements differ by less than this are one operation.

Groups are made exact (1e-9) before they reach this package; the largest order treated, n = 60, turns by 6°, which
changes an element by 5e-3 at the least.
"""


def determinants(matrices: Floats) -> Integers:
    """+1 for proper, -1 for improper operations, shape (...,)."""
    return np.asarray(np.rint(np.linalg.det(matrices)), dtype=np.int64)


def proper_parts(matrices: Floats) -> Floats:
    """The rotation Q in R = Q or R = -Q (rotation times inversion)."""
    return matrices * determinants(matrices)[..., None, None]


def angles(rotations: Floats) -> Floats:
    """Rotation angles in radians, 0 to π, of proper rotations."""
    traces = np.trace(rotations, axis1=-2, axis2=-1)
    return np.asarray(np.arccos(np.clip((traces - 1) / 2, -1, 1)))


def axis(rotation: Floats) -> Floats:
    """Unit axis of one proper rotation other than the identity; its last component that is not zero is positive."""
    symmetric = rotation + rotation.T - (np.trace(rotation) - 1) * np.eye(3)
    column = symmetric[:, np.argmax(np.diag(symmetric))]
    return upward(column / np.linalg.norm(column))


def upward(vector: Floats) -> Floats:
    """The one of ±vector whose first component, counted from the last, that is not zero is positive."""
    leading = next(value for value in vector[::-1] if abs(value) > 1e-6)
    return np.asarray(vector * np.sign(leading) + 0.0)


def order_of_angle(angle: float) -> tuple[int, int]:
    """(n, k) with angle = 2π k/n in lowest terms, n up to 60; (1, 0) for no rotation.

    Raises ValueError for an angle that is no such fraction of a turn.
    """
    for n in range(1, 61):
        k = angle * n / (2 * np.pi)
        if abs(k - round(k)) < 1e-4 * n and gcd(round(k), n) == 1:
            return n, round(k)
    raise ValueError(f"An angle of {np.degrees(angle):.4f} degrees belongs to no rotation of order 60 or less.")


def index_of(matrices: Floats, group: Floats) -> Integers:
    """For each of `matrices` (m, 3, 3) its index in `group` (n, 3, 3); -1 where it is not among them."""
    flat, known = matrices.reshape(-1, 9), group.reshape(-1, 9)
    found = _by_projection(flat, known)
    missing = np.flatnonzero(found < 0)
    if len(missing):
        distance = np.abs(flat[missing, None] - known[None]).max(axis=2)
        found[missing] = np.where((distance < SAME).any(axis=1), (distance < SAME).argmax(axis=1), -1)
    return found


_PROJECTION = np.sqrt([2.0, 3.0, 5.0, 7.0, 11.0, 13.0, 17.0, 19.0, 23.0])


def _by_projection(flat: Floats, known: Floats) -> Integers:
    """A quick first look: the element nearest on one generic line, taken only if it is the same matrix."""
    values = known @ _PROJECTION
    order = np.argsort(values, kind="stable")
    place = np.searchsorted(values[order], flat @ _PROJECTION - SAME)
    found = np.full(len(flat), -1, dtype=np.int64)
    for step in range(3):
        candidate = order[np.minimum(place + step, len(known) - 1)]
        same = (found < 0) & (np.abs(flat - known[candidate]).max(axis=1) < SAME)
        found[same] = candidate[same]
    return found


def closure(generators: Floats, limit: int = 240) -> Floats:
    """The group that `generators` (m, 3, 3) generate, identity first.

    Raises ValueError when it has more than `limit` elements (generators that do not belong to one finite group).
    """
    elements = np.eye(3)[None]
    fresh = elements
    while len(fresh):
        products = (fresh[:, None] @ generators[None]).reshape(-1, 3, 3)
        fresh = _distinct(products[index_of(products, elements) < 0])
        elements = np.concatenate([elements, fresh])
        if len(elements) > limit:
            raise ValueError(f"The generators give more than {limit} operations: they belong to no finite group.")
    return elements


def _distinct(matrices: Floats) -> Floats:
    if not len(matrices):
        return matrices
    first = index_of(matrices, matrices)
    return matrices[np.unique(first)]
