"""Atoms that are too close to each other to be both there."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.reading.elements import HYDROGENS, covalent_radius
from sitesym.reading.neighbours import near_pairs
from sitesym.structure import Floats, Site

NEVER = 0.5
"""No two nuclei of a crystal are closer than this (Å); the shortest bond, H-H in hydrogen, has 0.74 Å."""

PART = 0.6
"""Nor closer than this part of the sum of covalent radii: a triple bond N-N has 0.77, O-H by X-rays 0.8."""

ROOM = 1.01
"""Two sites are alternatives when their occupancies together do not exceed 1 but for rounding."""


@dataclass(frozen=True, slots=True)
class Contact:
    """Two sites, by index, and their distance in Å."""

    first: int
    second: int
    distance: float


def close_contacts(lattice: Floats, fractional: Floats, sites: tuple[Site, ...], named: bool = True) -> list[Contact]:
    """All pairs too close, nearest first; alternatives of a disordered structure are left out.

    `named` is false where the elements are placeholders, so that only `NEVER` can be asked for.
    """
    radii = np.array([_radius(site) if named else 0.0 for site in sites])
    pairs = near_pairs(lattice, fractional, max(NEVER, 2 * PART * float(radii.max(initial=0.0))))
    limits = np.maximum(NEVER, PART * (radii[pairs.first] + radii[pairs.second]))
    close = np.flatnonzero(pairs.distances < limits)
    found = [
        Contact(int(pairs.first[index]), int(pairs.second[index]), float(pairs.distances[index]))
        for index in close
        if not _are_alternatives(sites[pairs.first[index]], sites[pairs.second[index]])
    ]
    return sorted(found, key=lambda contact: contact.distance)


def crowding(lattice: Floats, fractional: Floats, sites: tuple[Site, ...]) -> float:
    """How far the shortest distance falls below the sum of covalent radii, as a part of that sum; 0 when it does not.

    Hydrogen, whose place is the least certain, and alternatives are left out.
    """
    radii = np.array([0.0 if _is_hydrogen(site) else _radius(site) for site in sites])
    pairs = near_pairs(lattice, fractional, max(NEVER, 2 * float(radii.max(initial=0.0))))
    sums = radii[pairs.first] + radii[pairs.second]
    heavy = (radii[pairs.first] > 0) & (radii[pairs.second] > 0)
    parts = [
        float(pairs.distances[index] / sums[index])
        for index in np.flatnonzero(heavy & (pairs.distances < sums))
        if not _are_alternatives(sites[pairs.first[index]], sites[pairs.second[index]])
    ]
    return 1.0 - min(parts, default=1.0)


def _is_hydrogen(site: Site) -> bool:
    return any(occupant.element in HYDROGENS for occupant in site.occupants)


def _radius(site: Site) -> float:
    """The smallest radius among the occupants."""
    return min((covalent_radius(occupant.element) or 0.0 for occupant in site.occupants), default=0.0)


def _are_alternatives(one: Site, two: Site) -> bool:
    if one.disorder_group != two.disorder_group and one.disorder_group and two.disorder_group:
        return True
    return one.occupancy + two.occupancy <= ROOM or (
        one.disorder_group.startswith("-") and one.disorder_group == two.disorder_group
    )
