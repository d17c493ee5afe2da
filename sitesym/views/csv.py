"""Two tables as comma-separated values: the species, then, after an empty line, the sites.

Names in structure files are written by strangers, and a spreadsheet runs what begins like a formula: a text cell that
begins with one of = + - @, a tab or a carriage return gets an apostrophe in front (common practice).
"""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable
from typing import TYPE_CHECKING

from sitesym.views.labels import printable
from sitesym.views.sentences import infrared_words, raman_words, resonance_words

if TYPE_CHECKING:
    from sitesym.analysis import Analysis, SiteRow, SpeciesRow

Cell = str | int | float
_FORMULA = ("=", "+", "-", "@", "\t", "\r")

SPECIES_COLUMNS = (
    "species", "dimension", "total", "acoustic", "optic", "infrared", "raman", "hyper_raman", "silent",
    "infrared_polarization", "raman_elements", "resonance_elements",
)  # fmt: skip
SITE_COLUMNS = (
    "label", "element", "occupancy", "wyckoff", "multiplicity", "count_primitive", "site_group", "site_group_symbol",
    "x", "y", "z",
)  # fmt: skip


def render(analysis: Analysis) -> str:
    """Both tables as one text."""
    return f"{species_table(analysis)}\n{sites_table(analysis)}"


def species_table(analysis: Analysis) -> str:
    """One row a species of the factor group, those without modes included."""
    return _table(SPECIES_COLUMNS, map(_species_cells, analysis.species))


def _species_cells(row: SpeciesRow) -> tuple[Cell, ...]:
    rules = row.activity
    return (
        row.label, row.dimension, row.total, row.acoustic, row.optic, _yes(rules.infrared), _yes(rules.raman),
        _yes(rules.hyper_raman), _yes(rules.silent), _ascii(infrared_words(row)), _ascii(raman_words(row)),
        _ascii(resonance_words(row)),
    )  # fmt: skip


def sites_table(analysis: Analysis) -> str:
    """One row a set of equivalent sites, with one column for what it contributes to each species."""
    labels = tuple(row.label for row in analysis.species)
    rows = [(*_site_cells(row), *(row.contribution.get(label, 0) for label in labels)) for row in analysis.sites]
    return _table((*SITE_COLUMNS, *labels), rows)


def _site_cells(row: SiteRow) -> tuple[Cell, ...]:
    x, y, z = (round(value, 6) + 0.0 for value in row.position)
    return (
        row.label, row.element, row.occupancy, row.wyckoff, row.multiplicity, row.count, row.group.schoenflies,
        row.symbol, x, y, z,
    )  # fmt: skip


def _ascii(words: str) -> str:
    """Our own words without the signs that a spreadsheet misreads when it guesses the encoding."""
    return words.replace("∥", "||").replace("−", "-")


def _yes(answer: bool) -> str:
    return "yes" if answer else "no"


def _table(header: tuple[str, ...], rows: Iterable[tuple[Cell, ...]]) -> str:
    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow(header)
    writer.writerows([_safe(cell) for cell in row] for row in rows)
    return stream.getvalue()


def _safe(cell: Cell) -> Cell:
    """Text that no spreadsheet takes for a formula; numbers as they are."""
    if not isinstance(cell, str):
        return cell
    text = printable(cell)
    return f"'{text}" if cell.startswith(_FORMULA) or text.lstrip().startswith(_FORMULA) else text
