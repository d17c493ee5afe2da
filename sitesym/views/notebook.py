"""Small fragments of HTML for notebooks: of an analysis, a molecule, a structure. `sitesym.views.html` has whole pages.

They carry their few styles on their elements and take the notebook's own colours; they have no ids, so that many can
stand in one document.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from sitesym.views import sentences
from sitesym.views.labels import HTML

if TYPE_CHECKING:
    from sitesym.analysis import Analysis, SpeciesRow
    from sitesym.molecule_analysis import MoleculeAnalysis
    from sitesym.structure import OpenQuestion, Structure

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


def molecule_html(result: MoleculeAnalysis) -> str:
    """Formula, point group, counts, cautions and the vibrations of a free molecule, likewise safe."""
    from sitesym.views.free_molecule import title, vibration_table

    found = result.counts
    counts = "; ".join(
        f"<b>{number}</b> {name}"
        for number, name in (
            (found.infrared, "infrared"), (found.raman, "Raman"), (found.both, "both"), (found.silent, "silent"),
        )
    )  # fmt: skip
    table = vibration_table(result, HTML)
    heads = "".join(f'<th scope="col" {_CELL}>{head}</th>' for head in table.header)
    rows = "".join(f"<tr>{''.join(f'<td {_CELL}>{cell}</td>' for cell in row)}</tr>" for row in table.rows)
    shown = (
        f'<table style="border-collapse:collapse"><caption {_CELL}>Vibrations by species and kind</caption>'
        f"<thead {_RULE}><tr>{heads}</tr></thead><tbody>{rows}</tbody></table>"
    )
    return (
        '<div class="sitesym-summary" style="line-height:1.4">'
        f"<p><b>{title(result, HTML)}</b><br>Point group {HTML.schoenflies(result.point_group)}<br>{counts}</p>"
        f"{''.join(_caution(question) for question in result.cautions)}{shown if rows else ''}</div>"
    )


def structure_html(structure: Structure) -> str:
    """Formula, name, number of sites, cell and what the reader found doubtful, likewise safe."""
    import numpy as np

    title = " ".join(filter(None, (HTML.formula(structure.formula), HTML.plain(structure.name))))
    lengths = np.linalg.norm(structure.lattice, axis=1)
    unit = structure.lattice / lengths[:, None]
    cosines = np.einsum("ij,ij->i", unit[[1, 2, 0]], unit[[2, 0, 1]])
    angles = np.degrees(np.arccos(np.clip(cosines, -1, 1)))
    cell = ", ".join(f"{name} {value:.4f} Å" for name, value in zip("abc", lengths, strict=True))
    corners = ", ".join(f"{name} {value:.2f}°" for name, value in zip("αβγ", angles, strict=True))
    source = " ".join(filter(None, (structure.source, f"({structure.format})" if structure.format else "")))
    return (
        '<div class="sitesym-summary" style="line-height:1.4">'
        f"<p><b>{title}</b><br>{len(structure)} sites in the cell<br>{cell}<br>{corners}<br>{HTML.plain(source)}</p>"
        f"{''.join(_caution(question) for question in structure.questions)}</div>"
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
