"""What was measured over what is predicted: spectra or sticks above the axis, families of components below it.

A stroke leads from each band to the family that it was put to; the family stands at the wavenumber of the free unit, or
at its bands where none is known. External modes and nets are bars over the range that they may take. Bands whose first
reason is no fundamental stand out in the colour of emphasis, with that reason.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from sitesym.bands.measurement import TECHNIQUES
from sitesym.views.explain_words import NAMES, family_words, has_place, modes, number, of, reason_words
from sitesym.views.figures.band_scale import SIDE, Scale, axis, scale_of
from sitesym.views.figures.band_trace import TALL, heights, trace
from sitesym.views.figures.spread import spread, stacked
from sitesym.views.figures.svg import ACCENT, INK, PAPER, drawing, element, path, text
from sitesym.views.figures.typeset import symbols, symbols_width
from sitesym.views.labels import HTML, TEXT

if TYPE_CHECKING:
    from sitesym.bands.explanation import BandResult, Explanation
    from sitesym.bands.inventory import Family
    from sitesym.bands.reading import Record

_WIDTH = 760.0
_LABEL, _SLOT, _FONT = 46.0, 14.0, 12.0
_LEADER, _FAN, _DROP = 20.0, 44.0, 26.0
_AXIS, _GAP = 24.0, 18.0
_MOST_FAMILIES = 40


@dataclass(frozen=True, slots=True)
class _Target:
    """Where strokes from bands end: a place on the axis of predictions, words beside it (HTML), and the bands."""

    wavenumber: float
    ends: tuple[float, float] | None
    words: str
    bands: tuple[BandResult, ...]
    is_prediction: bool


def band_spectrum(explanation: Explanation, records: Sequence[Record] = (), name: str = "bands") -> str:
    """The drawing as SVG; `name` makes its ids unique."""
    shown = [technique for technique in TECHNIQUES if of(explanation, technique)]
    targets = {technique: _targets(explanation, technique) for technique in shown}
    scale = _scale(explanation, targets)
    parts: list[str] = []
    y = 0.0
    for technique in shown:
        panel, height = _panel(explanation, records, technique, targets[technique], scale, y)
        parts += panel
        y += height + _GAP
    box = (0.0, 0.0, scale.width, y - _GAP)
    return drawing(name, "Measured bands over what symmetry predicts", _description(explanation, shown), box, *parts)


def _scale(explanation: Explanation, targets: dict[str, list[_Target]]) -> Scale:
    places = [one.band.wavenumber for one in explanation.bands]
    places += [target.wavenumber for found in targets.values() for target in found]
    slots = max(max(len(_leads(explanation, technique)), len(found)) for technique, found in targets.items())
    return scale_of(places, max(_WIDTH, 2 * SIDE + stacked([_SLOT] * slots, 0)[1]))


def _leads(explanation: Explanation, technique: str) -> list[BandResult]:
    """Every band once, whatever the number of geometries that show it, as high as in the strongest."""
    return [_strongest(members) for members in modes(of(explanation, technique))]


def _strongest(members: Sequence[BandResult]) -> BandResult:
    lead = members[0]
    intensities = [one.band.intensity for one in members if one.band.intensity is not None]
    if len(members) == 1 or not intensities:
        return lead
    return replace(lead, placed=replace(lead.placed, band=replace(lead.band, intensity=max(intensities))))


# What is predicted


def _targets(explanation: Explanation, technique: str) -> list[_Target]:
    """Families that the technique shows, and the reasons of bands that are no fundamentals first of all."""
    mine = _leads(explanation, technique)
    families = [family for family in explanation.families if family.capacity(technique)]
    with_bands = [family for family in families if any(one.placed.family is family for one in mine if has_place(one))]
    if len(families) > _MOST_FAMILIES:
        families = with_bands
    found = [
        _target(family, technique, [one for one in mine if one.placed.family is family and has_place(one)])
        for family in families
    ]
    others = [one for one in mine if not has_place(one)]
    reasons = [
        _Target(one.band.wavenumber, None, HTML.plain(reason_words(one.reasons[0])), (one,), False) for one in others
    ]
    return [*(one for one in found if one is not None), *reasons]


def _target(family: Family, technique: str, bands: list[BandResult]) -> _Target | None:
    """None where neither a wavenumber nor a band tells where to draw it."""
    if family.wavenumber is None and not bands:
        return None
    places = [one.band.wavenumber for one in bands]
    ends = None if family.is_internal else (min(places), max(places))
    place = family.wavenumber if family.wavenumber is not None else sum(places) / len(places)
    words = f"{family_words(family, HTML)} {HTML.plain(f'{len(bands)}/{family.capacity(technique)}')}"
    return _Target(place, ends, words, tuple(bands), True)


# Drawing


def _panel(
    explanation: Explanation, records: Sequence[Record], technique: str, targets: list[_Target], scale: Scale,
    top: float,
) -> tuple[list[str], float]:  # fmt: skip
    """One technique, and how high it is."""
    mine = _leads(explanation, technique)
    floor = top + 16 + _LABEL + _LEADER + TALL
    row = floor + _AXIS + _FAN
    room = max((symbols_width(target.words, _FONT) for target in targets), default=0.0)
    parts = [
        text(NAMES[technique].capitalize(), SIDE - 8, top + 12, fill=ACCENT, font_size=14, font_style="italic"),
        *_measured(mine, records, technique, scale, floor),
        *axis(scale, floor),
        *_strokes(targets, scale, floor + _AXIS, row),
        *_predicted(targets, scale, row),
    ]
    return parts, row - top + _DROP + room + 8


def _measured(
    mine: Sequence[BandResult], records: Sequence[Record], technique: str, scale: Scale, floor: float
) -> list[str]:
    """Traces or sticks, and the wavenumbers above them."""
    picks = [one.picks for one in records if one.picks is not None and one.picks.spectrum.technique == technique]
    parts = [element_ for one in picks for element_ in trace(one, scale, floor)]
    tops = heights([one.band for one in mine], picks)
    ordered = sorted(zip(mine, tops, strict=True), key=lambda pair: -pair[0].band.wavenumber)
    wanted = [scale.x(one.band.wavenumber) for one, _ in ordered]
    places = _held(spread(wanted, [_SLOT] * len(wanted), 0), scale.width)
    for (one, height), x, place in zip(ordered, wanted, places, strict=True):
        tip = floor - height
        label = floor - TALL - _LEADER
        colour = INK if has_place(one) else ACCENT
        if not picks:
            dash = {} if one.band.intensity is not None else {"stroke_dasharray": "3 2"}
            parts.append(element("line", x1=x, y1=floor, x2=x, y2=tip, stroke=colour, stroke_width=2, **dash))
        leader = path([(x, tip - 2), (x, floor - TALL - 4), (place, label + 3)])
        parts.append(element("path", d=leader, fill="none", stroke=colour, stroke_width=0.8, stroke_opacity=".45"))
        parts.append(_turned(TEXT.plain(number(one.band)), place, label, colour, "start", not has_place(one)))
    return parts


def _turned(words: str, x: float, y: float, colour: str, anchor: str, bold: bool) -> str:
    """Words along a vertical line, read from below."""
    return symbols(
        words, x + 4, y, _FONT, fill=colour, text_anchor=anchor, font_weight="bold" if bold else "normal",
        transform=f"rotate(-90 {x + 4:.1f} {y:.1f})",
    )  # fmt: skip


def _strokes(targets: Sequence[_Target], scale: Scale, start: float, row: float) -> list[str]:
    """From every band to its family."""
    parts = []
    for target in targets:
        colour = INK if target.is_prediction else ACCENT
        for one in target.bands:
            x = scale.x(one.band.wavenumber)
            end = x if target.ends else scale.x(target.wavenumber)
            parts.append(
                element(
                    "path", d=path([(x, start - 4), (x, start + 4), (end, row - 5)]), fill="none", stroke=colour,
                    stroke_width=1, stroke_opacity=".7",
                )
            )  # fmt: skip
    return parts


def _predicted(targets: Sequence[_Target], scale: Scale, row: float) -> list[str]:
    """Marks at the families' wavenumbers, and their words below, moved apart."""
    ordered = sorted(targets, key=lambda target: -target.wavenumber)
    wanted = [scale.x(target.wavenumber) for target in ordered]
    places = _held(spread(wanted, [_SLOT] * len(wanted), 0), scale.width)
    parts = []
    for target, x, place in zip(ordered, wanted, places, strict=True):
        colour = INK if target.is_prediction else ACCENT
        if target.ends:
            left, right = scale.x(target.ends[1]), scale.x(target.ends[0])
            parts.append(
                element(
                    "line", x1=left - 4, y1=row, x2=right + 4, y2=row, stroke=INK, stroke_width=5, stroke_opacity=".3"
                )
            )
        else:
            filled = colour if target.bands else PAPER
            parts.append(element("circle", cx=x, cy=row, r=3.5, fill=filled, stroke=colour, stroke_width=1.2))
        bend = path([(x, row + 5), (x, row + 8), (place, row + _DROP - 6)])
        parts.append(element("path", d=bend, fill="none", stroke=colour, stroke_width=0.8, stroke_opacity=".45"))
        parts.append(_turned(target.words, place, row + _DROP, colour, "end", not target.is_prediction))
    return parts


def _held(places: Sequence[float], width: float) -> list[float]:
    """Moved back where they stand out on one side; together they are never wider than the drawing."""
    held = list(places)
    edge = SIDE / 2 + _SLOT / 2
    for k in range(len(held)):
        held[k] = max(held[k], edge)
        edge = held[k] + _SLOT
    edge = width - SIDE / 2 - _SLOT / 2
    for k in range(len(held) - 1, -1, -1):
        held[k] = min(held[k], edge)
        edge = held[k] - _SLOT
    return held


# Words for those who cannot see it


def _description(explanation: Explanation, shown: Sequence[str]) -> str:
    parts = []
    for technique in shown:
        bands = ", ".join(
            f"{number(one.band)} "
            + (
                family_words(one.placed.family, TEXT)
                if has_place(one) and one.placed.family
                else reason_words(one.reasons[0])
            )
            for one in _leads(explanation, technique)
        )
        parts.append(f"{NAMES[technique].capitalize()}: {bands}.")
    return f"{' '.join(parts)} In cm⁻¹, from high to low."
