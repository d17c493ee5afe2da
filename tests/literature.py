"""Build structures for tests from an asymmetric unit, with gemmi's operations: no code of the project expands them."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import Any

import gemmi
import numpy as np

from sitesym.structure import Occupant, Site, Structure

REFERENCE = Path(__file__).parent / "reference"
CORPUS = Path(__file__).resolve().parents[2] / "shared" / "corpus"


def reference(name: str) -> dict[str, Any]:
    """A data file of tests/reference."""
    return tomllib.loads((REFERENCE / name).read_text(encoding="utf-8"))


def cell_vectors(a: float, b: float, c: float, alpha: float, beta: float, gamma: float) -> np.ndarray:
    """Rows a, b, c in Å from lengths in Å and angles in degrees."""
    cell = gemmi.UnitCell(a, b, c, alpha, beta, gamma)
    return np.array(cell.orth.mat.tolist()).T


def expanded(symbol: str, lattice: list[float], sites: list[dict[str, Any]]) -> Structure:
    """The whole cell of a crystal: `symbol` a setting that gemmi knows, sites with label, element and xyz."""
    operations = list(gemmi.SpaceGroup(symbol).operations())
    vectors = cell_vectors(*lattice)
    positions: list[np.ndarray] = []
    named: list[Site] = []
    for site in sites:
        images: list[np.ndarray] = []
        for operation in operations:
            image = np.mod(np.array(operation.apply_to_xyz(site["xyz"])), 1)
            if all(distance(image - other, vectors) > 0.05 for other in images):
                images.append(image)
        positions += images
        named += [Site(site["label"], (Occupant(site["element"]),))] * len(images)
    return Structure(vectors, np.array(positions), tuple(named))


def distance(difference: np.ndarray, vectors: np.ndarray) -> float:
    """Length in Å of a fractional difference wrapped into the cell."""
    return float(np.linalg.norm((difference - np.rint(difference)) @ vectors))


def of_entry(entry: dict[str, Any]) -> Structure:
    """The structure of one entry of a reference file."""
    return expanded(entry["hermann_mauguin"], entry["lattice"], entry["sites"])
