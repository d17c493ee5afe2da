"""Angle-resolved curves of one kind of phonon as a polar plot: parallel drawn through, crossed dashed."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from sitesym.views import plan_symbols as symbols
from sitesym.views.figures.svg import ACCENT, INK, PAPER, drawing, element, path, text

if TYPE_CHECKING:
    from sitesym.experiment.curves import AngleCurve, FaceAxes
    from sitesym.experiment.fitted import CurveFit
    from sitesym.groups.operation import Floats

_RADIUS = 62.0
_BOX = (-92.0, -84.0, 184.0, 168.0)
_STEP = 3.0


def polar_plot(curve: AngleCurve, name: str) -> str:
    """The drawing as SVG, both curves on one scale; `name` makes its ids unique in a page."""
    largest = max(float(curve.parallel.max()), float(curve.crossed.max()))
    scale = _RADIUS / largest if largest > 0 else 0.0
    title = f"{symbols.species(curve.name)} on {symbols.direction(f'({curve.axes.face})')}"
    along, across = (symbols.expression(one) for one in (curve.parallel_expression, curve.crossed_expression))
    reference = symbols.direction(curve.axes.reference.name)
    described = f"Intensity against the angle θ from {reference}. Parallel {along}, crossed {across}."
    lines = [
        _trace(curve.degrees, curve.parallel * scale, ACCENT, {}),
        _trace(curve.degrees, curve.crossed * scale, INK, {"stroke_dasharray": "4 3"}),
    ]
    return drawing(name, title, described, _BOX, *_grid(curve.axes), *lines)


def fit_plot(fit: CurveFit, name: str) -> str:
    """Measured points with the fitted curves: parallel filled, crossed hollow."""
    degrees = np.arange(0.0, 360.0, 2.0)
    curves = fit.intensities(degrees)
    measured = (fit.data.parallel, fit.data.crossed)
    largest = max(float(np.nanmax(values)) for values in (*curves, *measured) if values is not None)
    scale = _RADIUS / largest if largest > 0 else 0.0
    title = f"Fit of {symbols.species(fit.seen.name)} on {symbols.direction(f'({fit.axes.face})')}"
    described = "Measured intensities as points and the fitted curves, against the angle of the laser's polarization."
    styles: tuple[dict[str, str | float], ...] = ({}, {"stroke_dasharray": "4 3"})
    marks = [
        mark
        for values, curve, colour, style in zip(measured, curves, (ACCENT, INK), styles, strict=True)
        if values is not None
        for mark in (
            _trace(degrees, np.maximum(curve, 0.0) * scale, colour, style),
            *_points(fit.data.degrees, values * scale, colour, not style),
        )
    ]
    return drawing(name, title, described, _BOX, *_grid(fit.axes), *marks)


def _points(degrees: Floats, radii: Floats, colour: str, filled: bool) -> list[str]:
    places = [_place(float(a), float(r)) for a, r in zip(degrees, radii, strict=True) if r > 0]
    return [
        element("circle", cx=x, cy=y, r=2.2, fill=colour if filled else PAPER, stroke=colour, stroke_width=1.2)
        for x, y in places
    ]


def _grid(axes: FaceAxes) -> list[str]:
    """Circles at a half and at the whole of the largest intensity, spokes every 30 degrees, two directions named."""
    style: dict[str, str | float] = {"fill": "none", "stroke": INK, "stroke_opacity": ".22"}
    circles = [element("circle", cx=0, cy=0, r=radius, **style) for radius in (_RADIUS / 2, _RADIUS)]
    spokes = [element("path", d=path([(0.0, 0.0), _place(degrees, _RADIUS)]), **style) for degrees in range(0, 360, 30)]
    label: dict[str, str | float] = {"fill": INK, "font_size": 12}
    return [
        *circles,
        *spokes,
        text(symbols.direction(axes.reference.name), _RADIUS + 5, 4, **label),
        text(symbols.direction(axes.across.name), 0, -_RADIUS - 6, text_anchor="middle", **label),
    ]


def _trace(degrees: Floats, radii: Floats, colour: str, style: dict[str, str | float]) -> str:
    every = max(1, round(_STEP / max(float(degrees[1] - degrees[0]), 1e-6)))
    points = [_place(float(a), float(r)) for a, r in zip(degrees[::every], radii[::every], strict=True)]
    return element(
        "path", d=f"{path(points)} Z", fill=colour if not style else "none", fill_opacity=".08", stroke=colour,
        stroke_width=1.8, **style,
    )  # fmt: skip


def _place(degrees: float, radius: float) -> tuple[float, float]:
    angle = np.radians(degrees)
    return float(radius * np.cos(angle)), float(-radius * np.sin(angle))
