"""Refraction at the surface against textbook angles: Snell's law, the critical angle (Hecht, Optics, from memory)."""

from __future__ import annotations

import numpy as np
import pytest
from plan_cases import sheet

from sitesym.experiment.plan import Conditions
from sitesym.experiment.refraction import beam_words, cone_words
from sitesym.geometry.directions import Direction
from sitesym.geometry.notation import Geometry, linear, parse_geometry
from sitesym.views import plan_text

UP = Direction("up", np.array([0.0, 0.0, 1.0]))


def scattered_at(degrees: float) -> Geometry:
    """Laser along x, scattered light in the plane xy at an angle to it."""
    angle = np.radians(degrees)
    along, out = np.array([1.0, 0.0, 0.0]), np.array([np.cos(angle), np.sin(angle), 0.0])
    return Geometry(Direction("x", along), linear(UP), linear(UP), Direction("out", out))


@pytest.mark.parametrize("notation", ["z(xx)-z", "z(xx)z", "x(zz)y"])
def test_straight_beams_are_not_bent(notation: str) -> None:
    assert beam_words(parse_geometry(notation, np.eye(3)), 1.5) == ""


@pytest.mark.parametrize(
    ("degrees", "index", "inside", "outside"),
    [(30, 1.5, 30, 49), (150, 1.5, 30, 49), (60, 1.5, 30, 49), (20, 2.4, 20, 55), (100, 1.33, 10, 13)],
)
def test_angles_outside_follow_snell(degrees: float, index: float, inside: int, outside: int) -> None:
    """asin(1.5 sin 30°) = 48.6°, asin(2.4 sin 20°) = 55.2°, asin(1.33 sin 10°) = 13.4°."""
    words = beam_words(scattered_at(degrees), index)
    assert f"{inside}° off its normal" in words
    assert f"leaves at {outside}° outside" in words


def test_beyond_the_critical_angle_light_stays_inside() -> None:
    """The critical angle of glass is 41.8°, of diamond 24.6° (textbooks)."""
    assert "total reflection" in beam_words(scattered_at(43), 1.5)
    assert "total reflection" not in beam_words(scattered_at(41), 1.5)
    assert "total reflection" in beam_words(scattered_at(26), 2.4)


def test_cone_of_an_objective_narrows_in_the_crystal() -> None:
    """asin 0.9 = 64.2°, asin(0.9/4) = 13.0°."""
    assert "64° half angle outside, 13° inside" in cone_words(0.9, 4.0)
    assert "immersion" in cone_words(1.3, 2.0)
    assert cone_words(0.0, 1.5) == ""


def test_notes_are_printed() -> None:
    conditions = Conditions(aperture=0.5, index=1.5)
    text = " ".join(plan_text.render(sheet("rutile", geometries=("x(yy)[101]",), conditions=conditions)).split())
    assert "all: an objective of aperture 0.5" in text
    assert "the beams enclose" in text
