"""Internal coordinates of a molecule as vectors in the space of its atomic displacements.

Stretches, angle bends, out-of-plane bends and torsions from the graph of bonds, with the first-order displacement
vectors of Wilson (Wilson, Decius and Cross, Molecular Vibrations, 1955, section 4-1). Only the space that they span is
used, so their scale does not matter and redundancies take care of themselves.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import combinations

import numpy as np

from sitesym.groups.operation import Floats, Integers

Bonds = Sequence[tuple[int, int]]
_STRAIGHT = np.cos(np.radians(5.0))
"""An angle within 5° of 180° has two bending directions across it and carries no torsion."""
_PLANAR = 0.1
"""Three bonds lie in a plane when the volume spanned by their unit vectors is below this."""


def neighbours(count: int, bonds: Bonds) -> list[list[int]]:
    """For each of `count` atoms those bonded to it, in order."""
    found: list[set[int]] = [set() for _ in range(count)]
    for i, j in bonds:
        found[i].add(j)
        found[j].add(i)
    return [sorted(one) for one in found]


def stretches(positions: Floats, bonds: Bonds) -> Floats:
    """(bonds, 3n) displacement vectors of the bond lengths."""
    first, second = _columns(bonds, 2)
    along = _unit(positions[second] - positions[first])
    return _rows(positions, len(first), [(first, -along), (second, along)])


def bends(positions: Floats, near: list[list[int]]) -> Floats:
    """(m, 3n) displacement vectors of all angles between bonds; a straight angle gives two."""
    triples = [(i, apex, j) for apex, ends in enumerate(near) for i, j in combinations(ends, 2)]
    i, apex, j = _columns(triples, 3)
    straight = (_unit(positions[i] - positions[apex]) * _unit(positions[j] - positions[apex])).sum(axis=1) < -_STRAIGHT
    bent = ~straight
    return np.vstack([
        _bent(positions, i[bent], apex[bent], j[bent]),
        _straight(positions, i[straight], apex[straight], j[straight]),
    ])  # fmt: skip


def out_of_plane_bends(positions: Floats, near: list[list[int]]) -> Floats:
    """(m, 3n) displacements of an atom out of the plane of its three bonds, where these are planar."""
    found = [_out_of_plane(positions, apex, ends) for apex, ends in enumerate(near) if len(ends) == 3]
    return np.array([row for row in found if row is not None]).reshape(-1, positions.size)


def torsions(positions: Floats, bonds: Bonds, near: list[list[int]]) -> Floats:
    """(m, 3n) displacement vectors of the dihedral angles about every bond, added up for each bond.

    Single dihedral angles about one bond differ from their sum by bends only. Where an atom of the bond has all its
    bonds in one line, the dihedral angle spans the straight chain up to the next atom that bends away (allene).
    """
    axes = dict.fromkeys(_chain(positions, near, j, k) for j, k in bonds)
    ends = [(j, k, _off_axis(positions, near, j, k), _off_axis(positions, near, k, j)) for j, k in axes]
    turning = [one for one in ends if one[2] and one[3]]
    levers = [(row, i, j, k, -len(after)) for row, (j, k, before, after) in enumerate(turning) for i in before]
    levers += [(row, m, k, j, -len(before)) for row, (j, k, before, after) in enumerate(turning) for m in after]
    return _turned(positions, len(turning), levers)


def _columns(rows: Sequence[tuple[int, ...]], width: int) -> Integers:
    return np.array(rows, dtype=np.int64).reshape(-1, width).T


def _unit(vectors: Floats) -> Floats:
    return np.asarray(vectors / np.sqrt((vectors**2).sum(axis=-1, keepdims=True)))


def _lengths(vectors: Floats) -> Floats:
    return np.asarray(np.sqrt((vectors**2).sum(axis=-1, keepdims=True)))


def _rows(positions: Floats, count: int, parts: list[tuple[Integers, Floats]]) -> Floats:
    """One row for each coordinate: `parts` are atoms (count,) with their displacements (count, 3)."""
    rows = np.zeros((count, *positions.shape))
    for atoms, vectors in parts:
        np.add.at(rows, (np.arange(count), atoms), vectors)
    return rows.reshape(count, positions.size)


def _bent(positions: Floats, i: Integers, apex: Integers, j: Integers) -> Floats:
    """Wilson, Decius and Cross (1955), equations 4-1 (5) and (6)."""
    to_i, to_j = positions[i] - positions[apex], positions[j] - positions[apex]
    first, second = _unit(to_i), _unit(to_j)
    cosine = (first * second).sum(axis=1, keepdims=True)
    sine = np.sqrt(np.clip(1 - cosine**2, 1e-12, None))
    on_i = (cosine * first - second) / (sine * _lengths(to_i))
    on_j = (cosine * second - first) / (sine * _lengths(to_j))
    return _rows(positions, len(i), [(i, on_i), (j, on_j), (apex, -on_i - on_j)])


def _straight(positions: Floats, i: Integers, apex: Integers, j: Integers) -> Floats:
    """Two bends across each straight angle: one along a direction across the bonds, one across both."""
    to_i, to_j = positions[i] - positions[apex], positions[j] - positions[apex]
    line = _unit(to_i)
    helper = np.eye(3)[np.abs(line).argmin(axis=1)]
    across = _unit(np.cross(line, helper)) if len(line) else line
    rows = []
    for direction in (across, np.cross(line, across)):
        first, second = direction / _lengths(to_i), direction / _lengths(to_j)
        rows.append(_rows(positions, len(i), [(i, first), (j, second), (apex, -first - second)]))
    return np.vstack(rows)


def _out_of_plane(positions: Floats, apex: int, ends: list[int]) -> Floats | None:
    """The apex rises, the three ends sink by the weights that leave translation and rotation out."""
    arms = positions[ends] - positions[apex]
    units = _unit(arms)
    normal = _cross(units[1] - units[0], units[2] - units[0])
    size = float(np.sqrt(normal @ normal))
    if abs(units[0] @ _cross(units[1], units[2])) > _PLANAR or size < 1e-6:
        return None
    points = np.vstack([np.ones(3), arms.T])
    weights = np.linalg.lstsq(points, np.array([1.0, 0.0, 0.0, 0.0]), rcond=None)[0]
    row = np.zeros(positions.shape)
    row[apex] = -normal / size
    row[ends] += weights[:, None] * normal / size
    return row.ravel()


def _cross(u: Floats, v: Floats) -> Floats:
    """The cross product of two single vectors, without the overhead of arrays of them."""
    (a, b, c), (d, e, f) = u.tolist(), v.tolist()
    return np.array([b * f - c * e, c * d - a * f, a * e - b * d])


def _chain(positions: Floats, near: list[list[int]], j: int, k: int) -> tuple[int, int]:
    """The ends of the straight chain of bonds that holds the bond of j and k, the lower number first."""
    first, last = _end_of_chain(positions, near, k, j), _end_of_chain(positions, near, j, k)
    return min(first, last), max(first, last)


def _end_of_chain(positions: Floats, near: list[list[int]], start: int, end: int) -> int:
    for _ in near:
        onward = [atom for atom in near[end] if atom != start]
        if len(onward) != 1 or _off_axis(positions, near, end, start):
            break
        start, end = end, onward[0]
    return end


def _off_axis(positions: Floats, near: list[list[int]], apex: int, other: int) -> list[int]:
    """Neighbours of an atom that do not lie on the line of one of its bonds."""
    ends = [end for end in near[apex] if end != other]
    if not ends:
        return ends
    cosines = _unit(positions[ends] - positions[apex]) @ _unit(positions[other] - positions[apex])
    return [end for end, cosine in zip(ends, cosines, strict=True) if abs(cosine) <= _STRAIGHT]


def _turned(positions: Floats, count: int, levers: list[tuple[int, int, int, int, int]]) -> Floats:
    """Wilson, Decius and Cross (1955), equations 4-1 (21) to (24), added up over the atoms on both ends of a bond.

    levers  row, end, its neighbour in the bond, the other atom of the bond, and a signed weight.
    """
    row, end, apex, other, weight = _columns(levers, 5)
    axis, arm = positions[other] - positions[apex], positions[apex] - positions[end]
    normal = np.cross(arm, axis) if len(row) else arm
    size = _lengths(axis)
    pull = weight[:, None] * size * normal / (normal**2).sum(axis=1, keepdims=True)
    share = (arm * axis).sum(axis=1, keepdims=True) / size**2
    rows = np.zeros((count, *positions.shape))
    for atoms, vectors in ((end, pull), (apex, -(1 + share) * pull), (other, share * pull)):
        np.add.at(rows, (row, atoms), vectors)
    return rows.reshape(count, positions.size)
