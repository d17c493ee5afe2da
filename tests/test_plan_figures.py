"""Sketches of set-ups and polar plots, read back as XML line by line."""

from __future__ import annotations

import xml.etree.ElementTree as Tree

import numpy as np
import pytest
from html_reader import SVG
from plan_cases import sheet

from sitesym.views.figures.polar import polar_plot
from sitesym.views.figures.sketch import sketch


def double_arrows(svg: str) -> list[np.ndarray]:
    """Directions on the page of the thick shafts: laser first, analyser second."""
    shafts = [one for one in Tree.fromstring(svg).iter(f"{SVG}path") if one.get("stroke-width") == "2.4"]
    ends = [np.array([[float(v) for v in p.split(",")] for p in s.get("d", "")[1:].split(" L")]) for s in shafts]
    return [points[1] - points[0] for points in ends]


def parallel(one: np.ndarray, other: np.ndarray) -> bool:
    return bool(abs(np.linalg.norm(one) * np.linalg.norm(other) - abs(one @ other)) < 0.02 * abs(one @ other) + 1e-9)


def test_polarizations_are_drawn_along_the_edges_of_the_face_that_bear_their_names() -> None:
    """z(xy)z̄ on (001): the laser's arrow lies along the front edge, x, the analyser's along the side edge, y."""
    made = sheet("calcite")
    first, second = double_arrows(sketch(made.steps[1], "s"))
    assert parallel(first, np.array([1.0, 0.0]))
    assert not parallel(first, second)
    alike = double_arrows(sketch(made.steps[0], "s"))
    assert parallel(*alike)


def test_light_that_is_not_linear_has_a_sign_in_the_place_of_an_arrow() -> None:
    made = sheet("rutile", geometries=("z(RL)-z", "x(z*)y"))
    assert double_arrows(sketch(made.steps[0], "s")) == []
    assert len(double_arrows(sketch(made.steps[1], "s"))) == 1
    texts = [one.text for one in Tree.fromstring(sketch(made.steps[0], "s")).iter(f"{SVG}text")]
    assert {"R", "L"} <= set(texts)


def test_polar_plot_follows_the_curve() -> None:
    """Every drawn point lies at the angle and, on one scale, at the intensity that the curve has there."""
    (face,) = sheet("lithium niobate", curves=("2-10",)).curves
    (curve,) = [one for one in face.curves if one.name == "E(TO)"]  # of all angles, none is like its mirror image
    paths = [one for one in Tree.fromstring(polar_plot(curve, "p")).iter(f"{SVG}path") if one.get("stroke-width")]
    assert len(paths) == 2
    values = np.concatenate([curve.parallel, curve.crossed])
    for drawn, radii in zip(paths, (curve.parallel, curve.crossed), strict=True):
        points = np.array([[float(v) for v in p.split(",")] for p in drawn.get("d", "")[1:-2].split(" L")])
        angles = np.degrees(np.arctan2(-points[:, 1], points[:, 0])) % 360
        sizes = np.linalg.norm(points, axis=1) / 62 * values.max()
        for angle, size in zip(angles, sizes, strict=True):
            if size > 0.05 * values.max():
                assert size == pytest.approx(np.interp(angle, curve.degrees, radii), abs=0.03 * values.max())
