"""All images of the listed atoms under a space group.

Coordinates of atoms on special positions are rounded in files (0.333, 0.6667), so that images which should coincide
do not. Images within a small distance are taken as one, and the atom is moved to their mean: the mean over a group
of operations is left fixed by each of them, hence lies on the symmetry element exactly.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from sitesym.errors import ReadError
from sitesym.reading.listing import Listing, Operations
from sitesym.structure import FULL, Floats, Integers

Booleans = npt.NDArray[np.bool_]

SAME_ATOM = 0.1
"""Images of a full atom closer than this (Å) are one atom."""

SAME_PARTIAL_ATOM = 0.05
"""The like for a partly occupied atom, which may be disordered about a symmetry element at a small distance."""

SPLIT = 0.02
"""An atom that is moved farther than this (Å) was not merely rounded, but disordered about a symmetry element."""

MOST_ATOMS = 20_000
"""More atoms than this in one cell are refused."""

_CHUNK = 200_000


@dataclass(frozen=True, eq=False, slots=True)
class Orbits:
    """The images of n listed atoms, N in all.

    points       (N, 3) fractional coordinates: each atom's own position as listed first, its images in the cell.
    owners       (N,) index of the listed atom.
    counts       (n,) number of images.
    occupancies  (n,) occupancy of one image.
    """

    points: Floats
    owners: Integers
    counts: Integers
    occupancies: Floats

    @property
    def starts(self) -> Integers:
        """(n,) index of each atom's first image."""
        return np.asarray(np.cumsum(self.counts) - self.counts, dtype=np.int64)


def too_large(atoms: int) -> ReadError:
    """The error for a cell with too many atoms."""
    return ReadError(
        f"The cell holds {atoms:,} atoms or more; {MOST_ATOMS:,} is the most.",
        "Give the primitive cell, or a smaller model of the structure.",
    )


def expand(listing: Listing, operations: Operations) -> Orbits:
    """Apply the operations to every listed atom and join the images that coincide."""
    if len(listing) > MOST_ATOMS:
        raise too_large(len(listing))
    if len(operations) == 1:
        atoms = np.arange(len(listing))
        return Orbits(listing.fractional, atoms, np.ones_like(atoms), listing.occupancies)
    parts: list[Floats] = []
    counts: list[int] = []
    occupancies: list[float] = []
    step = max(1, _CHUNK // len(operations))
    for start in range(0, len(listing), step):
        chunk = slice(start, start + step)
        full = listing.occupancies[chunk] >= FULL
        tolerances = np.where(full, SAME_ATOM, SAME_PARTIAL_ATOM)
        centres, fixing, moved = _settle(listing.fractional[chunk], operations, listing.lattice, tolerances)
        images = np.einsum("mij,nj->nmi", operations.rotations, centres) + operations.shifts
        for row in range(len(centres)):
            orbit = _orbit(images[row], fixing[row], centres[row], listing.lattice)
            parts.append(orbit)
            counts.append(len(orbit))
        occupancies += _occupancies(listing, chunk, fixing, moved)
        if sum(counts) > MOST_ATOMS:
            raise too_large(sum(counts))
    owners = np.repeat(np.arange(len(listing)), counts)
    return Orbits(np.concatenate(parts), owners, np.array(counts), np.array(occupancies))


def _settle(
    points: Floats, operations: Operations, lattice: Floats, tolerances: Floats
) -> tuple[Floats, Booleans, Floats]:
    """Move each point to the mean of its near images, until the operations that fix it no longer change.

    Returns the (n, 3) centres, the (n, m) mask of operations that fix them, and how far each point moved in Å.
    """
    centres = points
    fixing = np.zeros((len(points), len(operations)), dtype=bool)
    for _ in range(5):
        difference = np.einsum("mij,nj->nmi", operations.rotations, centres) + operations.shifts - centres[:, None]
        difference -= np.round(difference)
        near = np.linalg.norm(difference @ lattice, axis=2) < tolerances[:, None]
        if (near == fixing).all():
            break
        fixing = near
        centres = centres + (difference * near[..., None]).sum(axis=1) / near.sum(axis=1)[:, None]
    return centres, fixing, np.linalg.norm((centres - points) @ lattice, axis=1)


def _orbit(images: Floats, fixing: Booleans, centre: Floats, lattice: Floats) -> Floats:
    """The distinct ones among the (m, 3) images of one atom, its own position first."""
    if fixing.sum() == 1:
        first = np.flatnonzero(fixing)
        others = np.delete(images, first, axis=0)
        return np.concatenate([centre[None], others - np.floor(others)])
    distinct = [centre]
    left = images
    while len(left):
        difference = left - distinct[-1]
        difference -= np.round(difference)
        left = left[np.linalg.norm(difference @ lattice, axis=1) > 1e-3]
        if len(left):
            distinct.append(left[0] - np.floor(left[0]))
    return np.array(distinct)


def _occupancies(listing: Listing, chunk: slice, fixing: Booleans, moved: Floats) -> list[float]:
    """Occupancy of one image of each atom.

    A negative disorder group marks an atom disordered about a symmetry element. Where its images are so near each
    other that they are taken as one, their occupancies add up.
    """
    result = []
    merged = fixing.sum(axis=1)
    for row, (occupancy, group) in enumerate(zip(listing.occupancies[chunk], listing.groups[chunk], strict=True)):
        total = occupancy * merged[row]
        adds = group.startswith("-") and moved[row] > SPLIT and total <= 1.01
        result.append(float(total if adds else occupancy))
    return result
