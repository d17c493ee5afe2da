"""The axis of a drawing of bands: cm⁻¹ from high on the left to low on the right, as is custom in infrared."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import ceil, floor

from sitesym.views.figures.svg import INK, line, text
from sitesym.views.figures.typeset import text_width

SIDE = 18.0
_BREAK, _HIGH = 2000.0, 2600.0
_SHRUNK, _WIDE_STEP = 0.4, 500.0
_STEPS = (5, 10, 20, 25, 50, 100, 200, 250, 500, 1000)
_TICKS = 9
_SMALL = 12.0


@dataclass(frozen=True, slots=True)
class Scale:
    """Wavenumbers from `low` to `high` over `width`; above `turn` they are drawn closer together."""

    low: float
    high: float
    turn: float
    step: float
    width: float

    def x(self, wavenumber: float) -> float:
        """Place of a wavenumber, held inside the drawing."""
        inside = min(max(wavenumber, self.low), self.high)
        return SIDE + (self._length(self.high) - self._length(inside)) / self._length(self.high) * (
            self.width - 2 * SIDE
        )

    def _length(self, wavenumber: float) -> float:
        below = min(wavenumber, self.turn) - self.low
        return below + _SHRUNK * max(wavenumber - self.turn, 0.0)

    def ticks(self) -> list[float]:
        """Round wavenumbers, fewer where they are drawn closer together."""
        count = int(self.high / self.step)
        wide = max(self.step, _WIDE_STEP)
        values = [k * self.step for k in range(ceil(self.low / self.step), count + 1)]
        return [value for value in values if value <= self.turn or value % wide == 0]


def scale_of(wavenumbers: Sequence[float], width: float) -> Scale:
    """An axis that holds all of them with some room."""
    low, high = min(wavenumbers), max(wavenumbers)
    room = max(0.04 * (high - low), 20.0)
    low, high = max(0.0, low - room), high + room
    turn = _BREAK if high > _HIGH and low < _BREAK - 500 else high
    span = (turn - low) + _SHRUNK * (high - turn)
    step = float(next((one for one in _STEPS if span / one <= _TICKS), _STEPS[-1]))
    return Scale(floor(low), ceil(high), turn, step, width)


def axis(scale: Scale, y: float) -> list[str]:
    """The line with its ticks and numbers below it."""
    parts = [line(SIDE - 8, y, scale.width - SIDE + 8, y)]
    unit = scale.width - SIDE + 8 - text_width("cm⁻¹", _SMALL)
    for value in scale.ticks():
        x, half = scale.x(value), text_width(f"{value:g}", _SMALL) / 2
        parts.append(line(x, y, x, y + 4))
        if half < x < unit - half - 4:
            parts.append(text(f"{value:g}", x, y + 16, text_anchor="middle", fill=INK, font_size=_SMALL))
    parts.append(text("cm⁻¹", scale.width - SIDE + 8, y + 16, text_anchor="end", fill=INK, font_size=_SMALL))
    return parts
