"""Crystals and molecules for the tests of bonds and units, expanded with gemmi's operations."""

from typing import Any

import gemmi
import numpy as np
from literature import cell_vectors, distance, reference

from sitesym.structure import Occupant, Site, Structure


def crystal(group: str, cell: list[float], atoms: list[list[Any]], name: str = "") -> Structure:
    """The unit cell of sites [element, x, y, z(, occupancy)] in a space group that gemmi knows."""
    lattice = cell_vectors(*cell)
    points: list[np.ndarray] = []
    sites: list[Site] = []
    for number, (element, x, y, z, *occupancy) in enumerate(atoms, 1):
        site = Site(f"{element}{number}", (Occupant(element, float(occupancy[0]) if occupancy else 1.0),))
        orbit: list[np.ndarray] = []
        for operation in gemmi.SpaceGroup(group).operations():
            image = np.array(operation.apply_to_xyz([float(x), float(y), float(z)])) % 1
            if not any(distance(image - other, lattice) < 0.1 for other in orbit):
                orbit.append(image)
        points += orbit
        sites += [site] * len(orbit)
    return Structure(lattice, np.array(points), tuple(sites), name=name)


def listed(name: str) -> Structure:
    """A crystal of tests/reference/unit_structures.toml."""
    entry = reference("unit_structures.toml")[name]
    return crystal(entry["group"], entry["cell"], entry["atoms"], name)


def in_a_box(elements: list[str], positions: np.ndarray, edge: float = 20.0) -> Structure:
    """A molecule alone in a large cubic cell; positions (n, 3) in Å."""
    sites = tuple(Site(f"{element}{number}", (Occupant(element),)) for number, element in enumerate(elements, 1))
    return Structure(np.eye(3) * edge, np.asarray(positions) / edge, sites)
