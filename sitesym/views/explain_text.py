"""An explanation of bands as plain text for a terminal of 80 columns: first a paragraph for a draft, then the table."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from sitesym.views.explain_method import explain_paragraphs, explain_references
from sitesym.views.explain_paragraph import paragraph
from sitesym.views.explain_words import (
    Argument,
    arguments,
    band_rows,
    coincidence_notes,
    lowering_notes,
    missing_notes,
    title,
)
from sitesym.views.labels import printable
from sitesym.views.layout import WIDTH, ZERO, clip, table, wrap

if TYPE_CHECKING:
    from sitesym.bands.explanation import Explanation
    from sitesym.bands.reading import Record


def render(explanation: Explanation, records: Sequence[Record] = ()) -> str:
    """The whole explanation, ending in a line feed. `records` are the files that the bands come from."""
    sections = (
        ("Bands", _bands(explanation)),
        ("Arguments, and what would decide", _arguments(explanation)),
        ("Allowed but not seen", _notes(missing_notes(explanation))),
        ("Which loss of symmetry would do", _notes(lowering_notes(explanation))),
        ("Infrared against Raman", _notes(coincidence_notes(explanation))),
        ("Files", _files(records)),
        ("Cautions", _cautions(explanation)),
        ("Method", _method(explanation, records)),
    )
    lines = [clip(title(explanation), WIDTH), "", *wrap(paragraph(explanation))]
    for name, body in sections:
        if body:
            lines += ["", name, "─" * len(name), *body]
    return "\n".join(line.rstrip() for line in lines) + "\n"


def _bands(explanation: Explanation) -> list[str]:
    """Band by band: place, first reason, its species, and what else is worth a thought."""
    header: tuple[str, ...] = ("cm⁻¹", "±", "in", "geometry", "place", "first reason", "species", "or")
    rows: list[tuple[str, ...]] = [
        (
            row.wavenumber, row.uncertainty, row.technique, row.geometry or ZERO, row.place or ZERO, row.reason,
            row.species or ZERO, row.doubt,
        )
        for row in band_rows(explanation)
    ]  # fmt: skip
    if not any(one.band.geometry for one in explanation.bands):
        header, rows = (*header[:3], *header[4:]), [(*row[:3], *row[4:]) for row in rows]
        return table([header, *rows], ">><<<<<", shrink=(3, 6, 4))
    return table([header, *rows], ">><<<<<<", shrink=(4, 7, 5))


def _arguments(explanation: Explanation) -> list[str]:
    lines: list[str] = []
    for one in arguments(explanation):
        lines += [*([""] if lines else []), *wrap(one.head)]
        for number, reason in enumerate(one.reasons, start=1):
            lines += _argument(number, reason)
    return lines


def _argument(number: int, reason: Argument) -> list[str]:
    words = f"{reason.cause}: {reason.words}." if reason.words else f"{reason.cause}."
    test = wrap(reason.test, indent=" " * 12, first="      test: ") if reason.test else []
    return [*wrap(words, indent=" " * 6, first=f"  {number:>2}. "), *test]


def _notes(notes: Sequence[str]) -> list[str]:
    return [line for note in notes for line in wrap(note, indent="  ", first="- ")]


def _files(records: Sequence[Record]) -> list[str]:
    return _notes([printable(f"{one.source}: {'; '.join(one.notes) or f'{len(one.bands)} bands'}") for one in records])


def _cautions(explanation: Explanation) -> list[str]:
    return [
        line
        for one in explanation.analysis.cautions
        for line in wrap(printable(one.message), indent="    ", first="  ! ")
    ]


def _method(explanation: Explanation, records: Sequence[Record]) -> list[str]:
    lines: list[str] = []
    for one in explain_paragraphs(explanation, records):
        lines += [*wrap(f"{one.heading}. {one.text}"), ""]
    for number, reference in enumerate(explain_references(records), start=1):
        lines += wrap(reference, indent="     ", first=f"{f'[{number}]':<5}")
    return lines
