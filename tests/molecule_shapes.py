"""Molecules of every family of point groups, and distorted ones that have truly less symmetry, for tests.

The molecules are built from reference/molecule_shapes.toml: one atom of each kind, multiplied by the generators of the
group, which stand here. Nothing of sitesym is used.
"""

from __future__ import annotations

import tomllib
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

X, Y, Z = np.eye(3)
DIAGONAL = np.ones(3)
FIVEFOLD = np.array([0, 1, (1 + 5**0.5) / 2])
INVERSION = -np.eye(3)
TABLE = Path(__file__).parent / "reference" / "molecule_shapes.toml"


@dataclass(frozen=True, eq=False)
class Shape:
    """A molecule: its name, its group in Schoenflies' notation, n elements, positions (n, 3) in Å, operations."""

    name: str
    schoenflies: str
    elements: list[str]
    positions: Array
    operations: Array


def turn(axis: Array, degrees: float) -> Array:
    """Return the matrix of a rotation (formula of Rodrigues)."""
    x, y, z = axis / np.linalg.norm(axis)
    cross = np.array([[0, -z, y], [z, 0, -x], [-y, x, 0]])
    angle = np.radians(degrees)
    return np.asarray(np.eye(3) + np.sin(angle) * cross + (1 - np.cos(angle)) * cross @ cross)


def mirror(normal: Array) -> Array:
    """Return the matrix of a reflection."""
    return np.asarray(np.eye(3) - 2 * np.outer(normal, normal) / (normal @ normal))


def improper(axis: Array, fold: int) -> Array:
    """Return the matrix of a rotation-reflection S_fold."""
    return mirror(axis) @ turn(axis, 360 / fold)


TETRAHEDRAL = [turn(Z, 180), turn(DIAGONAL, 120)]
OTHER_GROUPS: dict[str, list[Array]] = {
    "T": TETRAHEDRAL,
    "Td": [*TETRAHEDRAL, improper(Z, 4)],
    "Th": [*TETRAHEDRAL, INVERSION],
    "O": [*TETRAHEDRAL, turn(Z, 90)],
    "Oh": [*TETRAHEDRAL, turn(Z, 90), INVERSION],
    "I": [*TETRAHEDRAL, turn(FIVEFOLD, 72)],
    "Ih": [*TETRAHEDRAL, turn(FIVEFOLD, 72), INVERSION],
    "C1": [],
    "Cs": [mirror(Z)],
    "Ci": [INVERSION],
    "C∞v": [],
    "D∞h": [INVERSION],
    "Kh": [],
}


def generators(schoenflies: str) -> list[Array]:
    """Return generators: main axis along z, mirrors normal to x (v), twofold axes along x (D), mirrors between (d).

    Of the infinite groups only what multiplies the atoms of a molecule that lies along z.
    """
    if schoenflies in OTHER_GROUPS:
        return OTHER_GROUPS[schoenflies]
    family, fold = schoenflies[0], int("".join(c for c in schoenflies if c.isdigit()))
    if family == "S":
        return [improper(Z, fold)]
    found = [turn(Z, 360 / fold)]
    found += [turn(X, 180)] if family == "D" else []
    found += [mirror(Z)] if schoenflies.endswith("h") else []
    found += [mirror(X)] if schoenflies.endswith("v") else []
    found += [improper(Z, 2 * fold)] if schoenflies.endswith("d") else []
    return found


def multiplied(matrices: Sequence[Array]) -> Array:
    """Return all products of some matrices (m, 3, 3), the identity first."""
    group = [np.eye(3)]
    for element in group:
        for matrix in matrices:
            product = matrix @ element
            if min(np.abs(product - other).max() for other in group) > 1e-6:
                group.append(product)
    return np.array(group)


def orbit(point: Array, group: Array) -> list[Array]:
    """Return the images of a point; a point within 0.01 Å of an element of symmetry is put on it first."""
    images = group @ point
    exact = images[np.linalg.norm(images - point, axis=1) < 0.01].mean(axis=0)
    found: list[Array] = []
    for image in group @ exact:
        if all(np.linalg.norm(image - other) > 1e-3 for other in found):
            found.append(image)
    return found


def build(name: str, schoenflies: str, atoms: str) -> Shape:
    """Build a molecule from lines "element x y z", one for each kind of atom."""
    group = multiplied(generators(schoenflies))
    elements, positions = [], []
    for line in atoms.strip().splitlines():
        element, *numbers = line.split()
        images = orbit(np.array(numbers, dtype=float), group)
        elements += [element] * len(images)
        positions += images
    return Shape(name, schoenflies, elements, np.array(positions), group)


@cache
def all_shapes() -> dict[str, Shape]:
    """Return every molecule by its name."""
    rows = tomllib.loads(TABLE.read_text(encoding="utf-8"))["molecule"]
    return {row["name"]: build(row["name"], row["group"], row["atoms"]) for row in rows}


def scattered(shape: Shape, scatter: float, seed: int) -> tuple[list[str], Array]:
    """Return elements and positions turned and shifted at random, in a random order, each coordinate scattered (Å)."""
    random = np.random.default_rng([seed, int(1000 * scatter), *shape.name.encode()])
    order = random.permutation(len(shape.elements))
    orthogonal = np.linalg.qr(random.normal(size=(3, 3)))[0]
    moved = shape.positions @ (orthogonal * np.linalg.det(orthogonal)).T + 5 * random.normal(size=3)
    moved = moved + scatter * random.normal(size=moved.shape)
    return [shape.elements[i] for i in order], moved[order]


