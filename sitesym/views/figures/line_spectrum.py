"""Where bands are expected in the crystal: the known wavenumbers of the units, with the components that each gives.

One axis in cm⁻¹, from high to low as is custom in infrared; infrared stands above it, Raman below. A stroke leads from
the wavenumber of the free unit to the components, which are drawn apart only to be counted: symmetry does not tell how
far the crystal moves and splits them.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import groupby
from math import ceil, floor
from typing import TYPE_CHECKING

from sitesym.expected_bands import ExpectedBand
from sitesym.views.figures.spread import spread, stacked
from sitesym.views.figures.svg import ACCENT, INK, drawing, element, line, number, text
from sitesym.views.figures.typeset import symbols, symbols_width, text_width
from sitesym.views.labels import HTML, TEXT
from sitesym.views.molecule_sentences import distinguishing_label

if TYPE_CHECKING:
    from sitesym.analysis import Analysis
    from sitesym.molecular import MoleculeRow
    from sitesym.molecule_analysis import MoleculeAnalysis

_WIDTH, _SIDE = 760.0, 16.0
_SLOT, _LEAST, _GAP = 15.0, 40.0, 9.0
_TWIN = 3.2
_LEADER, _STICK = 30.0, 34.0
_AXIS = 30.0
_SMALL, _NAME = 12.0, 13.0
_STEPS = (5, 10, 20, 25, 50, 100, 200, 250, 500, 1000)
_TICKS = 9


@dataclass(frozen=True, slots=True)
class _Group:
    """The components of one vibration that one of the two spectra shows; `heads` name it, from the axis outwards."""

    wavenumber: float
    heads: tuple[str, ...]
    bands: tuple[ExpectedBand, ...]

    @property
    def width(self) -> float:
        """Room that it takes along the axis."""
        return max(_LEAST, _SLOT * len(self.bands), *(symbols_width(one, _NAME) for one in self.heads))


@dataclass(frozen=True, slots=True)
class _Scale:
    """Wavenumbers in cm⁻¹ from `high` on the left to `low` on the right, `width` wide."""

    low: float
    high: float
    step: float
    width: float

    def x(self, wavenumber: float) -> float:
        """Place of a wavenumber."""
        return _SIDE + (self.high - wavenumber) / (self.high - self.low) * (self.width - 2 * _SIDE)


def line_spectrum(analysis: Analysis, name: str) -> str:
    """The expected bands of a crystal as SVG, "" if there are none; `name` makes the ids unique on their page."""
    molecular = analysis.molecular
    if molecular is None:
        return ""
    several = len({band.row for band in molecular.bands}) > 1
    units = [_unit_words(row, analysis) if several else "" for row in molecular.molecules]
    return _drawing(molecular.bands, units, name, "Where bands are expected")


def free_spectrum(result: MoleculeAnalysis, name: str) -> str:
    """The known wavenumbers of a molecule alone, likewise."""
    bands = [
        ExpectedBand(
            result.formula, 0, known.name, one.species, one.kind, known.wavenumber, known.given, one.species, 1,
            one.dimension, one.activity.infrared, one.activity.raman, one.activity.polar,
        )
        for one, names in zip(result.vibrations, result.names, strict=True)
        for known in names
        if known.wavenumber is not None
    ]  # fmt: skip
    return _drawing(bands, [""], name, "Known wavenumbers of the free molecule")


def _drawing(bands: Sequence[ExpectedBand], units: Sequence[str], name: str, title: str) -> str:
    shown = [band for band in bands if band.infrared or band.raman]
    if not shown:
        return ""
    infrared = _groups([band for band in shown if band.infrared], units)
    raman = _groups([band for band in shown if band.raman], units)
    scale = _scale([band.wavenumber for band in shown], max(_needed(infrared), _needed(raman), _WIDTH))
    above, below = _reach(infrared, True), _reach(raman, False)
    parts = [
        *_axis(scale, above),
        *_row(infrared, scale, above, -1, "Infrared"),
        *_row(raman, scale, above + _AXIS, 1, "Raman"),
    ]
    box = (0.0, 0.0, scale.width, above + _AXIS + below)
    return drawing(name, title, _description(infrared, raman), box, *parts)


def _unit_words(row: MoleculeRow, analysis: Analysis) -> str:
    """The formula, with the label of an atom where there are inequivalent units of that formula."""
    label = distinguishing_label(row, analysis)
    return f"{HTML.formula(row.name)} {HTML.plain(label)}" if label else HTML.formula(row.name)


def _groups(bands: Iterable[ExpectedBand], units: Sequence[str]) -> list[_Group]:
    """Components of one vibration together, in falling order of wavenumbers, as they stand from left to right."""

    def key(band: ExpectedBand) -> tuple[float, int, str, str, str]:
        return (-band.wavenumber, band.row, band.vibration, band.free_species, band.kind)

    return [
        _Group(-found[0], _heads(members[0], units[members[0].row]), tuple(members))
        for found, group in groupby(sorted(bands, key=key), key=key)
        if (members := list(group))
    ]


def _heads(band: ExpectedBand, unit: str) -> tuple[str, ...]:
    """The wavenumber, the usual name or else the species, and the unit where there are several."""
    species = HTML.species(band.free_species)
    named = bool(band.vibration) and not band.vibration.startswith(band.free_species)
    lines = [f"{band.wavenumber:g}", HTML.plain(band.vibration) if named else species]
    return (*lines, unit) if unit else tuple(lines)


def _needed(groups: Sequence[_Group]) -> float:
    return 2 * _SIDE + stacked([group.width for group in groups], _GAP)[1]


def _scale(wavenumbers: Sequence[float], width: float) -> _Scale:
    """From whole steps below the lowest to above the highest, with about eight ticks."""
    low, high = min(wavenumbers), max(wavenumbers)
    spread_out = max(high - low, 0.25 * high)
    step = next((one for one in _STEPS if spread_out / one <= _TICKS), _STEPS[-1])
    first, last = step * floor(low / step - 0.3), step * ceil(high / step + 0.3)
    return _Scale(max(first, 0), last, step, width)


# Drawing


def _axis(scale: _Scale, top: float) -> list[str]:
    """Two lines with the numbers between them."""
    left, right, middle = _SIDE - 8, scale.width - _SIDE + 8, top + _AXIS / 2
    parts = [line(left, y, right, y) for y in (top, top + _AXIS)]
    unit_left = right - text_width("cm⁻¹", _SMALL) - 2
    for tick in range(round((scale.high - scale.low) / scale.step) + 1):
        value = scale.low + tick * scale.step
        x = scale.x(value)
        parts += [line(x, top, x, top + 4), line(x, top + _AXIS - 4, x, top + _AXIS)]
        half = text_width(f"{value:g}", _SMALL) / 2
        if x + half < unit_left - 4 and x - half > left:
            parts.append(text(f"{value:g}", x, middle + 4, text_anchor="middle", fill=INK, font_size=_SMALL))
    parts.append(text("cm⁻¹", right, middle + 4, text_anchor="end", fill=INK, font_size=_SMALL))
    return parts


def _row(groups: Sequence[_Group], scale: _Scale, axis: float, way: int, title: str) -> list[str]:
    """One spectrum, growing upwards (`way` -1) or downwards (1) from its line of the axis."""
    head = axis + way * (_reach(groups, way < 0) - (16 if way < 0 else 8))
    words = title if groups else f"{title}: no band of known wavenumber"
    parts = [text(words, _SIDE - 8, head, fill=ACCENT, font_size=14, font_style="italic")]
    wanted = [scale.x(group.wavenumber) for group in groups]
    places = _inside(spread(wanted, [group.width for group in groups], _GAP), groups, scale.width)
    room = _label_room(groups, way < 0)
    for group, place, x in zip(groups, places, wanted, strict=True):
        parts.append(_group(group, place, x, axis, way, room))
    return parts


def _inside(places: list[float], groups: Sequence[_Group], width: float) -> list[float]:
    """Moved back where they stand out on the left or right; all groups together are never wider than the drawing."""
    edge = _SIDE / 2
    inside = list(places)
    for number_, group in enumerate(groups):
        inside[number_] = max(inside[number_], edge + group.width / 2)
        edge = inside[number_] + group.width / 2 + _GAP
    edge = width - _SIDE / 2
    for number_ in range(len(groups) - 1, -1, -1):
        inside[number_] = min(inside[number_], edge - groups[number_].width / 2)
        edge = inside[number_] - groups[number_].width / 2 - _GAP
    return inside


def _group(group: _Group, place: float, x: float, axis: float, way: int, room: float) -> str:
    """A leader from the axis to a bar, the components on the bar, their species and, `room` further, the heads."""
    bar = axis + way * _LEADER
    half = _SLOT * len(group.bands) / 2
    leader = [(x, axis), (x, axis + way * 6), (place, bar - way * 5), (place, bar)]
    d = "M" + " L".join(f"{number(a)},{number(b)}" for a, b in leader)
    parts = [
        element("path", d=d, fill="none", stroke=INK, stroke_width=0.9, stroke_opacity=".65"),
        line(place - half + 3, bar, place + half - 3, bar, stroke_width=1),
    ]
    for slot, band in enumerate(group.bands):
        parts.append(_component(band, place - half + _SLOT * (slot + 0.5), bar, way))
    tip = bar + way * (_STICK + room + 12)
    for row, head in enumerate(group.heads):
        y = tip + way * row * 15 + (0 if way < 0 else 9)
        weight = "bold" if row == 1 else "normal"
        parts.append(symbols(head, place, y, _NAME, text_anchor="middle", fill=INK, font_weight=weight))
    return element("g", *parts)


def _component(band: ExpectedBand, x: float, bar: float, way: int) -> str:
    """One stick for each component of this species, and the species along it."""
    first = x - _TWIN * (band.count - 1) / 2
    sticks = [
        line(first + _TWIN * k, bar, first + _TWIN * k, bar + way * _STICK, stroke_width=2 if band.count < 4 else 1.4)
        for k in range(band.count)
    ]
    y = bar + way * (_STICK + 5)
    turned = f"rotate(-90 {number(x + 4)} {number(y)})"
    anchor = "start" if way < 0 else "end"
    words = _component_words(band, infrared=way < 0)
    return "".join(sticks) + symbols(words, x + 4, y, _SMALL, fill=INK, text_anchor=anchor, transform=turned)


def _component_words(band: ExpectedBand, *, infrared: bool) -> str:
    """The species, in infrared with the axes along which its dipole may point."""
    species = HTML.species(band.species)
    return f"{species} ({', '.join(band.polar)})" if infrared else species


def _label_room(groups: Sequence[_Group], infrared: bool) -> float:
    """Length of the longest species along a stick."""
    words = [_component_words(band, infrared=infrared) for group in groups for band in group.bands]
    return max((symbols_width(one, _SMALL) for one in words), default=0.0)


def _reach(groups: Sequence[_Group], infrared: bool) -> float:
    """How far a spectrum reaches from its line of the axis."""
    if not groups:
        return 32.0
    return _LEADER + _STICK + _label_room(groups, infrared) + 36 + 15 * len(groups[0].heads)


# Words for those who cannot see it


def _description(infrared: Sequence[_Group], raman: Sequence[_Group]) -> str:
    return f"Infrared: {_list(infrared)}. Raman: {_list(raman)}. In cm⁻¹, from high to low."


def _list(groups: Sequence[_Group]) -> str:
    words = [
        f"near {group.wavenumber:g} {TEXT.formula(group.bands[0].unit)} {group.bands[0].vibration} "
        + " + ".join(f"{band.count if band.count > 1 else ''}{TEXT.species(band.species)}" for band in group.bands)
        for group in groups
    ]
    return "; ".join(words) or "none"
