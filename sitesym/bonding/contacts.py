"""Pairs of atoms near enough to be considered, lattice translations included."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import product

import numpy as np
import numpy.typing as npt

from sitesym.structure import Floats, Integers

Booleans = npt.NDArray[np.bool_]


@dataclass(frozen=True, eq=False, slots=True)
class Contacts:
    """m pairs of atoms, each once.

    first, second  (m,) indices: atom `second` in the cell `shift` is near atom `first` in the cell 0 0 0, where both
                   sit at the coordinates that were given, inside the unit cell or not.
    shift          (m, 3) lattice translations, integers.
    distance       (m,) in Å.
    """

    first: Integers
    second: Integers
    shift: Integers
    distance: Floats

    def __len__(self) -> int:
        return len(self.first)

    def where(self, keep: Booleans) -> Contacts:
        """Those that the (m,) mask keeps."""
        return Contacts(self.first[keep], self.second[keep], self.shift[keep], self.distance[keep])

    def partner(self, atoms: Booleans) -> Booleans:
        """(m,) whether one of the two, or both, is among the atoms of an (n,) mask."""
        return np.asarray(atoms[self.first] | atoms[self.second])


def find_contacts(lattice: Floats, fractional: Floats, kind: Integers, reach: Floats) -> Contacts:
    """All pairs nearer than the reach of their kinds.

    `lattice` (3, 3) rows in Å, `fractional` (n, 3), `kind` (n,) integers below k, `reach` (k, k) in Å, symmetric. The
    points and their images within reach of the cell are sorted into boxes as wide as the largest reach, and each atom
    is compared with the 27 boxes about it: the time grows with the number of atoms only.
    """
    farthest = float(reach.max(initial=0.0))
    if farthest <= 0:
        return _none()
    cell = np.floor(fractional).astype(np.int64)
    margin = farthest * np.linalg.norm(np.linalg.inv(lattice), axis=0) * (1 + 1e-9)
    atoms, images, points = _images(fractional - cell, margin)
    one, other = _box_pairs(points, np.flatnonzero(~images.any(axis=1)), margin)
    centre = atoms[one]
    keep = (centre < atoms[other]) | ((centre == atoms[other]) & _forward(images[other]))
    one, other = one[keep], other[keep]
    distance = np.linalg.norm((points[other] - points[one]) @ lattice, axis=1)
    near = distance < reach[kind[atoms[one]], kind[atoms[other]]]
    first, second = atoms[one[near]], atoms[other[near]]
    order = np.lexsort((distance[near], second, first))
    shift = images[other[near]] + cell[first] - cell[second]
    return Contacts(first[order], second[order], shift[order], distance[near][order])


def _none() -> Contacts:
    nothing = np.zeros(0, dtype=np.int64)
    return Contacts(nothing, nothing, np.zeros((0, 3), dtype=np.int64), np.zeros(0))


def _images(points: Floats, margin: Floats) -> tuple[Integers, Integers, Floats]:
    """The points of the cell and their translated copies up to `margin` (in cell edges) outside it."""
    atoms = np.arange(len(points))
    images = np.zeros((len(points), 3), dtype=np.int64)
    for axis in range(3):
        steps = range(-int(np.ceil(margin[axis])), int(np.ceil(margin[axis])) + 1)
        value = points[:, axis]
        kept = [np.flatnonzero((value + s >= -margin[axis]) & (value + s < 1 + margin[axis])) for s in steps]
        chosen = np.concatenate(kept)
        step = np.repeat(np.array(steps), [len(part) for part in kept])
        atoms, images, points = atoms[chosen], images[chosen], points[chosen]
        images[:, axis] = step
        points[:, axis] += step
    return atoms, images, points


def _box_pairs(points: Floats, centres: Integers, width: Floats) -> tuple[Integers, Integers]:
    """Index pairs (centre, any point) of neighbouring boxes, a point with itself included."""
    box = ((points + width) / width).astype(np.int64) + 1
    count = box.max(axis=0) + 2
    key = (box[:, 0] * count[1] + box[:, 1]) * count[2] + box[:, 2]
    order = np.argsort(key, kind="stable")
    steps = np.array([(dx * count[1] + dy) * count[2] for dx, dy in product((-1, 0, 1), repeat=2)])
    wanted = (key[centres] + steps[:, None]).ravel()
    start = np.searchsorted(key[order], wanted - 1, side="left")
    found = np.searchsorted(key[order], wanted + 1, side="right") - start
    owner = np.repeat(np.tile(centres, len(steps)), found)
    return owner, order[ranges(start, found)]


def ranges(start: Integers, count: Integers) -> Integers:
    """The integers start, start + 1, ... of each of k ranges, one after another: (sum of `count`,)."""
    within = np.arange(int(count.sum())) - np.repeat(np.cumsum(count) - count, count)
    return np.asarray(np.repeat(start, count) + within, dtype=np.int64)


def _forward(shift: Integers) -> Booleans:
    """Whether the first non-zero of each of the (m, 3) translations is positive."""
    a, b, c = shift.T
    return np.asarray((a > 0) | ((a == 0) & ((b > 0) | ((b == 0) & (c > 0)))))
