"""Things on a line moved apart: as near to where they belong as their sizes let them."""

from __future__ import annotations

from collections.abc import Sequence


def spread(wanted: Sequence[float], sizes: Sequence[float], gap: float) -> list[float]:
    """Centres of things of these sizes, in the given order, at least `gap` apart.

    They have the least sum of squared distances from the wanted places: a monotone regression by pooling adjacent
    violators (Barlow, Bartholomew, Bremner and Brunk, Statistical Inference under Order Restrictions, 1972).
    """
    offsets = _stacked(sizes, gap)
    pools: list[tuple[float, int]] = []
    for place, offset in zip(wanted, offsets, strict=True):
        pools.append((place - offset, 1))
        while len(pools) > 1 and pools[-2][0] > pools[-1][0]:
            (low, few), (high, more) = pools.pop(), pools.pop()
            pools.append(((low * few + high * more) / (few + more), few + more))
    shifts = [value for value, members in pools for _ in range(members)]
    return [offset + shift for offset, shift in zip(offsets, shifts, strict=True)]


def _stacked(sizes: Sequence[float], gap: float) -> list[float]:
    """Centres of the things set one behind the other from 0."""
    centres, edge = [], 0.0
    for size in sizes:
        centres.append(edge + size / 2)
        edge += size + gap
    return centres


def stacked(sizes: Sequence[float], gap: float) -> tuple[list[float], float]:
    """The centres of things set one behind the other from 0, and the length that they take together."""
    return _stacked(sizes, gap), sum(sizes) + gap * max(len(sizes) - 1, 0)