@dataclass(frozen=True, eq=False)
class Distortion:
    """A way to distort a molecule, and the group that is left: `move` maps positions (n, 3) to positions."""

    parent: str
    left: str
    move: Callable[[Array], Array]


def stretched(axis: Array, factor: float) -> Callable[[Array], Array]:
    """Return a move that multiplies the component along an axis."""
    return lambda places: places + (factor - 1) * np.outer(places @ axis, axis) / (axis @ axis)


def pulled(direction: Array, step: float) -> Callable[[Array], Array]:
    """Return a move that takes the atoms furthest along a direction further out."""

    def move(places: Array) -> Array:
        along = places @ direction / np.linalg.norm(direction)
        chosen = along > along.max() - 0.1
        return np.asarray(places + step * np.outer(chosen, direction / np.linalg.norm(direction)))

    return move


def twisted(axis: Array, degrees: float) -> Callable[[Array], Array]:
    """Return a move that turns the atoms on the two sides of the centre against each other."""

    def move(places: Array) -> Array:
        side = np.sign(np.round(places @ axis, 3))
        return np.array([turn(axis, s * degrees / 2) @ place for s, place in zip(side, places, strict=True)])

    return move


def lifted(height: Callable[[Array], Array]) -> Callable[[Array], Array]:
    """Return a move along z by a function of the positions."""
    return lambda places: places + np.outer(height(places), Z)


def at_centre(places: Array) -> Array:
    """Return 1 for the atom at the centre, else 0."""
    return np.asarray((np.linalg.norm(places, axis=1) < 0.1).astype(float))


def ring_alternation(places: Array) -> Array:
    """Return +1 and -1 in turn for the six directions of a benzene ring (atoms at 30, 90, 150 ... degrees)."""
    return np.asarray(np.round(np.sin(3 * np.arctan2(places[:, 1], places[:, 0]))))


def breathing_alternation(places: Array) -> Array:
    """Move the six arms of a benzene ring out and in, in turn."""
    lengths = np.linalg.norm(places, axis=1)[:, None]
    return np.asarray(places + 0.35 * ring_alternation(places)[:, None] * places / lengths)


def widened_pair(places: Array) -> Array:
    """Move the atoms above the centre away from the main axis."""
    return np.asarray(places * np.where(places[:, 2] > 0.1, 1.45, 1.0)[:, None] ** np.array([1, 1, 0]))


DISTORTIONS = [
    Distortion("hexachloroplatinate", "D4h", stretched(Z, 1.25)),
    Distortion("hexachloroplatinate", "C4v", pulled(Z, 0.9)),
    Distortion("hexachloroplatinate", "C2v", pulled(X + Y, 0.9)),
    Distortion("hexachloroplatinate", "D3", twisted(DIAGONAL, 25)),
    Distortion("hexachloroplatinate", "D3d", stretched(DIAGONAL, 1.4)),
    Distortion("tungstate", "D2d", stretched(Z, 0.4)),
    Distortion("tungstate", "C3v", pulled(DIAGONAL, 0.6)),
    Distortion("tungstate", "C2v", widened_pair),
    Distortion("white phosphorus", "C2v", widened_pair),
    Distortion("white phosphorus", "C3v", pulled(DIAGONAL, 0.8)),
    Distortion("cubane", "D3d", stretched(DIAGONAL, 1.35)),
    Distortion("cubane", "D4h", stretched(Z, 1.4)),
    Distortion("hexamine", "D2d", stretched(Z, 0.7)),
    Distortion("benzene", "D3h", breathing_alternation),
    Distortion("benzene", "D3d", lifted(lambda places: 0.32 * ring_alternation(places))),
    Distortion("benzene", "C2v", lifted(lambda places: 0.32 * np.abs(places[:, 1]))),
    Distortion("naphthalene", "C2v", lifted(lambda places: 0.3 * np.abs(places[:, 0]))),
    Distortion("allene", "D2", twisted(Z, 55)),
    Distortion("ferrocene staggered", "D5", twisted(Z, 18)),
    Distortion("fullerene C60", "D5d", stretched(FIVEFOLD, 1.2)),
    Distortion("fullerene C60", "D2h", stretched(Z, 1.2)),
    Distortion("fullerene C60", "D3d", stretched(DIAGONAL, 1.2)),
    Distortion("dodecahydrododecaborate", "D3d", stretched(DIAGONAL, 1.3)),
    Distortion("iodine heptafluoride", "C5v", pulled(Z, 0.9)),
    Distortion("phosphorus pentafluoride", "C2v", pulled(X, 0.7)),
    Distortion("carbonate", "C3v", lifted(lambda places: 0.5 * at_centre(places))),
    Distortion("cyclooctasulfur", "D2", stretched(X, 1.35)),
    Distortion("tetrachloroplatinate", "D2h", stretched(X, 1.3)),
    Distortion("carbon dioxide", "C2v", lambda places: places + 0.5 * np.outer(at_centre(places), X)),
    Distortion("azide", "C∞v", lifted(lambda places: 0.5 * at_centre(places))),
]


def distorted(case: Distortion) -> Shape:
    """Return a distorted molecule; its operations are still those of the parent."""
    parent = all_shapes()[case.parent]
    name = f"{case.parent} as {case.left}"
    return Shape(name, case.left, parent.elements, case.move(parent.positions), parent.operations)
