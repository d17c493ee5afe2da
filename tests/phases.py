"""Structures of phase_pairs.toml with shared and partly occupied sites, and direct counts that use no wavevectors.

The counts are a second route: operations from gemmi, irreducible representations from spgrep, atoms counted one by one.
"""

from __future__ import annotations

from dataclasses import replace
from itertools import product
from typing import Any

import gemmi
import numpy as np
from literature import distance, expanded

from sitesym.structure import Occupant, Site, Structure

Counts = list[tuple[int, int, bool, bool]]
"""Dimension, how often, infrared, Raman: sorted, and without labels."""


def of_phase(entry: dict[str, Any]) -> Structure:
    """One structure of a pair; sites on one point become one mixed site."""
    symbol, lattice = entry["hermann_mauguin"], entry["lattice"]
    parts = [expanded(symbol, lattice, [site]) for site in entry["sites"]]
    places: list[np.ndarray] = []
    sites: list[Site] = []
    for part, given in zip(parts, entry["sites"], strict=True):
        occupant = Occupant(given["element"], given.get("occupancy", 1.0))
        for position in part.fractional:
            shared = [k for k, other in enumerate(places) if distance(position - other, part.lattice) < 1e-3]
            if shared:
                known = sites[shared[0]]
                sites[shared[0]] = replace(known, occupants=(*known.occupants, occupant))
            else:
                places.append(position)
                sites.append(Site(given["label"], (occupant,)))
    return Structure(parts[0].lattice, np.array(places), tuple(sites))


def operations(symbol: str) -> list[tuple[np.ndarray, np.ndarray]]:
    """(W, w) of all operations of a setting, centring translations included."""
    return [
        (np.array(one.rot) // one.DEN, np.array(one.tran) / one.DEN) for one in gemmi.SpaceGroup(symbol).operations()
    ]


def centrings(symbol: str) -> np.ndarray:
    """(k, 3) lattice points of the cell."""
    return np.array([shift for turn, shift in operations(symbol) if (turn == np.eye(3)).all()])


def carried(symbol: str, axes: np.ndarray, origin: np.ndarray) -> list[tuple[np.ndarray, np.ndarray, np.ndarray]]:
    """Operations of the child, one for each rotation: its own W, and W and w in the parent's a, b, c.

    x of the parent is axes^T x of the child + origin.
    """
    found: dict[bytes, tuple[np.ndarray, np.ndarray, np.ndarray]] = {}
    for turn, shift in operations(symbol):
        moved = axes.T @ turn @ np.linalg.inv(axes.T)
        entry = (turn, moved, axes.T @ shift + origin - moved @ origin)
        found.setdefault(np.ascontiguousarray(turn).tobytes(), entry)
    return list(found.values())


def whole(values: np.ndarray, lattice: np.ndarray) -> np.ndarray:
    """Whether vectors (..., 3) are translations of a lattice with the points (k, 3) in its cell."""
    difference = values[..., None, :] - lattice
    return np.asarray((np.abs(difference - np.rint(difference)).max(axis=-1) < 1e-3).any(axis=-1))


def direct_characters(
    parent: dict[str, Any], child: dict[str, Any], axes: np.ndarray, origin: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """(g,) characters of the displacements of the undistorted parent: of its own cell, and of all the child's cell."""
    atoms = of_phase(parent).fractional
    own, wide = centrings(parent["hermann_mauguin"]), centrings(child["hermann_mauguin"])
    to_child = np.linalg.inv(axes)
    cells = cells_of(own, axes)
    every = (atoms[:, None] + cells[None]).reshape(-1, 3)
    centre, total = [], []
    for _, turn, shift in carried(child["hermann_mauguin"], axes, origin):
        trace = np.trace(turn)
        centre.append(trace * whole(atoms @ turn.T + shift - atoms, own).sum() / len(own))
        moved = (every @ turn.T + shift - every) @ to_child
        total.append(trace * whole(moved, wide).sum() / len(own) / len(wide))
    return np.array(centre), np.array(total)


def cells_of(own: np.ndarray, axes: np.ndarray) -> np.ndarray:
    """Translations of the parent inside the child's cell (with those in the parent's cell left to its atoms)."""
    steps = np.array(list(product(range(-4, 5), repeat=3)), dtype=float)
    points = (steps[:, None] + own[None]).reshape(-1, 3)
    inside = np.round(points @ np.linalg.inv(axes), 6)
    first = np.unique(np.round(inside - np.floor(inside + 1e-6), 4), axis=0, return_index=True)[1]
    return points[first]


def label_free(rotations: np.ndarray, lattice: np.ndarray, characters: np.ndarray) -> Counts:
    """Real species that occur in a representation, by spgrep's irreducible representations."""
    from spgrep import get_crystallographic_pointgroup_irreps_from_symmetry

    matrices = lattice.T @ rotations @ np.linalg.inv(lattice.T)
    vector = np.trace(matrices, axis1=1, axis2=2)
    tensor = (vector**2 + np.trace(matrices @ matrices, axis1=1, axis2=2)) / 2
    rows = [
        np.trace(np.asarray(one), axis1=1, axis2=2)
        for one in get_crystallographic_pointgroup_irreps_from_symmetry(rotations)
    ]
    found: Counts = []
    done: list[np.ndarray] = []
    for row in rows:
        if any(np.allclose(row.conj(), other) for other in done):
            continue
        done.append(row)
        pair = not np.allclose(row, row.conj())
        times, infrared, raman = (round((row.conj() @ one).real / len(row)) for one in (characters, vector, tensor))
        if times:
            found.append((_dimension(row, rotations) * (2 if pair else 1), times, infrared > 0, raman > 0))
    return sorted(found)


def _dimension(row: np.ndarray, rotations: np.ndarray) -> int:
    identity = next(k for k, one in enumerate(rotations) if (one == np.eye(3)).all())
    return round(float(row[identity].real))
