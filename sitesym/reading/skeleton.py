"""Carbon skeletons that lack their hydrogen atoms, in files without a formula that would tell."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from sitesym.reading.elements import HYDROGENS, covalent_radius
from sitesym.reading.neighbours import near_pairs
from sitesym.structure import FULL, Floats, Structure

FEWEST = 6
"""Carbon atoms in the cell below which no skeleton is judged."""

PART = 1 / 3
"""Part of the carbon atoms that must be open: benzene has all, anthracene 10 of 14; a few may be misprints."""

SHORTEST = 1.30
"""A carbon atom with two neighbours that bears no hydrogen has a bond shorter than this (Å).

Alkynes have 1.20, cyanides 1.16, allenes 1.31 at the end and 1.28 in C3O2, carbon dioxide 1.16; aromatic bonds have
1.39 (common practice, after Allen and others 1987, J. Chem. Soc. Perkin Trans. 2, S1, from memory).
"""

_REACH = 1.25
"""Neighbours are looked for up to this times the sum of covalent radii, so that none is overlooked."""


def open_carbons(structure: Structure) -> int:
    """Number of carbon atoms in the cell that seem to lack hydrogen.

    They have one or two neighbours only, carbon or nitrogen among them, at single or aromatic distances. It is 0 where
    hydrogen is listed, or where these atoms are few or partly occupied. Graphite and fullerenes (three neighbours),
    carbonates, cyanides and carbides have none.
    """
    elements = [site.occupants[0].element if site.occupancy >= FULL else "" for site in structure.sites]
    carbon = np.array([element == "C" for element in elements])
    if carbon.sum() < FEWEST or HYDROGENS & set(structure.composition):
        return 0
    count, nearest, organic = _surroundings(structure, np.array([element in ("C", "N") for element in elements]))
    found = carbon & (count > 0) & (count <= 2) & (nearest > SHORTEST) & (organic > 0)
    return int(found.sum()) if found.sum() >= max(PART * carbon.sum(), 2) else 0


def _surroundings(structure: Structure, organic: npt.NDArray[np.bool_]) -> tuple[Floats, Floats, Floats]:
    """(n,) number of neighbours of each atom, distance in Å of the nearest, and number of those in the mask."""
    radii = np.array([max(covalent_radius(item.element) or 0.0 for item in site.occupants) for site in structure.sites])
    pairs = near_pairs(structure.lattice, structure.fractional, 2 * _REACH * float(radii.max()))
    near = pairs.distances < _REACH * (radii[pairs.first] + radii[pairs.second])
    ends = np.concatenate([pairs.first[near], pairs.second[near]])
    others = np.concatenate([pairs.second[near], pairs.first[near]])
    nearest = np.full(len(radii), np.inf)
    np.minimum.at(nearest, ends, np.tile(pairs.distances[near], 2))
    count = np.bincount(ends, minlength=len(radii)).astype(np.float64)
    chosen = np.bincount(ends, weights=organic[others].astype(np.float64), minlength=len(radii))
    return count, nearest, np.asarray(chosen, dtype=np.float64)
