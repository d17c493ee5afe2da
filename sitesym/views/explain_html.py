"""An explanation of bands as one self-contained HTML page, in the style of the report: no script, no download.

Everything is escaped: by the template, or by the functions that set symbols.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from sitesym.bands.measurement import TECHNIQUES
from sitesym.version import __version__
from sitesym.views import explain_words as words
from sitesym.views import sentences
from sitesym.views.explain_method import explain_paragraphs, explain_references
from sitesym.views.explain_paragraph import paragraph
from sitesym.views.labels import HTML, TEXT, decomposition
from sitesym.views.templating import environment, ready

if TYPE_CHECKING:
    from sitesym.bands.explanation import BandResult, Explanation
    from sitesym.bands.inventory import Family
    from sitesym.bands.reading import Record


@dataclass(frozen=True, slots=True)
class _Anchor:
    """A section of the page: its anchor and heading."""

    name: str
    title: str


@dataclass(frozen=True, slots=True)
class FamilyRow:
    """One family of the predictions, ready for the page."""

    name: str
    free: str
    place: str
    components: str
    raman: str
    infrared: str


_SECTIONS = (
    _Anchor("answer", "Answer"), _Anchor("spectrum", "Spectrum"), _Anchor("bands", "Bands"),
    _Anchor("arguments", "Arguments"), _Anchor("missing", "Not seen"), _Anchor("lowering", "Lower symmetry"),
    _Anchor("coincidences", "Infrared against Raman"), _Anchor("predicted", "Predicted"), _Anchor("files", "Files"),
    _Anchor("method", "Method"),
)  # fmt: skip


def render(explanation: Explanation, records: Sequence[Record] = ()) -> str:
    """The page as an HTML document in one string, to be written as UTF-8."""
    from sitesym.views.figures.band_spectrum import band_spectrum

    analysis = explanation.analysis
    notes = {
        "missing": words.missing_notes(explanation, HTML),
        "lowering": words.lowering_notes(explanation, HTML),
        "coincidences": words.coincidence_notes(explanation, HTML),
    }
    empty = {name for name, found in notes.items() if not found} | (set() if records else {"files"})
    shown = [one for one in _SECTIONS if one.name not in empty]
    return environment().get_template("explain.html").render(
        title=f"Bands of {words.title(explanation, TEXT)}",
        compound=words.compound_of(explanation),
        structure=analysis.structure,
        crystal=ready(sentences.space_group_words(analysis, HTML)),
        factor_group=analysis.factor_group.schoenflies,
        paragraph=ready(paragraph(explanation, HTML)),
        tally=_tally(explanation),
        serious=sentences.serious_cautions(analysis),
        others=sentences.other_cautions(analysis),
        drawing=band_spectrum(explanation, records),
        has_spectrum=any(record.picks is not None for record in records),
        rows=[_ready_row(one) for one in words.band_rows(explanation, HTML)],
        arguments=[_ready_arguments(one) for one in words.arguments(explanation, HTML)],
        notes={name: tuple(map(ready, found)) for name, found in notes.items()},
        families=[_family(one) for one in explanation.families],
        records=records,
        paragraphs=[(one.heading, ready(one.text)) for one in explain_paragraphs(explanation, records, HTML)],
        references=explain_references(records),
        parts=[(one, None) for one in shown],
        sections={one.name: one.title for one in shown},
        version=__version__,
    )  # fmt: skip


def _tally(explanation: Explanation) -> list[tuple[str, str, str]]:
    """For each technique bands and how many have a place; then those left over."""
    rows = []
    others: list[BandResult] = []
    for technique in TECHNIQUES:
        mine = words.of(explanation, technique)
        if mine:
            leads = [members[0] for members in words.modes(mine)]
            placed = sum(words.has_place(one) for one in leads)
            others += [one for one in leads if not words.has_place(one)]
            rows.append((words.NAMES[technique].capitalize(), str(len(leads)), f"{placed} fundamentals or components"))
    unexplained = sum(one.reasons[0].cause == "unexplained" for one in others)
    rows.append(("Others", str(len(others)), f"{unexplained or 'none'} of them unexplained" if others else ""))
    return rows


def _ready_row(row: words.BandRow) -> words.BandRow:
    return replace(
        row, technique=ready(row.technique), place=ready(row.place), reason=ready(row.reason),
        geometry=ready(row.geometry), species=ready(row.species), doubt=ready(row.doubt), note=ready(row.note),
    )  # fmt: skip


def _ready_arguments(one: words.Arguments) -> words.Arguments:
    reasons = tuple(words.Argument(*map(ready, (each.cause, each.words, each.test))) for each in one.reasons)
    return words.Arguments(ready(one.head), reasons)


def _family(family: Family) -> FamilyRow:
    components = {one.label: one.count for one in family.components}
    low, high = family.window
    place = f"{family.wavenumber:g}" if family.wavenumber is not None else f"{low:.0f} to {high:.0f}"
    free = HTML.species(family.free_species) if family.free_species else ""
    counts = (str(family.capacity(technique) or "") for technique in TECHNIQUES)
    return FamilyRow(
        ready(words.family_words(family, HTML)), ready(free), place, ready(decomposition(components, HTML)), *counts
    )
