"""The report as one self-contained HTML page: no script, no download, for screen (light, dark, small, wide) and print.

The page is a list of parts, each a template of its own in `templates/parts`. A new section is an entry in `PARTS`, a
template, and what it shows under the part's name in `_CONTENTS`. Everything is escaped: by the templates, or by the
functions of `sitesym.views.labels` that set symbols.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from sitesym.version import __version__
from sitesym.views import sentences
from sitesym.views.band_summary import LEGEND, band_lines
from sitesym.views.html_molecules import molecules_part, origins_part
from sitesym.views.labels import HTML
from sitesym.views.method import paragraphs, references
from sitesym.views.tables import site_table, tensor_groups
from sitesym.views.templating import environment, ready
from sitesym.views.units_formula import units_entries

if TYPE_CHECKING:
    from sitesym.analysis import Analysis
    from sitesym.molecule_analysis import MoleculeAnalysis, MoleculeComparison

Values = dict[str, Any]


@dataclass(frozen=True, slots=True)
class Part:
    """One section of the page: `name` is its template and its anchor, `contents` makes what the template shows.

    A part without contents (None) is left out.
    """

    name: str
    title: str
    contents: Callable[[Analysis], Values | None]


def render(analysis: Analysis) -> str:
    """The page, under the name that all views share."""
    return page(analysis)


def render_molecule(result: MoleculeAnalysis) -> str:
    """The page on a molecule alone."""
    from sitesym.views.html_free_molecule import molecule_page

    return molecule_page(result)


def render_comparison(result: MoleculeComparison) -> str:
    """The page on two molecules side by side."""
    from sitesym.views.html_free_molecule import comparison_page

    return comparison_page(result)


def page(analysis: Analysis) -> str:
    """The whole report as an HTML document in one string, to be written as UTF-8."""
    shown = [(part, contents) for part in PARTS if (contents := part.contents(analysis)) is not None]
    structure = analysis.structure
    return environment().get_template("page.html").render(
        parts=shown,
        structure=structure,
        title=f"{analysis.formula}, {sentences.space_group_words(analysis)}",
        compound=analysis.formula,
        space_group=analysis.space_group,
        factor_group=analysis.factor_group.schoenflies,
        serious=sentences.serious_cautions(analysis),
        others=sentences.other_cautions(analysis),
        version=__version__,
    )  # fmt: skip


def _answer(analysis: Analysis) -> Values:
    return {
        "rows": [(row, ready(row.species)) for row in sentences.count_rows(analysis, HTML)],
        "optic": ready(sentences.optic_sum(analysis, HTML)),
        "acoustic": ready(sentences.acoustic_sum(analysis, HTML)),
        "space_group": ready(sentences.space_group_words(analysis, HTML)),
        "factor_group": ready(sentences.factor_group_words(analysis, HTML)),
        "axes": analysis.axes,
        "atoms": sentences.atoms_words(analysis),
        "exclusion": ready(sentences.exclusion(analysis, HTML)),
        "bands": [ready(line) for line in band_lines(analysis, HTML)],
        "bands_legend": LEGEND,
        "units": ready("; ".join(units_entries(analysis, HTML))),
    }


def _cell(analysis: Analysis) -> Values:
    import numpy as np

    from sitesym.views.figures import cell_picture

    lattice = analysis.symmetry.lattice
    lengths = np.linalg.norm(lattice, axis=1)
    cosines = (lattice / lengths[:, None]) @ (lattice / lengths[:, None]).T
    angles = np.degrees(np.arccos(np.clip(cosines[[1, 2, 0], [2, 0, 1]], -1, 1)))
    return {
        "picture": cell_picture(analysis),
        "lengths": list(zip("abc", lengths.tolist(), strict=True)),
        "angles": list(zip("αβγ", angles.tolist(), strict=True)),
        "axes": analysis.axes,
        "declared": ready(sentences.declared_words(analysis, HTML)),
    }


def _species(analysis: Analysis) -> Values:
    exclusion = sentences.exclusion(analysis, HTML)  # stands beside the counts already
    return {
        "rows": [
            (row, sentences.infrared_words(row), sentences.raman_words(row), sentences.resonance_words(row))
            for row in analysis.species
        ],
        "all": sum(row.total for row in analysis.species),
        "acoustic": sum(row.acoustic for row in analysis.species),
        "totals": analysis.totals,
        "origins": origins_part(analysis),
        "notes": [ready(note) for note in sentences.notes(analysis, HTML) if note != exclusion],
    }


def _tensors(analysis: Analysis) -> Values | None:
    groups = tensor_groups(analysis)
    return {"groups": groups, "axes": analysis.axes} if groups else None


def _sites(analysis: Analysis) -> Values:
    return {"table": site_table(analysis), "ordered": analysis.is_ordered}


def _tolerance(analysis: Analysis) -> Values | None:
    if analysis.scan is None:
        return None
    from sitesym.views.figures import scan_drawing

    return {
        "drawing": scan_drawing(analysis),
        "runs": sentences.scan_runs(analysis),
        "plateau": analysis.scan.plateau,
        "supergroup": analysis.scan.supergroup,
    }


def _settings(analysis: Analysis) -> Values | None:
    if not analysis.settings:
        return None
    return {"rows": analysis.settings, "note": ready(sentences.permutation_note(analysis, HTML))}


def _method(analysis: Analysis) -> Values:
    return {
        "paragraphs": [(one.heading, ready(one.text)) for one in paragraphs(analysis, HTML)],
        "references": references(analysis),
    }


PARTS = (
    Part("answer", "Answer", _answer),
    Part("cell", "Crystal", _cell),
    Part("species", "Species", _species),
    Part("molecules", "Molecules and ions", molecules_part),
    Part("tensors", "Raman tensors", _tensors),
    Part("sites", "Sites", _sites),
    Part("tolerance", "Tolerance", _tolerance),
    Part("settings", "Other settings", _settings),
    Part("method", "Method", _method),
)
"""The sections in reading order."""
