"""The graph of a periodic net: its connected parts, and the lattice translations along its closed paths."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from sitesym.structure import Integers


@dataclass(frozen=True, eq=False, slots=True)
class Parts:
    """The connected parts of a graph of n atoms.

    part        (n,) number of the part of each atom; parts are numbered in the order of their first atoms.
    shift       (n, 3) lattice translations that put each part together along its bonds, zero for its first atom.
    dimension   (parts,) rank of the translations along closed paths: 0 a finite group, 1 a chain, 2 a layer, 3 a
                three-dimensional net.
    """

    part: Integers
    shift: Integers
    dimension: Integers


def connected_parts(n: int, first: Integers, second: Integers, shift: Integers) -> Parts:
    """The parts of the graph whose m edges join `first` in cell 0 to `second` in the cell `shift` (m, 3).

    An edge that closes a path adds up to a lattice translation; the rank of these over a part is its dimension
    (Chung, Hahn and Klee 1984, Acta Cryst. A40, 42: the quotient graph of a net).
    """
    part, places = _walk(n, first, second, shift)
    place = np.array(places, dtype=np.int64).reshape(n, 3)
    numbers = np.array(part, dtype=np.int64)
    closing = place[first] + shift - place[second]
    return Parts(numbers, place, _ranks(numbers, first, closing))


def _walk(n: int, first: Integers, second: Integers, shift: Integers) -> tuple[list[int], list[tuple[int, int, int]]]:
    """Follow the edges from each atom not yet met: number of its part and its translation."""
    neighbours: list[list[tuple[int, int, int, int]]] = [[] for _ in range(n)]
    for i, j, (a, b, c) in zip(first.tolist(), second.tolist(), shift.tolist(), strict=True):
        neighbours[i].append((j, a, b, c))
        neighbours[j].append((i, -a, -b, -c))
    part = [-1] * n
    place = [(0, 0, 0)] * n
    parts = 0
    for root in range(n):
        if part[root] >= 0:
            continue
        part[root] = parts
        waiting = [root]
        for atom in waiting:
            x, y, z = place[atom]
            for other, a, b, c in neighbours[atom]:
                if part[other] < 0:
                    part[other] = parts
                    place[other] = (x + a, y + b, z + c)
                    waiting.append(other)
        parts += 1
    return part, place


def _ranks(part: Integers, first: Integers, closing: Integers) -> Integers:
    """Rank of the closing translations of each part."""
    dimension = np.zeros(int(part.max(initial=-1)) + 1, dtype=np.int64)
    open_ = closing.any(axis=1)
    if not open_.any():
        return dimension
    rows = np.unique(np.column_stack([part[first[open_]], closing[open_]]), axis=0)
    for number in np.unique(rows[:, 0]):
        dimension[number] = rank(rows[rows[:, 0] == number, 1:].tolist())
    return dimension


def rank(vectors: Sequence[Sequence[int]]) -> int:
    """Rank of integer vectors of length three, exactly."""
    basis: list[Sequence[int]] = []
    for vector in vectors:
        if not basis:
            independent = any(vector)
        elif len(basis) == 1:
            independent = any(_cross(basis[0], vector))
        else:
            independent = sum(x * y for x, y in zip(_cross(basis[0], basis[1]), vector, strict=True)) != 0
        if independent:
            basis.append(vector)
        if len(basis) == 3:
            break
    return len(basis)


def _cross(u: Sequence[int], v: Sequence[int]) -> tuple[int, int, int]:
    return (u[1] * v[2] - u[2] * v[1], u[2] * v[0] - u[0] * v[2], u[0] * v[1] - u[1] * v[0])


def labels_of_parts(n: int, first: Integers, second: Integers) -> Integers:
    """(n,) smallest atom index of each atom's connected part, lattice translations put aside.

    Each round passes the smallest label over every edge and then halves the chains of labels.
    """
    label = np.arange(n)
    while True:
        new = label.copy()
        np.minimum.at(new, first, label[second])
        np.minimum.at(new, second, label[first])
        np.minimum.at(new, label, new)
        new = new[new]
        if np.array_equal(new, label):
            return label
        label = new
