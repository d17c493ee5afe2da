"""The order of things in three columns, so that as few as possible of the lines between them cross."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import combinations, permutations

Pairs = Sequence[tuple[int, int]]
Orders = tuple[list[int], list[int], list[int]]

_ALL_ORDERS, _SWEEPS = 5, 6


def fewest_crossings(sizes: tuple[int, int, int], left: Pairs, right: Pairs) -> Orders:
    """The order in which to set the members of the three columns, from the top.

    sizes  how many members each column has; left and right the lines between the first and the second, and between
           the second and the third, as pairs of members.

    Each order of the middle column is tried, or where there are too many those that sweeps to and fro lead to; the
    outer columns follow by their barycentres (Sugiyama, Tagawa and Toda, IEEE Trans. Syst. Man Cybern. 11, 109, 1981),
    then neighbours are exchanged. The given order is kept as long as no other has fewer crossings.
    """
    best: Orders = (list(range(sizes[0])), list(range(sizes[1])), list(range(sizes[2])))
    least = count_crossings(best, left, right)
    for middle in _middles(best, left, right):
        if not least:
            break
        order = _around(list(middle), sizes, left, right)
        crossings = count_crossings(order, left, right)
        if crossings < least:
            best, least = order, crossings
    return _exchanged(best, left, right)


def _middles(given: Orders, left: Pairs, right: Pairs) -> Iterator[Sequence[int]]:
    """Orders of the middle column to be tried."""
    if len(given[1]) <= _ALL_ORDERS:
        yield from permutations(given[1])
        return
    first, middle, third = given
    for _ in range(_SWEEPS):
        middle = _by_barycentre(middle, first, [(j, i) for i, j in left])
        yield middle
        third = _by_barycentre(third, middle, [(j, i) for i, j in right])
        middle = _by_barycentre(middle, third, right)
        yield middle
        first = _by_barycentre(first, middle, left)


def _around(middle: list[int], sizes: tuple[int, int, int], left: Pairs, right: Pairs) -> Orders:
    first = _by_barycentre(list(range(sizes[0])), middle, left)
    third = _by_barycentre(list(range(sizes[2])), middle, [(j, i) for i, j in right])
    return first, middle, third


def count_crossings(orders: Orders, left: Pairs, right: Pairs) -> int:
    """How many pairs of straight lines cross."""
    first, second, third = (_places(order) for order in orders)
    return _crossings(first, second, left) + _crossings(second, third, right)


def _crossings(first: dict[int, int], second: dict[int, int], pairs: Pairs) -> int:
    ends = [(first[i], second[j]) for i, j in pairs]
    return sum((a - c) * (b - d) < 0 for (a, b), (c, d) in combinations(ends, 2))


def _places(order: Sequence[int]) -> dict[int, int]:
    return {member: place for place, member in enumerate(order)}


def _by_barycentre(moving: list[int], fixed: list[int], pairs: Pairs) -> list[int]:
    """The moving members in the order of the mean places of those they are tied to; ties keep their order."""
    places = _places(fixed)
    means: dict[int, float] = {}
    for rank, member in enumerate(moving):
        tied = [places[other] for one, other in pairs if one == member]
        means[member] = sum(tied) / len(tied) if tied else float(rank)
    return sorted(moving, key=lambda member: means[member])


def _exchanged(orders: Orders, left: Pairs, right: Pairs) -> Orders:
    """Neighbours exchanged as long as that removes crossings."""
    least = count_crossings(orders, left, right)
    improved = True
    while improved:
        improved = False
        for column in orders:
            for place in range(len(column) - 1):
                column[place : place + 2] = column[place : place + 2][::-1]
                crossings = count_crossings(orders, left, right)
                if crossings < least:
                    least, improved = crossings, True
                else:
                    column[place : place + 2] = column[place : place + 2][::-1]
    return orders
