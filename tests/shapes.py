"""Generators of point groups in a standard orientation, written from their textbook definitions."""

from __future__ import annotations

import numpy as np

from sitesym.groups.operation import closure

IDENTITY = np.eye(3)
ACROSS = np.diag([1.0, 1.0, -1.0])
ALONG = np.diag([1.0, -1.0, 1.0])
GOLDEN = (1 + np.sqrt(5)) / 2


def turn(axis: tuple[float, ...], angle: float) -> np.ndarray:
    """Rotation by `angle` in radians about an axis (Rodrigues)."""
    x, y, z = np.array(axis, dtype=float) / np.linalg.norm(axis)
    cross = np.array([[0, -z, y], [z, 0, -x], [-y, x, 0]])
    return np.eye(3) + np.sin(angle) * cross + (1 - np.cos(angle)) * cross @ cross


def axial(n: int) -> dict[str, list[np.ndarray]]:
    """Generators of the seven axial families for one n."""
    c, c2 = turn((0, 0, 1), 2 * np.pi / n), turn((1, 0, 0), np.pi)
    half = turn((0, 0, 1), np.pi / n) @ ACROSS
    return {
        f"C{n}": [c], f"C{n}v": [c, ALONG], f"C{n}h": [c, ACROSS], f"D{n}": [c, c2],
        f"D{n}h": [c, c2, ACROSS], f"D{n}d": [half, c2], f"S{2 * n}": [half],
    }  # fmt: skip


def all_groups(largest: int = 12) -> dict[str, np.ndarray]:
    """Schoenflies symbol -> operations, for every family up to axes of order `largest`."""
    t = [turn((1, 1, 1), 2 * np.pi / 3), turn((0, 0, 1), np.pi)]
    o = [*t, turn((0, 0, 1), np.pi / 2)]
    i = [*t, turn((0, 1, GOLDEN), 2 * np.pi / 5)]
    generators = {
        "C1": [IDENTITY], "Ci": [-IDENTITY], "Cs": [ACROSS],
        "T": t, "Th": [*t, -IDENTITY], "Td": [*t, -o[2]], "O": o, "Oh": [*o, -IDENTITY], "I": i, "Ih": [*i, -IDENTITY],
    }  # fmt: skip
    for n in range(2, largest + 1):
        generators |= axial(n)
    return {name: closure(np.array(matrices)) for name, matrices in generators.items()}
