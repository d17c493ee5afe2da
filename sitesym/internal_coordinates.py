"""Internal coordinates of a molecule as vectors in the space of its atomic displacements.

Stretches, angle bends, out-of-plane bends and torsions from the graph of bonds, with the first-order displacement
vectors of Wilson (Wilson, Decius and Cross, Molecular Vibrations, 1955, section 4-1). Only the space that they span is
used, so their scale does not matter and redundancies take care of themselves.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import combinations

import numpy as np

from sitesym.groups.operation import Floats

Bonds = Sequence[tuple[int, int]]
_STRAIGHT = np.cos(np.radians(5.0))
"""An angle within 5° of 180° has two bending directions across it and carries no torsion."""
_PLANAR = 0.1
"""Three bonds lie in a plane when the volume spanned by their unit vectors is below this."""


def neighbours(count: int, bonds: Bonds) -> list[list[int]]:
    """For each of `count` atoms those bonded to it, in order."""
    found: list[list[int]] = [[] for _ in range(count)]
    for i, j in bonds:
        found[i].append(j)
        found[j].append(i)
    return [sorted(set(one)) for one in found]


def stretches(positions: Floats, bonds: Bonds) -> Floats:
    """(bonds, 3n) displacement vectors of the bond lengths."""
    return _rows(positions, ({i: -_unit(positions, i, j), j: _unit(positions, i, j)} for i, j in bonds))


def bends(positions: Floats, near: list[list[int]]) -> Floats:
    """(m, 3n) displacement vectors of all angles between bonds; a straight angle gives two."""
    return _rows(positions, _bend_rows(positions, near))


def out_of_plane_bends(positions: Floats, near: list[list[int]]) -> Floats:
    """(m, 3n) displacements of an atom out of the plane of its three bonds, where these are planar."""
    return _rows(positions, _out_of_plane_rows(positions, near))


def torsions(positions: Floats, bonds: Bonds, near: list[list[int]]) -> Floats:
    """(m, 3n) displacement vectors of the dihedral angles about every bond, added up for each bond."""
    return _rows(positions, _torsion_rows(positions, bonds, near))


Row = dict[int, Floats]


def _rows(positions: Floats, entries: Iterator[Row] | Sequence[Row]) -> Floats:
    rows = []
    for entry in entries:
        row = np.zeros(positions.shape)
        for atom, vector in entry.items():
            row[atom] += vector
        rows.append(row.ravel())
    return np.array(rows).reshape(-1, positions.size)


def _unit(positions: Floats, i: int, j: int) -> Floats:
    vector = positions[j] - positions[i]
    return np.asarray(vector / np.linalg.norm(vector))


def _length(positions: Floats, i: int, j: int) -> float:
    return float(np.linalg.norm(positions[j] - positions[i]))


def _bend_rows(positions: Floats, near: list[list[int]]) -> Iterator[Row]:
    for apex, ends in enumerate(near):
        for i, j in combinations(ends, 2):
            first, second = _unit(positions, apex, i), _unit(positions, apex, j)
            if first @ second < -_STRAIGHT:
                directions = _across(first)
                yield from (_straight_row(positions, i, apex, j, direction) for direction in directions)
            else:
                yield _bend_row(positions, i, apex, j)


def _across(direction: Floats) -> Floats:
    _, _, rows = np.linalg.svd(direction[None])
    return np.asarray(rows[1:])


def _straight_row(positions: Floats, i: int, apex: int, j: int, direction: Floats) -> Row:
    first, second = direction / _length(positions, apex, i), direction / _length(positions, apex, j)
    return {i: first, j: second, apex: -first - second}


def _bend_row(positions: Floats, i: int, apex: int, j: int) -> Row:
    first, second = _unit(positions, apex, i), _unit(positions, apex, j)
    cosine = float(first @ second)
    sine = np.sqrt(max(1 - cosine**2, 1e-12))
    on_i = (cosine * first - second) / (sine * _length(positions, apex, i))
    on_j = (cosine * second - first) / (sine * _length(positions, apex, j))
    return {i: on_i, j: on_j, apex: -on_i - on_j}


def _out_of_plane_rows(positions: Floats, near: list[list[int]]) -> Iterator[Row]:
    for apex, ends in enumerate(near):
        if len(ends) != 3:
            continue
        units = np.array([_unit(positions, apex, end) for end in ends])
        normal = np.cross(units[1] - units[0], units[2] - units[0])
        if abs(np.linalg.det(units)) > _PLANAR or np.linalg.norm(normal) < 1e-6:
            continue
        yield _out_of_plane_row(positions, apex, ends, normal / np.linalg.norm(normal))


def _out_of_plane_row(positions: Floats, apex: int, ends: list[int], normal: Floats) -> Row:
    """The apex rises, the three ends sink by the weights that leave translation and rotation out."""
    points = np.vstack([np.ones(3), (positions[ends] - positions[apex]).T])
    weights = np.linalg.lstsq(points, np.array([1.0, 0.0, 0.0, 0.0]), rcond=None)[0]
    return {apex: -normal} | {end: weight * normal for end, weight in zip(ends, weights, strict=True)}


def _torsion_rows(positions: Floats, bonds: Bonds, near: list[list[int]]) -> Iterator[Row]:
    """One for each bond: the sum of its dihedral angles, in which single ones differ by bends only."""
    for j, k in bonds:
        before = [i for i in near[j] if i != k and not _is_straight(positions, i, j, k)]
        after = [m for m in near[k] if m != j and not _is_straight(positions, m, k, j)]
        if before and after:
            yield _torsion_row(positions, before, j, k, after)


def _is_straight(positions: Floats, end: int, apex: int, other: int) -> bool:
    return bool(abs(_unit(positions, apex, end) @ _unit(positions, apex, other)) > _STRAIGHT)


def _torsion_row(positions: Floats, before: list[int], j: int, k: int, after: list[int]) -> Row:
    """Wilson, Decius and Cross (1955), equations 4-1 (21) to (24), added up over the atoms on both ends."""
    axis = positions[k] - positions[j]
    size = float(np.linalg.norm(axis))
    row = {j: np.zeros(3), k: np.zeros(3)}
    for i in before:
        first = positions[j] - positions[i]
        normal = np.cross(first, axis)
        pull = -len(after) * size * normal / (normal @ normal)
        _add(row, i, pull, j, k, float(first @ axis) / size**2)
    for m in after:
        last = positions[m] - positions[k]
        normal = np.cross(axis, last)
        pull = len(before) * size * normal / (normal @ normal)
        _add(row, m, pull, k, j, float(last @ axis) / size**2)
    return row


def _add(row: Row, end: int, pull: Floats, apex: int, other: int, share: float) -> None:
    """A force on an end atom, balanced on the two atoms of the bond."""
    row[end] = row.get(end, np.zeros(3)) + pull
    row[apex] = row[apex] - (1 + share) * pull
    row[other] = row[other] + share * pull
