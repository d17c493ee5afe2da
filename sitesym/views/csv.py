"""Several tables as comma-separated values in one text, an empty line between two, each with its own head.

They are species (head begins `species,`), sites (`label,`), the correlation of molecules (`molecule,`) and cautions
(`code,message`). The third is the correlation diagram: one row for each path from a species of the free unit by way of
the site to a species of the crystal; it is left out where there are no molecules. The cautions are always there: no row
below their head says that there is none.

Names in structure files are written by strangers, and a spreadsheet runs what begins like a formula: a text cell that
begins with one of = + - @, a tab or a carriage return gets an apostrophe in front (common practice). Symbols of groups
such as -3m begin with a sign too, but are no formulas: they stay as they are.
"""

from __future__ import annotations

import csv
import io
import re
from collections.abc import Iterable
from typing import TYPE_CHECKING

from sitesym.views.labels import printable
from sitesym.views.molecule_json import ascii_words
from sitesym.views.molecule_sentences import ORIGINS
from sitesym.views.molecule_tables import Path, molecules, paths
from sitesym.views.sentences import infrared_words, raman_words, resonance_words

if TYPE_CHECKING:
    from sitesym.analysis import Analysis, SiteRow, SpeciesRow
    from sitesym.molecule_analysis import MoleculeAnalysis, MoleculeComparison
    from sitesym.structure import OpenQuestion

Cell = str | int | float
_FORMULA = ("=", "+", "-", "@", "\t", "\r")
_GROUP_SYMBOL = re.compile(r"-(1|3|4|6|8|10|12)[m0-9.]*")
"""Hermann-Mauguin symbols of point groups that begin with a rotoinversion: digits, m and dots hold no formula."""

SPECIES_COLUMNS = (
    "species", "dimension", "total", "acoustic", "optic", "infrared", "raman", "hyper_raman", "silent",
    "infrared_polarization", "raman_elements", "resonance_elements", *ORIGINS,
)  # fmt: skip
SITE_COLUMNS = (
    "label", "element", "occupancy", "wyckoff", "multiplicity", "count_primitive", "site_group", "site_group_symbol",
    "x", "y", "z",
)  # fmt: skip
MOLECULE_COLUMNS = (
    "molecule", "formula", "first_atom", "count_primitive", "free_group", "site_group", "site_group_symbol",
    "factor_group", "motion", "kind", "names", "wavenumbers", "free_species", "free_count", "free_infrared",
    "free_raman", "site_species", "site_count", "site_infrared", "site_raman", "crystal_species", "crystal_count",
    "infrared", "raman", "infrared_polarization",
)  # fmt: skip
CAUTION_COLUMNS = ("code", "message")


def render(analysis: Analysis) -> str:
    """All tables as one text."""
    tables = [species_table(analysis), sites_table(analysis)]
    if molecules(analysis):
        tables.append(molecules_table(analysis))
    tables.append(cautions_table(analysis.cautions))
    return "\n".join(tables)


def render_molecule(result: MoleculeAnalysis) -> str:
    """The vibrations of a free molecule, one row for each species and kind; then the cautions."""
    from sitesym.views.free_molecule_data import VIBRATION_COLUMNS, vibration_rows

    return "\n".join((table(VIBRATION_COLUMNS, vibration_rows(result)), cautions_table(result.cautions)))


def render_comparison(result: MoleculeComparison) -> str:
    """Numbers of bands of two free molecules side by side; then the cautions."""
    from sitesym.views.free_molecule_data import COMPARISON_COLUMNS, comparison_cautions, comparison_rows

    return "\n".join((table(COMPARISON_COLUMNS, comparison_rows(result)), cautions_table(comparison_cautions(result))))


def species_table(analysis: Analysis) -> str:
    """One row a species of the factor group, those without modes included."""
    origins = analysis.molecular.origins if analysis.molecular else {}
    rows = [
        (*_species_cells(row), *(getattr(origins[row.label], name) if origins else "" for name in ORIGINS))
        for row in analysis.species
    ]
    return table(SPECIES_COLUMNS, rows)


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
    return table((*SITE_COLUMNS, *labels), rows)


def _site_cells(row: SiteRow) -> tuple[Cell, ...]:
    x, y, z = (round(value, 6) + 0.0 for value in row.position)
    return (
        row.label, row.element, row.occupancy, row.wyckoff, row.multiplicity, row.count, row.group.schoenflies,
        row.symbol, x, y, z,
    )  # fmt: skip


def molecules_table(analysis: Analysis) -> str:
    """One row a path of the correlation diagrams. `crystal_count` is that of one motion and one species of the site."""
    rows = [
        _path_cells(analysis, number, path)
        for number, row in enumerate(molecules(analysis), start=1)
        for path in paths(row)
    ]
    return table(MOLECULE_COLUMNS, rows)


def _path_cells(analysis: Analysis, number: int, path: Path) -> tuple[Cell, ...]:
    row, stages = path.molecule, (path.free, path.site, path.crystal)
    assert row.units.site_group is not None
    activity = [(_yes(one.activity.infrared), _yes(one.activity.raman)) for one in stages]
    return (
        number, row.name, next(iter(row.units.unit.labels), ""), row.units.count,
        ascii_words(row.free.group.schoenflies), row.units.site_group.schoenflies, row.symbol,
        analysis.factor_group.schoenflies, path.motion, path.kind, ascii_words(path.names),
        " ".join(f"{value:g}" for value in path.wavenumbers), path.free.label, path.free.count, *activity[0],
        path.site.label, path.site.count, *activity[1], path.crystal.label, path.crystal.count, *activity[2],
        _ascii(infrared_words(analysis.species_row(path.crystal.label))),
    )  # fmt: skip


def cautions_table(cautions: Iterable[OpenQuestion]) -> str:
    """One row a caution, the most serious first; the head alone where there is none."""
    return table(CAUTION_COLUMNS, [(one.code, one.message) for one in cautions])


def _ascii(words: str) -> str:
    """Our own words without the signs that a spreadsheet misreads when it guesses the encoding."""
    return words.replace("∥", "||").replace("−", "-")


def _yes(answer: bool) -> str:
    return "yes" if answer else "no"


def table(header: tuple[str, ...], rows: Iterable[tuple[Cell, ...]]) -> str:
    """One table as text: names of the columns, then the rows, text made harmless for spreadsheets."""
    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow(header)
    writer.writerows([_safe(cell) for cell in row] for row in rows)
    return stream.getvalue()


def _safe(cell: Cell) -> Cell:
    """Text that no spreadsheet takes for a formula; numbers as they are."""
    if not isinstance(cell, str):
        return cell
    if _GROUP_SYMBOL.fullmatch(cell):
        return cell
    text = printable(cell)
    return f"'{text}" if cell.startswith(_FORMULA) or text.lstrip().startswith(_FORMULA) else text
