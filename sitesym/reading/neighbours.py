"""Pairs of points of a crystal that lie near each other, lattice translations included."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import product

import numpy as np

from sitesym.reading.listing import heights
from sitesym.structure import Floats, Integers

_BATCH = 50_000
"""Points times box offsets that are looked up in one go."""


@dataclass(frozen=True, eq=False, slots=True)
class Pairs:
    """p pairs, each once: `first` and `second` (p,) indices with first <= second, `distances` (p,) in Å."""

    first: Integers
    second: Integers
    distances: Floats


def near_pairs(lattice: Floats, fractional: Floats, cutoff: float) -> Pairs:
    """All pairs of the (n, 3) points closer than `cutoff` Å, a point and its own translated copies included.

    The cell is divided into boxes no thinner than the cut-off, so the time grows with the number of points only.
    """
    points = fractional - np.floor(fractional)
    thickness = heights(lattice)
    boxes = _division(thickness, cutoff, len(points))
    box = np.minimum((points * boxes).astype(np.int64), boxes - 1)
    reach = np.ceil(cutoff * boxes / thickness - 1e-9).astype(int)
    offsets = [offset for offset in product(*(range(-r, r + 1) for r in reach)) if offset >= (0, 0, 0)]
    step = max(1, _BATCH // max(len(points), 1))
    batches = [np.array(offsets[start : start + step]) for start in range(0, len(offsets), step)]
    keys = _key(box, boxes)
    order = np.argsort(keys, kind="stable")
    found = [_pairs_at(batch, lattice, points, box, boxes, keys[order], order, cutoff) for batch in batches]
    first, second, distances = (np.concatenate(columns) for columns in zip(*found, strict=True))
    return Pairs(np.minimum(first, second), np.maximum(first, second), distances)


def _division(thickness: Floats, cutoff: float, points: int) -> Integers:
    """Boxes along a, b, c: as thin as the cut-off allows, but not many more boxes than points."""
    edge = max(cutoff, float((np.prod(thickness) / max(points, 1)) ** (1 / 3)))
    return np.maximum((thickness / edge).astype(np.int64), 1)


def _key(box: Integers, boxes: Integers) -> Integers:
    return np.asarray((box[..., 0] * boxes[1] + box[..., 1]) * boxes[2] + box[..., 2], dtype=np.int64)


def _pairs_at(
    offsets: Integers,
    lattice: Floats,
    points: Floats,
    box: Integers,
    boxes: Integers,
    sorted_keys: Integers,
    order: Integers,
    cutoff: float,
) -> tuple[Integers, Integers, Floats]:
    """Pairs whose second point lies one of the (k, 3) offsets, in boxes, away from the first."""
    target = (box[None] + offsets[:, None]).reshape(-1, 3)
    shift = np.floor_divide(target, boxes)
    wanted = _key(target - shift * boxes, boxes)
    start = np.searchsorted(sorted_keys, wanted, side="left")
    count = np.searchsorted(sorted_keys, wanted, side="right") - start
    source = np.repeat(np.arange(len(target)), count)
    within = np.arange(len(source)) - np.repeat(np.cumsum(count) - count, count)
    first, second = source % len(points), order[np.repeat(start, count) + within]
    difference = points[second] + shift[source] - points[first]
    distances = np.linalg.norm(difference @ lattice, axis=1)
    abroad = np.repeat(np.abs(offsets).sum(axis=1) > 0, len(points))[source]
    keep = (distances < cutoff) & (abroad | (first < second))
    return first[keep], second[keep], distances[keep]
