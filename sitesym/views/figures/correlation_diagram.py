"""The correlation diagram of one kind of unit: free molecule, site group, factor group, and the lines between them.

Activity is written (I infrared, R Raman) and drawn: borders and lines are solid for infrared, dashed for Raman, double
for both, dotted for silent. A number on a line tells how often one motion becomes the species at its end.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from sitesym.selection import Activity
from sitesym.views.figures.correlation_layers import Box, Layers, Tie, layers_of
from sitesym.views.figures.scene import LegendEntry
from sitesym.views.figures.spread import spread, stacked
from sitesym.views.figures.svg import ACCENT, INK, PAPER, drawing, element, line, number, text
from sitesym.views.figures.typeset import symbols, symbols_width, text_width, wrapped
from sitesym.views.labels import HTML, TEXT, decomposition
from sitesym.views.sentences import infrared_words, raman_words

if TYPE_CHECKING:
    from sitesym.analysis import Analysis, SpeciesRow
    from sitesym.fate import Components
    from sitesym.molecular import MoleculeRow

_WIDTHS = (172.0, 112.0, 136.0)
_BETWEEN = 86.0
_LEFTS = (2.0, 2.0 + 172 + 86, 2.0 + 172 + 86 + 112 + 86)
_SEEN = _LEFTS[2] + _WIDTHS[2] + 12
_HEAD, _TITLE, _AFTER = 50.0, 34.0, 14.0
_LABEL, _SMALL, _ROW = 16.0, 12.5, 15.5
_GAP, _INSIDE = 8.0, 13.0
_MOST_LINES = 3
_NUMBER_AT = 0.28
_LETTER = 16.0


@dataclass(frozen=True, slots=True)
class _Placed:
    """A box with its lines of text, its middle and its size on the page."""

    box: Box
    lines: tuple[str, ...]
    left: float
    middle: float
    width: float

    @property
    def height(self) -> float:
        return _height(self.lines)

    @property
    def top(self) -> float:
        return self.middle - self.height / 2

    @property
    def right(self) -> float:
        return self.left + self.width


@dataclass(frozen=True, slots=True)
class _Section:
    """One set of motions with its three columns placed, from `top` to `bottom`."""

    layers: Layers
    columns: tuple[tuple[_Placed, ...], ...]
    top: float
    bottom: float


def correlation_diagram(analysis: Analysis, row: MoleculeRow, name: str) -> str:
    """The diagram as SVG; `name` makes the ids of the drawing unique on its page."""
    sections: list[_Section] = []
    for layers in layers_of(analysis, row):
        sections.append(_section(layers, sections[-1].bottom if sections else _HEAD))
    width = _SEEN + _seen_width(analysis, sections) + 2
    parts = [*_heads(analysis, row), *(piece for one in sections for piece in _drawn(one, analysis, width))]
    box = (0.0, 0.0, width, sections[-1].bottom if sections else _HEAD)
    return drawing(name, _title(analysis, row), _description(sections, row), box, *parts)


# Places


def _section(layers: Layers, top: float) -> _Section:
    """The tallest column is set close; each box of the others stands beside those that it is tied to."""
    texts = [
        [_lines(box, width, column) for box in boxes]
        for column, (boxes, width) in enumerate(zip((layers.free, layers.site, layers.crystal), _WIDTHS, strict=True))
    ]
    heights = [[_height(lines) for lines in column] for column in texts]
    middles = _middles(layers, heights)
    lowest = min(y - h / 2 for ys, hs in zip(middles, heights, strict=True) for y, h in zip(ys, hs, strict=True))
    highest = max(y + h / 2 for ys, hs in zip(middles, heights, strict=True) for y, h in zip(ys, hs, strict=True))
    start = top + _TITLE - lowest
    columns = tuple(
        tuple(
            _Placed(box, lines, left, middle + start, width)
            for box, lines, middle in zip(boxes, column, ys, strict=True)
        )
        for boxes, column, ys, left, width in zip(
            (layers.free, layers.site, layers.crystal), texts, middles, _LEFTS, _WIDTHS, strict=True
        )
    )
    return _Section(layers, columns, top, top + _TITLE + highest - lowest + _AFTER)


def _lines(box: Box, width: float, column: int) -> tuple[str, ...]:
    """The lines below the species; names in the crystal that would fill a box are left to the table."""
    room = width - 16
    lines = [wrapped(list(parts), _SMALL, room) for parts in box.lines]
    return tuple(one for few in lines if column == 0 or len(few) <= _MOST_LINES for one in few)


def _height(lines: Sequence[str]) -> float:
    return _INSIDE + _LABEL + (_ROW * len(lines) + 2 if lines else 0)


def _middles(layers: Layers, heights: Sequence[Sequence[float]]) -> list[list[float]]:
    lengths = [stacked(column, _GAP)[1] for column in heights]
    down = [(one.start, one.end) for one in layers.down]
    up = [(one.start, one.end) for one in layers.up]
    back_down, back_up = [(j, i) for i, j in down], [(j, i) for i, j in up]
    if lengths[0] >= max(lengths):
        free, _ = stacked(heights[0], _GAP)
        site = _beside(heights[1], free, back_down)
        return [free, site, _beside(heights[2], site, back_up)]
    if lengths[2] >= max(lengths):
        crystal, _ = stacked(heights[2], _GAP)
        site = _beside(heights[1], crystal, up)
        return [_beside(heights[0], site, down), site, crystal]
    site, _ = stacked(heights[1], _GAP)
    return [_beside(heights[0], site, down), site, _beside(heights[2], site, back_up)]


def _beside(heights: Sequence[float], fixed: Sequence[float], pairs: Iterable[tuple[int, int]]) -> list[float]:
    """Middles of boxes as near to the mean of those that they are tied to as they can be."""
    tied: list[list[float]] = [[] for _ in heights]
    for own, other in pairs:
        tied[own].append(fixed[other])
    return spread([sum(ends) / len(ends) for ends in tied], heights, _GAP)


# Drawing


def _heads(analysis: Analysis, row: MoleculeRow) -> list[str]:
    site, crystal = row.units.site_group, analysis.factor_group
    assert site is not None
    heads = [
        (_LEFTS[0], _free_words(row), HTML.schoenflies(row.free.group.schoenflies)),
        (_LEFTS[1], "Site group", HTML.schoenflies(site.schoenflies)),
        (_LEFTS[2], "Factor group", HTML.schoenflies(crystal.schoenflies)),
        (_SEEN, "Seen with", ""),
    ]
    parts = []
    for left, above, below in heads:
        parts.append(symbols(above, left, 14, 13, fill=INK))
        if below:
            parts.append(symbols(below, left, 36, 19, fill=INK))
    return parts


def _free_words(row: MoleculeRow) -> str:
    words = f"Free {HTML.formula(row.name)}"
    return words if symbols_width(words, 13) < _LEFTS[1] - _LEFTS[0] - 10 else "Free unit"


def _drawn(section: _Section, analysis: Analysis, width: float) -> list[str]:
    free, site, crystal = section.columns
    y = section.top
    return [
        line(0, y + 4, width, y + 4, stroke_width=0.6, stroke_opacity=".5"),
        text(section.layers.title, 2, y + 22, fill=ACCENT, font_size=14, font_style="italic"),
        *(_tie(one, free, site) for one in section.layers.down),
        *(_tie(one, site, crystal) for one in section.layers.up),
        *(_times(one, free, site) for one in section.layers.down if one.times > 1),
        *(_times(one, site, crystal) for one in section.layers.up if one.times > 1),
        *(_box(one) for column in section.columns for one in column),
        *(piece for one in crystal for piece in _seen(one, analysis.species_row(one.box.label))),
    ]


def _tie(tie: Tie, starts: Sequence[_Placed], ends: Sequence[_Placed]) -> str:
    start, end = starts[tie.start], ends[tie.end]
    d = f"M{number(start.right)},{number(start.middle)} L{number(end.left)},{number(end.middle)}"
    return _stroke("path", end.box.activity, d=d)


def _times(tie: Tie, starts: Sequence[_Placed], ends: Sequence[_Placed]) -> str:
    """How often, on a disc near the start of the line, where lines to one box do not meet yet."""
    start, end = starts[tie.start], ends[tie.end]
    x = start.right + _NUMBER_AT * (end.left - start.right)
    y = start.middle + _NUMBER_AT * (end.middle - start.middle)
    disc = element("circle", cx=x, cy=y, r=7.5, fill=PAPER)
    return disc + text(str(tie.times), x, y + 4, fill=INK, font_size=_SMALL, text_anchor="middle", font_weight="bold")


def _stroke(shape: str, activity: Activity, **places: str | float) -> str:
    """A path or a border in the manner of its activity."""
    style: dict[str, str | float] = {"stroke": INK, "fill": "none", "stroke_width": 1.3}
    if activity.silent:
        style |= {
            "stroke_dasharray": "0.1 3.6",
            "stroke_linecap": "round",
            "stroke_width": 1.5,
            "stroke_opacity": ".75",
        }
    elif activity.raman and not activity.infrared:
        style |= {"stroke_dasharray": "7 3.5"}
    elif activity.raman:
        inner = element(shape, **places, **(style | {"stroke": PAPER, "stroke_width": 1.7}))
        return element(shape, **places, **(style | {"stroke_width": 4.1})) + inner
    return element(shape, **places, **style)


def _box(placed: _Placed) -> str:
    activity = placed.box.activity
    frame: dict[str, str | float] = {
        "x": placed.left, "y": placed.top, "width": placed.width, "height": placed.height, "rx": 4,
    }  # fmt: skip
    tint = "0" if activity.silent else ".1"
    label = decomposition({placed.box.label: placed.box.count}, HTML)
    base = placed.top + _INSIDE / 2 + _LABEL - 2.5
    return element(
        "g",
        element("rect", **frame, fill=PAPER),
        element("rect", **frame, fill=ACCENT, fill_opacity=tint),
        _stroke("rect", activity, **frame),
        symbols(label, placed.left + 8, base, _LABEL, fill=INK),
        _letters(activity, placed.right - 8, base),
        *(
            text(words, placed.left + 8, base + 3 + _ROW * (row + 1), fill=INK, font_size=_SMALL)
            for row, words in enumerate(placed.lines)
        ),
    )


def _letters(activity: Activity, right: float, base: float) -> str:
    """I and R, each in its place, or the word silent."""
    if activity.silent:
        return text("silent", right, base, fill=INK, font_size=_SMALL, font_style="italic", text_anchor="end")
    style: dict[str, str | float] = {"fill": INK, "font_size": 13.5, "font_weight": "bold", "text_anchor": "middle"}
    letters = [("I", right - 19)] * activity.infrared + [("R", right - 5)] * activity.raman
    return "".join(text(letter, x, base, **style) for letter, x in letters)


def _seen(placed: _Placed, row: SpeciesRow) -> list[str]:
    """Infrared polarization and elements of the Raman tensor, beside their box."""
    lines = _seen_lines(row)
    top = placed.middle - _ROW * (len(lines) - 1) / 2 + 4.5
    return [
        text(letter, _SEEN, top + _ROW * n, fill=INK, font_size=13, font_weight="bold")
        + text(words, _SEEN + _LETTER, top + _ROW * n, fill=INK, font_size=13)
        for n, (letter, words) in enumerate(lines)
    ]


def _seen_lines(row: SpeciesRow) -> list[tuple[str, str]]:
    return [(letter, words) for letter, words in (("I", infrared_words(row)), ("R", raman_words(row))) if words]


def _seen_width(analysis: Analysis, sections: Sequence[_Section]) -> float:
    labels = {placed.box.label for section in sections for placed in section.columns[2]}
    lines = [words for label in labels for _, words in _seen_lines(analysis.species_row(label))]
    return max([_LETTER + text_width(words, 13) for words in lines] + [text_width("Seen with", 13)])


def diagram_key() -> tuple[LegendEntry, ...]:
    """What the borders and lines mean: a sample of each, and words."""
    kinds = (
        (True, False, "I: infrared"), (False, True, "R: Raman"), (True, True, "I R: infrared and Raman"),
        (False, False, "silent: in neither"),
    )  # fmt: skip
    return tuple(LegendEntry(_sample(infrared, raman), words) for infrared, raman, words in kinds)


def _sample(infrared: bool, raman: bool) -> str:
    activity = Activity("A", 1, ("z",) if infrared else (), (), raman, False, False)
    stroke = _stroke("path", activity, d="M1,8 L43,8")
    return element("svg", stroke, viewBox="0 0 44 16", width=44, height=16, class_="swatch", aria_hidden="true")


# Words for those who cannot see it


def _title(analysis: Analysis, row: MoleculeRow) -> str:
    site = row.units.site_group
    assert site is not None
    groups = (row.free.group.schoenflies, site.schoenflies, analysis.factor_group.schoenflies)
    return f"Correlation diagram of {TEXT.formula(row.name)}: {', '.join(TEXT.schoenflies(one) for one in groups)}"


def _description(sections: Sequence[_Section], row: MoleculeRow) -> str:
    fates = {"Internal vibrations": row.fates, "Librations": row.librations, "Translations": row.translations}
    sentences = []
    for section in sections:
        title = section.layers.title
        steps = dict.fromkeys(
            f"{TEXT.species(fate.free.label)} to {_sum(fate.site)} to {_sum(fate.crystal)}" for fate in fates[title]
        )
        sentences.append(f"{title}: {'; '.join(steps)}.")
    return " ".join(sentences)


def _sum(parts: Components) -> str:
    return decomposition({one.label: one.count for one in parts})
