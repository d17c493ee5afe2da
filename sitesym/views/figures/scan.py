"""The scan of the tolerance as a drawing: which space group at which tolerance, on a logarithmic axis."""

from __future__ import annotations

from dataclasses import dataclass
from math import floor, log10
from typing import TYPE_CHECKING

from sitesym.views.figures.svg import ACCENT, INK, PAPER, drawing, element, line, path, text
from sitesym.views.labels import TEXT
from sitesym.views.sentences import ScanRun, scan_runs

if TYPE_CHECKING:
    from sitesym.analysis import Analysis
    from sitesym.symmetry.scan import Scan

_WIDTH, _RIGHT = 430.0, 24.0
_TOP, _ROW, _FOOT = 26.0, 30.0, 46.0
_EXPONENTS = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")


@dataclass(frozen=True, slots=True)
class _Frame:
    """Where things stand: `groups` from the bottom row up, tolerances in Å from `low` to `high`."""

    groups: tuple[str, ...]
    low: float
    high: float

    @property
    def left(self) -> float:
        """Start of the axis; room for the longest name before it."""
        return 24 + max(60.0, max(7.6 * len(name) for name in self.groups))

    @property
    def floor(self) -> float:
        """Height of the axis on the page."""
        return _TOP + _ROW * len(self.groups)

    def x(self, tolerance: float) -> float:
        """Place of a tolerance."""
        share = (log10(tolerance) - log10(self.low)) / (log10(self.high) - log10(self.low))
        return self.left + 12 + share * (_WIDTH - _RIGHT - self.left - 12)

    def y(self, group: str) -> float:
        """Height of a group's row."""
        return self.floor - _ROW * (self.groups.index(group) + 0.5)


def scan_drawing(analysis: Analysis, name: str = "scan") -> str:
    """The scan as SVG, "" when none was made; `name` makes the ids of the drawing unique."""
    scan, runs = analysis.scan, scan_runs(analysis)
    if scan is None:
        return ""
    groups = tuple(dict.fromkeys(_name(run) for run in runs))
    frame = _Frame(groups, scan.points[0].tolerance, scan.points[-1].tolerance)
    own = next(_name(run) for run in runs if run.used)
    parts = [
        _plateau(frame, scan, own), *_rows(frame, own), *_axis(frame), *_chosen(frame, analysis.symmetry.tolerance),
        _trace(frame, runs), *_points(frame, scan, runs), *_markers(frame, analysis, scan, own),
    ]  # fmt: skip
    box = (0.0, 0.0, _WIDTH, frame.floor + _FOOT)
    return drawing(name, "Space group against tolerance", _description(runs), box, *parts)


def _name(run: ScanRun) -> str:
    return "none found" if run.number is None else f"{TEXT.symbol(run.symbol)} · {run.number}"


def _run_at(runs: tuple[ScanRun, ...], tolerance: float) -> ScanRun:
    return next(run for run in runs if run.low <= tolerance <= run.high)


def _plateau(frame: _Frame, scan: Scan, own: str) -> str:
    low, high = frame.x(scan.plateau[0]) - 11, frame.x(scan.plateau[1]) + 11
    y = frame.y(own)
    return element(
        "rect", x=low, y=y - 11, width=high - low, height=22, rx=11, fill=ACCENT, fill_opacity=".16", stroke=ACCENT
    )


def _rows(frame: _Frame, own: str) -> list[str]:
    x = frame.left - 10
    style: dict[str, str | float] = {"text_anchor": "end", "fill": INK, "font_size": 13.5}
    return [
        text(group, x, frame.y(group) + 4.5, font_weight="bold" if group == own else "normal", **style)
        for group in frame.groups
    ]


def _axis(frame: _Frame) -> list[str]:
    """The logarithmic axis with its decades and what lies between them."""
    y = frame.floor + 4
    parts = [line(frame.left, y, _WIDTH - _RIGHT + 10, y)]
    for power in range(floor(log10(frame.low)) - 1, floor(log10(frame.high)) + 2):
        for digit in range(1, 10):
            value = digit * 10.0**power
            if frame.low * 0.999 <= value <= frame.high * 1.001:
                parts.append(line(frame.x(value), y, frame.x(value), y + (7 if digit == 1 else 3)))
        if frame.low * 0.999 <= 10.0**power <= frame.high * 1.001:
            label = f"10{str(power).translate(_EXPONENTS)}"
            parts.append(text(label, frame.x(10.0**power), y + 21, text_anchor="middle", fill=INK, font_size=13))
    middle = (frame.left + _WIDTH - _RIGHT) / 2
    parts.append(text("tolerance / Å", middle, y + 38, text_anchor="middle", fill=INK, font_size=13))
    return parts


def _chosen(frame: _Frame, tolerance: float) -> list[str]:
    x = frame.x(tolerance)
    side = "end" if x > 0.8 * _WIDTH else "start" if x < frame.left + 40 else "middle"
    return [
        line(x, 18, x, frame.floor + 4, stroke_dasharray="3 3"),
        text(f"used: {tolerance:g} Å", x, 13, text_anchor=side, fill=INK, font_size=13),
    ]


def _trace(frame: _Frame, runs: tuple[ScanRun, ...]) -> str:
    """A staircase through the rows; where a group changes, somewhere between two tolerances, the line is oblique."""
    points = [(frame.x(value), frame.y(_name(run))) for run in runs for value in (run.low, run.high)]
    return element("path", d=path(points), fill="none", stroke=INK, stroke_opacity=".55", stroke_width=1.3)


def _points(frame: _Frame, scan: Scan, runs: tuple[ScanRun, ...]) -> list[str]:
    return [
        element(
            "circle", cx=frame.x(point.tolerance), cy=frame.y(_name(_run_at(runs, point.tolerance))), r=4,
            fill=PAPER, stroke=INK, stroke_width=1.5,
        )
        for point in scan.points
    ]  # fmt: skip


def _markers(frame: _Frame, analysis: Analysis, scan: Scan, own: str) -> list[str]:
    """The point that was used, filled; the next supergroup, a square."""
    used = element("circle", cx=frame.x(analysis.symmetry.tolerance), cy=frame.y(own), r=5.5, fill=ACCENT, stroke=INK)
    if scan.supergroup is None:
        return [used]
    x = frame.x(scan.supergroup.tolerance)
    y = frame.y(_name(_run_at(scan_runs(analysis), scan.supergroup.tolerance)))
    square = element("rect", x=x - 6, y=y - 6, width=12, height=12, fill=PAPER, stroke=ACCENT, stroke_width=2.4)
    return [used, square]


def _description(runs: tuple[ScanRun, ...]) -> str:
    parts = [f"from {run.low:g} to {run.high:g} Å {_name(run)}" for run in runs]
    return f"{'; '.join(parts)}."
