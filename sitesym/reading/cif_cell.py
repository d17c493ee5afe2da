"""The unit cell of a CIF: six numbers -> a lattice."""

from __future__ import annotations

import math

import numpy as np

from sitesym.errors import NotAStructureError
from sitesym.reading.cif_document import Block
from sitesym.reading.cif_values import number_of
from sitesym.reading.listing import LARGEST
from sitesym.structure import Floats, OpenQuestion

_LENGTHS = ("_cell_length_a", "_cell_length_b", "_cell_length_c")
_ANGLES = ("_cell_angle_alpha", "_cell_angle_beta", "_cell_angle_gamma")


def read_cell(block: Block) -> tuple[Floats, tuple[OpenQuestion, ...]]:
    """The (3, 3) lattice, a along x and b in the xy plane, and what is doubtful about it.

    Raises NotAStructureError when a length is missing or the six numbers make no cell. A missing angle is 90 degrees,
    as the CIF core dictionary defines it.
    """
    lengths = [_length(block, tag) for tag in _LENGTHS]
    given = [number_of(block.value(tag), tag) for tag in _ANGLES]
    angles = [90.0 if angle is None else angle for angle in given]
    lattice = lattice_of(lengths, angles)
    questions: tuple[OpenQuestion, ...] = ()
    if None in given:
        missing = ", ".join(tag for tag, angle in zip(_ANGLES, given, strict=True) if angle is None)
        questions = (OpenQuestion("angle_assumed", f"The file does not give {missing}; 90 degrees were taken."),)
    return lattice, questions + _volume_question(block, lattice)


def _length(block: Block, tag: str) -> float:
    value = number_of(block.value(tag), tag)
    if value is None:
        raise NotAStructureError(f"The file does not give {tag}.", "Add the cell to the file.")
    if not 0 < value < LARGEST:
        raise NotAStructureError(f"{tag} is {value:g}, which is no length in Å.", "Correct the cell in the file.")
    return value


def lattice_of(lengths: list[float], angles: list[float]) -> Floats:
    """Rows a, b, c in Å from lengths in Å and angles in degrees (Giacovazzo 2011, Fundamentals of Crystallography)."""
    alpha, beta, gamma = (math.radians(angle) for angle in angles)
    cosines = np.cos([alpha, beta, gamma])
    square = 1 - (cosines**2).sum() + 2 * cosines.prod()
    if not all(0 < angle < 180 for angle in angles) or square <= 1e-8:
        shown = ", ".join(f"{angle:g}" for angle in angles)
        raise NotAStructureError(f"The angles {shown} make no cell.", "Correct _cell_angle_alpha, _beta and _gamma.")
    a, b, c = lengths
    sine = math.sin(gamma)
    third = [cosines[1], (cosines[0] - cosines[1] * cosines[2]) / sine, math.sqrt(square) / sine]
    lattice = np.array([[a, 0, 0], [b * cosines[2], b * sine, 0], [c * value for value in third]])
    lattice[np.abs(lattice) < 1e-12 * max(lengths)] = 0.0
    return lattice


def _volume_question(block: Block, lattice: Floats) -> tuple[OpenQuestion, ...]:
    stated = number_of(block.value("_cell_volume"), "_cell_volume")
    volume = abs(float(np.linalg.det(lattice)))
    if stated is None or stated <= 0 or abs(volume - stated) <= 0.01 * stated:
        return ()
    return (
        OpenQuestion(
            "volume_mismatch",
            f"The cell lengths and angles make {volume:.1f} Å³, the file says {stated:.1f} Å³: one is misprinted.",
        ),
    )
