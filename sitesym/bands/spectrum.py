"""Measured spectra: an axis in cm⁻¹ and an ordinate in which bands point upwards."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.bands.axis import axis_of
from sitesym.bands.columns import Column, direction_of
from sitesym.bands.measurement import INFRARED
from sitesym.bands.tables import Table, value
from sitesym.errors import ReadError, UsageError
from sitesym.groups.operation import Floats
from sitesym.reading.text import counted, printable

DIRECTIONS = ("peaks", "dips")

LEAST_POINTS = 50
"""Shorter tables are lists of bands."""

MOST_POINTS = 400_000
_EVEN = 0.3
"""By how much (logarithm) a step of an axis may differ from the next in the median; in lists of bands by far more."""

_OPAQUE = 1e-4
"""The transmittance below which no instrument tells how little light comes through."""

_OF_REFLECTANCE = "reflectance: its maxima lie between the transverse and longitudinal wavenumbers, not at either"
_LEANING = 1.5
"""By how much further the ordinate must reach from its median on one side to tell which way bands point."""


@dataclass(frozen=True, eq=False)
class Spectrum:
    """One measured spectrum.

    wavenumbers  (n,) in cm⁻¹, rising; signal (n,) in which bands point upwards.
    technique    "raman" or "infrared"; source the file.
    ordinate     what `signal` is: "intensity", "absorbance", ...
    notes        how it was read, in words.
    """

    wavenumbers: Floats
    signal: Floats
    technique: str
    source: str
    ordinate: str = "intensity"
    notes: tuple[str, ...] = ()

    def __repr__(self) -> str:
        low, high = self.wavenumbers[[0, -1]]
        points = len(self.wavenumbers)
        return f"Spectrum({self.source}: {self.technique}, {low:.1f} to {high:.1f} cm⁻¹, {points} points)"


@dataclass(frozen=True, eq=False)
class Trace:
    """Numbers of a spectrum as they stand in a file.

    x, y      (n,); unit that of x, "" where not stated.
    ordinate  the name of y in the file, "" where not stated.
    lines     (n,) line numbers, or None.
    """

    x: Floats
    y: Floats
    unit: str
    ordinate: str
    source: str
    lines: Floats | None = None


def is_spectrum(table: Table) -> bool:
    """Whether a table looks like a spectrum: two columns of numbers, many, along an axis of even steps."""
    fields = {column.field for column in table.columns}
    if len(table.rows) < LEAST_POINTS or fields & {"width", "half_width", "uncertainty", "technique", "geometry"}:
        return False
    if any(len(row.cells) != 2 for row in table.rows[:LEAST_POINTS]):
        return False
    first = [value(row.cells[0]) for row in table.rows]
    steps = np.diff([one[0] for one in first if one is not None])
    if len(steps) < LEAST_POINTS - 1 or not ((steps > 0).mean() > 0.98 or (steps < 0).mean() > 0.98):
        return False
    changes = np.abs(np.diff(np.log(np.maximum(np.abs(steps), 1e-12))))
    return bool(np.median(changes) < _EVEN)


def trace_of(table: Table) -> Trace:
    """The numbers of a table of two columns.

    Raises ReadError with the line for what is no number, and for more than two columns.
    """
    if len(table.rows) > MOST_POINTS:
        raise ReadError(f"{table.source} has {len(table.rows)} points.", f"Give at most {MOST_POINTS}.")
    wide = next((row for row in table.rows if len(row.cells) != 2), None)
    if wide is not None:
        raise ReadError(
            f"{table.source}, line {wide.line}: {counted(len(wide.cells), 'column')} where a spectrum has two.",
            "Write each spectrum into a file of its own: axis and ordinate.",
        )
    numbers = np.array([_pair(row.cells, row.line, table.source) for row in table.rows])
    lines = np.array([row.line for row in table.rows], dtype=float)
    x, y = table.columns if len(table.columns) == 2 else (Column("", "", ""), Column("", "", ""))
    if x.other or (x.name in ("wavelength", "wavelengths", "lambda", "λ", "energy") and not x.unit):
        raise ReadError(
            f"{table.source}: the unit of the axis '{printable(x.text, 40)}' is not known.",
            "Write cm-1, nm, um, meV or THz behind its name, in brackets.",
        )
    return Trace(numbers[:, 0], numbers[:, 1], x.unit, y.name, table.source, lines)


def _pair(cells: tuple[str, ...], line: int, source: str) -> tuple[float, float]:
    first, second = value(cells[0]), value(cells[1])
    if first is None or second is None:
        word = cells[0] if first is None else cells[1]
        raise ReadError(
            f"{source}, line {line}: '{printable(word, 40)}' is no number.",
            "Leave out points that were not measured; begin other lines with #.",
        )
    return first[0], second[0]


def spectrum_of(trace: Trace, technique: str, unit: str, laser: float | None, direction: str) -> Spectrum:
    """The spectrum of a trace: axis in cm⁻¹, rising, bands upwards.

    unit, laser, direction  the user's word where the file does not tell ("" or None: not given).

    Raises ReadError where the axis turns back or the numbers make no spectrum, UsageError where the user has to say.
    """
    if len(trace.x) < LEAST_POINTS // 2:
        raise ReadError(
            f"{trace.source} has {len(trace.x)} points, too few for a spectrum.", "Give it as a list of bands."
        )
    axis = axis_of(trace.x, trace.unit or unit, technique, laser, trace.source)
    _check_order(trace)
    wavenumbers = axis.wavenumbers(trace.x)
    order = np.argsort(wavenumbers)
    order = order[wavenumbers[order] > 0]
    if len(order) < LEAST_POINTS // 2:
        raise ReadError(f"{trace.source} has no points at positive wavenumbers.", "Check the axis and its unit.")
    signal, ordinate, notes = _upwards(trace.y[order], trace, technique, direction)
    left_out = len(trace.x) - len(order)
    cut = [f"{left_out} points at or below 0 cm⁻¹ left out"] if left_out else []
    words = [axis.words] if axis.words else []
    return Spectrum(wavenumbers[order], signal, technique, trace.source, ordinate, (*words, *cut, *notes))


def _check_order(trace: Trace) -> None:
    steps = np.diff(trace.x)
    way = np.sign(trace.x[-1] - trace.x[0])
    wrong = np.flatnonzero(steps * way <= 0)
    if not len(wrong):
        return
    place = f"line {trace.lines[wrong[0] + 1]:.0f}" if trace.lines is not None else f"point {wrong[0] + 2}"
    raise ReadError(
        f"{trace.source}, {place}: the axis turns back or stands still at {trace.x[wrong[0] + 1]:g}.",
        "Give one spectrum a file, its axis rising or falling throughout; a list of bands may be in any order.",
    )


# Which way bands point


def _upwards(y: Floats, trace: Trace, technique: str, direction: str) -> tuple[Floats, str, tuple[str, ...]]:
    if np.ptp(y) == 0:
        raise ReadError(f"{trace.source}: all points have the same ordinate, {y[0]:g}.", "Check the second column.")
    stated = direction_of(trace.ordinate)
    if technique != INFRARED:
        return y, "intensity", ()
    if stated == "reflectance" and not direction:
        return y, "reflectance", (_OF_REFLECTANCE,)
    way = direction or stated or _leaning(y, trace)
    if way != "dips":
        return y, trace.ordinate if stated == "peaks" else "absorbance", ()
    how = "" if direction or stated else ", as the ordinate looks"
    top = float(y.max())
    if stated == "dips" or (y.min() >= -0.02 * top and top <= 130):
        scale = 100.0 if top > 1.5 else 1.0
        absorbance = -np.log10(np.clip(y / scale, _OPAQUE, None))
        return absorbance, "absorbance", (f"bands point down{how}: turned into absorbance",)
    return top - y, "depth", (f"bands point down{how}: turned upside down",)


def _leaning(y: Floats, trace: Trace) -> str:
    """Bands stand out from a level where most of the points lie."""
    low, middle, high = np.percentile(y, [1, 50, 99])
    up, down = high - middle, middle - low
    if up > _LEANING * down:
        return "peaks"
    if down > _LEANING * up:
        return "dips"
    raise UsageError(
        f"{trace.source}: nothing tells whether bands point up (absorbance) or down (transmittance).",
        "Name the second column absorbance or transmittance, or give --bands-point up or down.",
    )
