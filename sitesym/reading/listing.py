"""The atoms as a file lists them, and the symmetry operations to be applied to them."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from sitesym.errors import NotAStructureError
from sitesym.structure import Floats, Integers

DENOMINATOR = 24
"""Translations of crystallographic operations are multiples of 1/24 (International Tables, volume B, Hall symbols)."""

LARGEST = 1e5
"""No cell is longer (Å), and no atom is listed that many cells away."""

THINNEST = 0.5
"""No crystal repeats within a shorter distance between lattice planes (Å) that bound a cell."""


@dataclass(frozen=True, eq=False, slots=True)
class Listing:
    """Atoms before symmetry is applied.

    lattice      (3, 3) rows are a, b, c in Å.
    fractional   (n, 3) coordinates.
    labels       n names of sites.
    types        n words from which the element was taken (`Fe3+`), "" where there was none.
    elements     n chemical symbols, D and T included.
    occupancies  (n,) between 0 and 1, 0 excluded.
    groups       n disorder groups, "" for the common part.

    Raises NotAStructureError when a number is not finite or the cell is thinner than any atom.
    """

    lattice: Floats
    fractional: Floats
    labels: tuple[str, ...]
    types: tuple[str, ...]
    elements: tuple[str, ...]
    occupancies: Floats
    groups: tuple[str, ...]

    def __post_init__(self) -> None:
        if not (np.isfinite(self.lattice).all() and np.isfinite(self.fractional).all()):
            raise NotAStructureError("A coordinate or cell vector is no finite number.", "Correct it in the file.")
        if max(np.abs(self.lattice).max(), np.abs(self.fractional).max()) > LARGEST:
            raise NotAStructureError(
                f"A coordinate or cell vector exceeds {LARGEST:,.0f}.", "Give lengths in Å, coordinates as fractions."
            )
        thickness = float(heights(self.lattice).min())
        if thickness < THINNEST:
            raise NotAStructureError(
                f"The cell is only {thickness:.2g} Å thick, less than any atom.",
                "Give lengths in Å, and three axes that do not lie in one plane.",
            )

    def __len__(self) -> int:
        return len(self.labels)


@dataclass(frozen=True, eq=False, slots=True)
class Operations:
    """A space group modulo the lattice translations: x' = W x + w.

    rotations     (m, 3, 3) integer matrices W on fractional coordinates.
    translations  (m, 3) integers, w in units of 1/24, reduced to 0 ... 23.
    """

    rotations: Integers
    translations: Integers

    def __len__(self) -> int:
        return len(self.rotations)

    @property
    def shifts(self) -> Floats:
        """(m, 3) translations as fractions."""
        return np.asarray(self.translations / DENOMINATOR, dtype=np.float64)

    @property
    def keys(self) -> frozenset[tuple[int, ...]]:
        """The operations as hashable twelve-tuples: equal for equal groups in equal settings."""
        rows = np.concatenate([self.rotations.reshape(-1, 9), self.translations], axis=1)
        return frozenset(map(tuple, rows.tolist()))


def identity() -> Operations:
    """The group of the lattice translations alone, P 1."""
    return Operations(np.eye(3, dtype=np.int64)[None], np.zeros((1, 3), dtype=np.int64))


def heights(lattice: Floats) -> Floats:
    """(3,) distances in Å between opposite faces of the cell, 0 when it is flat."""
    a, b, c = lattice
    normals = np.array([np.cross(b, c), np.cross(c, a), np.cross(a, b)])
    areas = np.linalg.norm(normals, axis=1)
    return np.array([abs(np.linalg.det(lattice)) / area if area > 0 else 0.0 for area in areas])


def numbered(elements: Iterable[str]) -> tuple[str, ...]:
    """Labels O1, O2, ... for atoms that come without names, in the order given."""
    seen: dict[str, int] = {}
    labels = []
    for element in elements:
        seen[element] = seen.get(element, 0) + 1
        labels.append(f"{element}{seen[element]}")
    return tuple(labels)
