"""A measured spectrum as a line with its background and fit, and how high bands stand in a drawing."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from sitesym.views.figures.svg import ACCENT, INK, element, path

if TYPE_CHECKING:
    from sitesym.bands.measurement import Band
    from sitesym.bands.peaks import Picks
    from sitesym.groups.operation import Floats
    from sitesym.views.figures.band_scale import Scale

TALL = 110.0
_LOWEST, _UNKNOWN = 8.0, 0.55
_FINE = 1.0


def trace(picks: Picks, scale: Scale, floor: float) -> list[str]:
    """The spectrum as measured; dashed its background, in the colour of emphasis background and bands together."""
    spectrum = picks.spectrum
    inside = (spectrum.wavenumbers >= scale.low) & (spectrum.wavenumbers <= scale.high)
    x = np.array([scale.x(value) for value in spectrum.wavenumbers[inside]])
    low, high = _range(picks)
    lines = (
        (spectrum.signal[inside], {"stroke": INK, "stroke_width": 1.1}),
        (picks.background[inside], {"stroke": INK, "stroke_width": 0.8, "stroke_dasharray": "4 3"}),
        (picks.fitted[inside], {"stroke": ACCENT, "stroke_width": 1.0, "stroke_opacity": ".8"}),
    )
    return [
        element("path", d=path(_thinned(x, floor - TALL * (y - low) / (high - low))), fill="none", **style)  # type: ignore[arg-type]
        for y, style in lines
    ]


def _range(picks: Picks) -> tuple[float, float]:
    signal = picks.spectrum.signal
    return float(min(signal.min(), picks.background.min())), float(signal.max())


def _thinned(x: Floats, y: Floats) -> list[tuple[float, float]]:
    """Highest and lowest point of every step of a pixel, so that no peak is lost."""
    columns = np.round(x / _FINE).astype(int)
    starts = np.flatnonzero(np.diff(columns, prepend=columns[0] - 1)) if len(columns) else np.array([], dtype=int)
    points: list[tuple[float, float]] = []
    for first, last in zip(starts, [*starts[1:], len(x)], strict=True):
        part = y[first:last]
        ends = sorted({int(np.argmin(part)), int(np.argmax(part))})
        points += [(float(x[first + k]), float(part[k])) for k in ends]
    return points


def heights(bands: Sequence[Band], picks: Sequence[Picks]) -> list[float]:
    """How high each band stands: at the spectrum where there is one, else by its intensity."""
    if picks:
        return [max(_at(band.wavenumber, one) for one in picks) for band in bands]
    top = max((band.intensity for band in bands if band.intensity), default=0.0)
    return [_stick(band.intensity, top) for band in bands]


def _stick(intensity: float | None, top: float) -> float:
    if intensity is None or top <= 0:
        return TALL * _UNKNOWN
    return max(_LOWEST, TALL * max(intensity, 0.0) / top)


def _at(wavenumber: float, picks: Picks) -> float:
    spectrum = picks.spectrum
    if not spectrum.wavenumbers[0] <= wavenumber <= spectrum.wavenumbers[-1]:
        return _LOWEST
    low, high = _range(picks)
    return TALL * (float(np.interp(wavenumber, spectrum.wavenumbers, spectrum.signal)) - low) / (high - low)
