"""Second routes to figures that have no published value: numeric derivatives, random rotations, the Poisson law."""

from __future__ import annotations

import numpy as np
import pytest
from literature import of_entry, reference
from scipy.spatial.transform import Rotation
from scipy.stats import poisson

from sitesym.analysis import analyse
from sitesym.bands.coincidence import coincidences
from sitesym.bands.inventory import inventory
from sitesym.bands.measurement import Band
from sitesym.experiment.leakage import leaks
from sitesym.geometry.notation import parse_geometry
from sitesym.internal_coordinates import bends, neighbours, stretches, torsions

ENTRIES = {entry["name"]: entry for entry in reference("decompositions.toml")["compound"]}
POINTS = np.random.default_rng(0).normal(size=(6, 3))
BONDS = [(0, 1), (1, 2), (2, 3), (1, 4), (2, 5)]
NEAR = neighbours(6, BONDS)


def angle(p: np.ndarray, i: int, apex: int, j: int) -> float:
    u, v = p[i] - p[apex], p[j] - p[apex]
    return float(np.arccos(u @ v / np.linalg.norm(u) / np.linalg.norm(v)))


def dihedral(p: np.ndarray, i: int, j: int, k: int, m: int) -> float:
    a, b, c = p[j] - p[i], p[k] - p[j], p[m] - p[k]
    return float(np.arctan2(np.linalg.norm(b) * a @ np.cross(b, c), np.cross(a, b) @ np.cross(b, c)))


def derivative(function: object) -> np.ndarray:
    steps = 1e-6 * np.eye(18).reshape(18, 6, 3)
    return np.array([(function(POINTS + step) - function(POINTS - step)) / 2e-6 for step in steps])


@pytest.mark.parametrize(
    ("row", "function"),
    [
        (stretches(POINTS, BONDS)[1], lambda p: float(np.linalg.norm(p[1] - p[2]))),
        (bends(POINTS, NEAR)[0], lambda p: angle(p, 0, 1, 2)),
        (torsions(POINTS, [(1, 2)], NEAR)[0], lambda p: sum(dihedral(p, i, 1, 2, m) for i in (0, 4) for m in (3, 5))),
    ],
)
def test_displacement_vectors_are_numeric_derivatives(row: np.ndarray, function: object) -> None:
    """Up to scale and sign, which play no part."""
    found, expected = row / np.linalg.norm(row), derivative(function)
    expected /= np.linalg.norm(expected)
    assert abs(found @ expected) == pytest.approx(1, abs=1e-9)


def rays(rng: np.random.Generator, beam: np.ndarray, half: float, count: int) -> Rotation:
    """Rotations that take a beam to rays spread evenly over a cone about it, each in its meridional plane."""
    polar = np.arccos(1 - rng.uniform(0, 1, count) * (1 - np.cos(half)))
    azimuth = rng.uniform(0, 2 * np.pi, count)
    first = np.cross(beam, np.eye(3)[np.argmin(np.abs(beam))])
    first /= np.linalg.norm(first)
    axis = np.cos(azimuth)[:, None] * first + np.sin(azimuth)[:, None] * np.cross(beam, first)
    return Rotation.from_rotvec(axis * polar[:, None])


@pytest.mark.parametrize(
    ("name", "text"), [("calcite", "x(zz)y"), ("molybdenite 2H", "z(xx)-z"), ("forsterite", "y(xz)-y")]
)
def test_leakage_agrees_with_random_rotations(name: str, text: str) -> None:
    """Tilt of 5° about axes at random, and light in cones, on each tensor of a species: within 6 % of the averages."""
    rng = np.random.default_rng(1)
    analysis = analyse(of_entry(ENTRIES[name]), scan=False, molecules=False)
    geometry = parse_geometry(text, analysis.symmetry.lattice)
    e, f = geometry.incoming.vectors[0].real, geometry.outgoing.vectors[0].real
    axes = rng.normal(size=(40000, 3))
    tilt = Rotation.from_rotvec(np.radians(5) * axes / np.linalg.norm(axes, axis=1)[:, None])
    half = np.arcsin(0.8 / 1.6)
    inward, outward = (rays(rng, one.vector, half, 40000) for one in (geometry.incident, geometry.scattered))
    found = {one.label: one for one in leaks(analysis, geometry, tilt=5, aperture=0.8, index=1.6)}
    assert found
    for label, leak in found.items():
        tensors = np.concatenate([one.basis for one in analysis.species_row(label).tensor.components])
        best = max(float((tensors[:, i, j] ** 2).sum()) for i in range(3) for j in range(3))
        for measured, first, second in ((leak.misorientation, tilt, tilt), (leak.aperture, inward, outward)):
            seen = np.einsum("na,kab,nb->nk", second.apply(f), tensors, first.apply(e)) ** 2
            assert measured == pytest.approx(seen.sum(axis=1).mean() / best, rel=0.06, abs=2e-5), label


def test_the_chance_of_coincidences_is_poisson() -> None:
    """P(at least n) with the stated mean, against scipy."""
    analysis = analyse(of_entry(ENTRIES["calcite"]), scan=False)
    bands = [Band(711, "raman"), Band(1086, "raman"), Band(712, "infrared"), Band(872, "infrared")]
    found = coincidences(analysis, inventory(analysis), bands)
    assert len(found.pairs) == 1
    assert found.chance == pytest.approx(poisson.sf(len(found.pairs) - 1, found.expected))
