"""A comparison of two structures as one self-contained HTML page, in the style of the report."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import TYPE_CHECKING

from sitesym.comparison.result import TECHNIQUES
from sitesym.version import __version__
from sitesym.views import compare_words as words
from sitesym.views.blocks import Block, Table
from sitesym.views.compare_blocks import blocks, cautions
from sitesym.views.labels import HTML, TEXT
from sitesym.views.templating import environment, ready

if TYPE_CHECKING:
    from sitesym.comparison import Comparison
    from sitesym.views.figures import Picture

_NAMES = {
    "Distinct frequencies, and the primitive cell": ("counts", "Counts"),
    "Where the child's active modes come from": ("origin", "Active modes"),
    "Zone-centre species": ("species", "Species"),
    "Wavevectors that fold to the zone centre": ("folding", "Folding"),
    "Sites": ("sites", "Sites"),
    "Notes": ("notes", "Notes"),
    "Cautions": ("cautions", "Cautions"),
    "Method": ("method", "Method"),
}
"""Title of a block -> anchor and heading of its section."""
_CAPTIONS = {
    "counts": "Distinct optic frequencies (a degenerate mode counts once), and what is in the primitive cell.",
    "origin": "The child's frequencies by what they are in the parent.",
    "species": "What one mode of each species becomes, and which parts are seen only in the child.",
    "folding": "Wavevectors of the parent, in units of a*, b*, c* and of the reciprocal of the primitive vectors; how "
    "far the atoms of one child cell moved with each, as root of summed squares.",
    "sites": "Sites and their groups, parent and child.",
}


@dataclass(frozen=True, slots=True)
class Crystal:
    """One of the two structures: role, ready HTML of what it is, where it was read from, and its picture."""

    role: str
    words: str
    source: str
    picture: Picture


@dataclass(frozen=True, slots=True)
class Section:
    """One section of the page, its text ready for HTML; heads and cells with whether they are numbers."""

    name: str
    title: str
    caption: str
    heads: tuple[tuple[str, bool], ...]
    rows: tuple[tuple[tuple[str, bool], ...], ...]
    notes: tuple[str, ...]
    cautions: tuple[str, ...]


def render(result: Comparison) -> str:
    """The page as an HTML document in one string, to be written as UTF-8."""
    head, *others = blocks(result, HTML)
    sections = [_section(block) for block in others if block.table or block.notes or block.cautions]
    return environment().get_template("compare.html").render(
        title=words.title(result, TEXT),
        heading=ready(words.title(result, HTML)),
        paragraph=ready(words.paragraph(result, HTML)),
        tally=_tally(result),
        serious=_ready(cautions(result, HTML, serious=True)),
        fields=[(ready(name), ready(text)) for name, text in head.fields],
        crystals=_crystals(result),
        parts=[(one, one) for one in (_Anchor("answer", "Answer"), _Anchor("cells", "Cells"), *sections)],
        sections=sections,
        version=__version__,
    )  # fmt: skip


@dataclass(frozen=True, slots=True)
class _Anchor:
    name: str
    title: str


def _tally(result: Comparison) -> list[tuple[str, str, str]]:
    """Infrared and Raman: frequencies of parent and child, and what is new."""
    between = " → " if result.embedding else " | "
    rows = []
    for technique in TECHNIQUES:
        counts = (str(getattr(one.totals, technique)) for one in (result.parent, result.child))
        new = sum(result.new(technique).values())
        rows.append((words.NAMES[technique], between.join(counts), f"{new} newly active" if new else ""))
    return rows


def _crystals(result: Comparison) -> list[Crystal]:
    from sitesym.views.figures import cell_picture

    pair = (("Parent", result.parent), ("Child", result.child))
    return [
        Crystal(role, ready(words.who(one, HTML)), one.structure.source, cell_picture(one, f"cell-{role.lower()}"))
        for role, one in pair
    ]


def _section(block: Block) -> Section:
    name, title = _NAMES[block.title]
    heads, rows = _grid(block.table) if block.table else ((), ())
    return Section(name, title, _CAPTIONS.get(name, ""), heads, rows, _ready(block.notes), _ready(block.cautions))


def _grid(found: Table) -> tuple[tuple[tuple[str, bool], ...], tuple[tuple[tuple[str, bool], ...], ...]]:
    numbers = [side == ">" for side in found.align]
    rows = tuple(tuple(zip(_ready(cells), numbers, strict=True)) for cells in found.rows)
    return tuple(zip(_ready(found.header), numbers, strict=True)), rows


def _ready(texts: Iterable[str]) -> tuple[str, ...]:
    return tuple(map(ready, texts))
