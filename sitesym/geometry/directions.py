"""Directions of a crystal: Cartesian axes, lattice directions [uvw], normals of faces (hkl), Miller-Bravais indices.

Direct and reciprocal lattice are kept apart: [uvw] is a vector of the direct lattice, the normal of (hkl) one of the
reciprocal lattice (International Tables A, 2016, section 1.1.2). All vectors are in the Cartesian axes of the report.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np

from sitesym.errors import UsageError
from sitesym.groups.operation import Floats

_AXES = {"x": (1.0, 0.0, 0.0), "y": (0.0, 1.0, 0.0), "z": (0.0, 0.0, 1.0)}
_INDEX = r"[-+]?\d+"


@dataclass(frozen=True, eq=False)
class Direction:
    """A unit vector (3,) with the name it is printed by: `z`, `-x`, `[110]`, `(1-10)`."""

    name: str
    vector: Floats

    def __neg__(self) -> Direction:
        return Direction(_reversed_name(self.name), -self.vector)


def _reversed_name(name: str) -> str:
    if name[0] in "[(":
        numbers = [-number for number in indices(name[1:-1])]
        return name[0] + format_indices(numbers) + name[-1]
    return name[1:] if name.startswith("-") else f"-{name}"


def format_indices(numbers: list[int]) -> str:
    """`1-10`, or with spaces where a number has more than one digit: `10 -1 2`."""
    return ("" if all(abs(number) < 10 for number in numbers) else " ").join(str(number) for number in numbers)


def indices(text: str) -> list[int]:
    """Three whole numbers from `110`, `1-10`, `1 -1 0` or `1,-1,0`; four Miller-Bravais ones likewise.

    Raises UsageError for anything else.
    """
    parts = re.split(r"[\s,]+", text.strip()) if re.search(r"[\s,]", text.strip()) else re.findall(r"[-+]?\d", text)
    if len(parts) not in (3, 4) or not all(re.fullmatch(_INDEX, part) for part in parts):
        raise UsageError(f"'{text}' is no set of indices.", "Write three whole numbers, such as 110 or 1 -1 0.")
    if "".join(parts) != re.sub(r"[\s,]", "", text):
        raise UsageError(f"'{text}' is no set of indices.", "Write three whole numbers, such as 110 or 1 -1 0.")
    numbers = [int(part) for part in parts]
    if not any(numbers):
        raise UsageError(f"The indices '{text}' are all zero.", "Give a direction or a face.")
    return numbers


def lattice_direction(text: str, lattice: Floats) -> Direction:
    """The direction [uvw], or [uvtw] of a hexagonal lattice (Weber indices), for rows a, b, c of `lattice`."""
    numbers = indices(text)
    if len(numbers) == 4:
        _check_bravais(numbers, text, lattice)
        u, v, t, w = numbers
        three = np.array([u - t, v - t, w], dtype=float)
    else:
        three = np.array(numbers, dtype=float)
    return Direction(f"[{format_indices(numbers)}]", _unit(three @ lattice))


def face_normal(text: str, lattice: Floats) -> Direction:
    """The outward normal of the face (hkl), or (hkil) of a hexagonal lattice, for rows a, b, c of `lattice`."""
    numbers = indices(text)
    if len(numbers) == 4:
        _check_bravais(numbers, text, lattice)
    three = np.array([numbers[0], numbers[1], numbers[-1]], dtype=float)
    return Direction(f"({format_indices(numbers)})", _unit(np.linalg.inv(lattice) @ three))


def _check_bravais(numbers: list[int], text: str, lattice: Floats) -> None:
    if numbers[0] + numbers[1] + numbers[2] != 0:
        raise UsageError(f"In '{text}' the first three of four indices do not add up to 0.", "Correct the third one.")
    a, b, c = lattice
    hexagonal = abs(a @ b + a @ a / 2) < 1e-3 * (a @ a) and abs(a @ a - b @ b) < 1e-3 * (a @ a)
    if not hexagonal or abs(a @ c) + abs(b @ c) > 1e-3 * (c @ c):
        raise UsageError(
            f"'{text}' has four indices, which are for hexagonal axes only.", "Give three indices for this crystal."
        )


def parse_direction(text: str, lattice: Floats) -> Direction:
    """A direction from `x`, `-y`, `[110]`, `-[110]`, or `(110)` for the normal of a face.

    Raises UsageError for anything else.
    """
    stripped = text.strip()
    if stripped.startswith("-"):
        return -parse_direction(stripped[1:], lattice)
    if stripped in _AXES:
        return Direction(stripped, np.array(_AXES[stripped]))
    if stripped.startswith("[") and stripped.endswith("]"):
        return lattice_direction(stripped[1:-1], lattice)
    if stripped.startswith("(") and stripped.endswith(")"):
        return face_normal(stripped[1:-1], lattice)
    raise UsageError(f"'{text}' is no direction.", "Write x, -y, a lattice direction [110] or a face normal (110).")


def _unit(vector: Floats) -> Floats:
    return np.asarray(vector / np.linalg.norm(vector))


def in_plane(direction: Direction, normal: Direction) -> Direction:
    """The projection of a direction on the plane across `normal`, of unit length.

    Raises UsageError when it is parallel to the normal.
    """
    flat = direction.vector - (direction.vector @ normal.vector) * normal.vector
    if np.linalg.norm(flat) < 1e-6:
        raise UsageError(
            f"{direction.name} is normal to the face {normal.name}, not in it.", "Choose another direction in the face."
        )
    return Direction(direction.name, _unit(flat))


def turned(direction: Direction, axis: Direction, degrees: float) -> Direction:
    """A direction turned about an axis, right-handed; its name says by how much."""
    angle = np.radians(degrees)
    v, n = direction.vector, axis.vector
    vector = v * np.cos(angle) + np.cross(n, v) * np.sin(angle) + n * (n @ v) * (1 - np.cos(angle))
    return Direction(f"{direction.name}{degrees:+g}°", np.asarray(vector))
