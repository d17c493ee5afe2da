"""A small fragment of HTML for notebooks: the answer and the table of species. `sitesym.views.html` has the whole page.

It carries its few styles on its elements and takes the notebook's own colours; it has no ids, so that many can stand in
one document.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from sitesym.views import sentences
from sitesym.views.labels import HTML

if TYPE_CHECKING:
    from sitesym.analysis import Analysis, SpeciesRow
    from sitesym.structure import OpenQuestion

_CELL = 'style="text-align:left;padding:.15em .8em .15em 0"'
_RULE = 'style="border-top:1px solid;border-bottom:1px solid"'


def summary_html(analysis: Analysis) -> str:
    """Crystal, groups, counts, cautions and species; safe to insert whatever the file says."""
    structure = analysis.structure
    title = " ".join(filter(None, (HTML.formula(analysis.formula), HTML.plain(structure.name))))
    groups = (
        f"{sentences.space_group_words(analysis, HTML)}, factor group {sentences.factor_group_words(analysis, HTML)}"
    )
    counts = "; ".join(f"<b>{row.count}</b> {row.title.lower()}" for row in sentences.count_rows(analysis, HTML))
    return (
        '<div class="sitesym-summary" style="line-height:1.4">'
        f"<p><b>{title}</b><br>{groups}<br>{counts}<br>Axes: {HTML.plain(analysis.axes)}</p>"
        f"{''.join(_caution(question) for question in analysis.cautions)}{_table(analysis)}</div>"
    )


def _caution(question: OpenQuestion) -> str:
    word = "Check first" if question.code in sentences.CHANGES_COUNTS else "Caution"
    return f'<p style="border-left:.3em solid;padding-left:.6em"><b>{word}.</b> {HTML.plain(question.message)}</p>'


def _table(analysis: Analysis) -> str:
    heads = "".join(
        f'<th scope="col" {_CELL}>{head}</th>' for head in ("Species", "Optic", "Acoustic", "Infrared", "Raman")
    )
    rows = "".join(_row(row) for row in analysis.species if row.total)
    return (
        f'<table style="border-collapse:collapse"><caption {_CELL}>Species that occur in this crystal</caption>'
        f"<thead {_RULE}><tr>{heads}</tr></thead><tbody>{rows}</tbody></table>"
    )


def _row(row: SpeciesRow) -> str:
    raman = sentences.raman_or_silent(row) or "–"
    cells = (str(row.optic), str(row.acoustic), sentences.infrared_words(row) or "–", raman)
    data = "".join(f"<td {_CELL}>{HTML.plain(cell)}</td>" for cell in cells)
    return f'<tr><th scope="row" {_CELL}>{HTML.species(row.label)}</th>{data}</tr>'
