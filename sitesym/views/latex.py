"""Tables of the report for a paper: LaTeX table environments that need no package and compile with every engine."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING

from sitesym.tensors import element_expressions
from sitesym.version import __version__
from sitesym.views import molecule_sentences, molecule_tables, sentences
from sitesym.views.labels import LATEX, decomposition
from sitesym.views.method import paragraphs, references
from sitesym.views.units_formula import units_entries

if TYPE_CHECKING:
    from sitesym.analysis import Analysis, SiteRow, SpeciesRow
    from sitesym.molecular import MoleculeRow
    from sitesym.molecule_analysis import MoleculeAnalysis, MoleculeComparison

_plain = LATEX.plain


def render(analysis: Analysis) -> str:
    """Tables of species, sites, tensors and, for orthorhombic crystals, settings, then the method as text."""
    parts = [
        [f"% Tables by sitesym {__version__}. Put them into the body of a document; no package is needed."],
        _cautions(analysis),
        _species_table(analysis),
        _list("Notes:", sentences.notes(analysis, LATEX)),
        _origins(analysis),
        *_molecules(analysis),
        _bands(analysis),
        _sites_table(analysis),
        _contributions(analysis),
        _tensors(analysis),
        _settings(analysis),
        _method(analysis),
    ]
    return "\n\n".join("\n".join(part) for part in parts if part) + "\n"


def render_molecule(result: MoleculeAnalysis) -> str:
    """The report on a free molecule."""
    from sitesym.views.blocks import as_latex
    from sitesym.views.free_molecule import blocks, title

    return as_latex(title(result, LATEX), blocks(result, LATEX))


def render_comparison(result: MoleculeComparison) -> str:
    """The report on two free molecules side by side."""
    from sitesym.views.blocks import as_latex
    from sitesym.views.free_molecule import comparison_blocks, comparison_title

    return as_latex(comparison_title(result, LATEX), comparison_blocks(result, LATEX))


def _cautions(analysis: Analysis) -> list[str]:
    """The cautions as a list in the text: they must not get lost on the way into a paper."""
    return _list("Cautions:", (_plain(one.message) for one in analysis.cautions))


def _list(title: str, items: Iterable[str], kind: str = "itemize") -> list[str]:
    lines = [f"  \\item {item}" for item in items]
    return [f"\\noindent {title}", f"\\begin{{{kind}}}", *lines, f"\\end{{{kind}}}"] if lines else []


def _crystal(analysis: Analysis) -> str:
    names = filter(None, (LATEX.formula(analysis.formula), _plain(analysis.structure.name)))
    return f"{' '.join(names)}, {sentences.space_group_words(analysis, LATEX)}"


def _table(caption: str, columns: str, header: Sequence[str], rows: Iterable[Sequence[str]]) -> list[str]:
    """A table environment; cells and caption are LaTeX already, a row without cells is a rule."""
    lines = [f"{' & '.join(row)} \\\\" if row else "\\hline" for row in (header, (), *rows)]
    return [
        "\\begin{table}",
        f"\\caption{{{caption}}}",
        "\\centering",
        f"\\begin{{tabular}}{{{columns}}}",
        "\\hline",
        *lines,
        "\\hline",
        "\\end{tabular}",
        "\\end{table}",
    ]


def _species_table(analysis: Analysis) -> list[str]:
    counts = ", ".join(
        f"{row.title.lower() if row.key != 'raman' else row.title} {row.count}"
        for row in sentences.count_rows(analysis)
    )
    caption = (
        f"Zone-centre modes of {_crystal(analysis)}, factor group {sentences.factor_group_words(analysis, LATEX)}. "
        f"$\\Gamma_\\mathrm{{optic}}$ = {sentences.optic_sum(analysis, LATEX)}. Distinct frequencies: {counts}. "
        f"Axes: {_plain(analysis.axes)}."
    )
    header = ("species", "total", "acoustic", "optic", "infrared", "Raman", "hyper-Raman")
    return _table(caption, "lrrrlll", header, map(_species_line, analysis.species))


def _species_line(row: SpeciesRow) -> tuple[str, ...]:
    infrared, raman = _plain(sentences.infrared_words(row)), _plain(sentences.raman_or_silent(row))
    counts = (str(row.total), str(row.acoustic), str(row.optic))
    hyper = "yes" if row.activity.hyper_raman else ""
    return (LATEX.species(row.label), *counts, infrared, raman, hyper)


def _origins(analysis: Analysis) -> list[str]:
    if analysis.molecular is None:
        return []
    names = molecule_sentences.ORIGINS
    rows = [
        (LATEX.species(row.label), str(row.optic), *(str(getattr(origin, name)) for name in names))
        for row in analysis.species
        for origin in (analysis.molecular.origins[row.label],)
    ]
    caption = f"Origin of the optic modes of {_crystal(analysis)}. {molecule_sentences.origin_note(LATEX)}"
    return _table(caption, "lr" + "r" * len(names), ("species", "optic", *names), rows)


def _molecules(analysis: Analysis) -> list[list[str]]:
    """For each kind of molecule the table of its correlation and the sentences on its vibrations."""
    parts = [_list("Units:", units_entries(analysis, LATEX))]
    notes = [
        *molecule_sentences.net_sentences(analysis, LATEX), *molecule_sentences.inequivalent_sentences(analysis, LATEX),
    ]  # fmt: skip
    parts.append(_list("On the units:", notes))
    for row in molecule_tables.molecules(analysis):
        parts += [_correlation(analysis, row), _list("In words:", _sentences(analysis, row))]
    return parts


def _correlation(analysis: Analysis, row: MoleculeRow) -> list[str]:
    facts = "; ".join(
        f"{name.lower()} {words}" for name, words in molecule_sentences.facts(analysis, row, LATEX)
        if name not in ("Bonds", "Wavenumbers")
    )  # fmt: skip
    caption = (
        f"{molecule_sentences.title(row, analysis, LATEX)} of {_crystal(analysis)}; {facts}. "
        f"{_plain(molecule_sentences.LEGEND.partition(' T ')[0])}"
    )
    cells = molecule_tables.stage_cells(analysis, row, LATEX)
    return _table(caption, "l" * len(molecule_tables.HEADER), molecule_tables.HEADER, cells)


def _sentences(analysis: Analysis, row: MoleculeRow) -> list[str]:
    return [
        *molecule_sentences.remarks(analysis, row, LATEX),
        *molecule_sentences.vibration_sentences(analysis, row, LATEX),
        molecule_sentences.exclusion_sentence(analysis, row, LATEX),
    ]


def _bands(analysis: Analysis) -> list[str]:
    cells = molecule_tables.band_cells(analysis, LATEX)
    caption = f"Where internal vibrations of {_crystal(analysis)} are expected. {_plain(molecule_sentences.BAND_NOTE)}"
    header = ("cm$^{-1}$", *molecule_tables.BAND_HEADER[1:])
    return _table(caption, "rlllll", header, cells) if cells else []


def _sites_table(analysis: Analysis) -> list[str]:
    header = ("atom", "element", "occupancy", "Wyckoff", "site group", "", "moves as")
    return _table(f"Sites of {_crystal(analysis)}.", "llrllll", header, map(_site_line, analysis.sites))


def _site_line(row: SiteRow) -> tuple[str, ...]:
    return (
        _plain(row.label), _plain(row.element), f"{row.occupancy:.4g}", f"{row.multiplicity}{row.wyckoff}",
        LATEX.symbol(row.symbol), LATEX.schoenflies(row.group.schoenflies), decomposition(row.site_species, LATEX),
    )  # fmt: skip


def _contributions(analysis: Analysis) -> list[str]:
    labels = [row.label for row in analysis.species]
    rows: list[tuple[str, ...]] = [
        (_plain(row.label), *(str(row.contribution.get(one, 0)) for one in labels)) for row in analysis.sites
    ]
    sums: list[tuple[str, ...]] = [
        (),
        ("total", *(str(row.total) for row in analysis.species)),
        ("acoustic", *(str(row.acoustic) for row in analysis.species)),
        ("optic", *(str(row.optic) for row in analysis.species)),
    ]
    caption = f"What each site of {_crystal(analysis)} contributes to the species, acoustic modes included."
    return _table(caption, "l" + "r" * len(labels), ("", *map(LATEX.species, labels)), [*rows, *sums])


def _tensors(analysis: Analysis) -> list[str]:
    rows = [
        (_tensor_name(row, component), _matrix(row, component))
        for row in analysis.species
        if row.activity.raman
        for component in range(row.dimension)
    ]
    caption = (
        f"Raman tensors of factor group {sentences.factor_group_words(analysis, LATEX)}. "
        f"Axes: {_plain(analysis.axes)}. In brackets: the direction of the dipole that goes with the tensor."
    )
    return _table(caption, "ll", ("species", "tensor"), rows)


def _tensor_name(row: SpeciesRow, component: int) -> str:
    inside = sentences.polar_words(row, component) or (str(component + 1) if row.dimension > 1 else "")
    return LATEX.species(row.label) + (f" ({_plain(inside)})" if inside else "")


def _matrix(row: SpeciesRow, component: int) -> str:
    elements = element_expressions(row.tensor.components[component], row.tensor.letters)
    body = " \\\\ ".join(" & ".join(_element(cell) for cell in line) for line in elements)
    return f"$\\left(\\begin{{array}}{{ccc}} {body} \\end{{array}}\\right)$"


def _element(cell: str) -> str:
    """One element of a tensor with its root in LaTeX; a dot for zero."""
    return cell.replace("√3", "\\sqrt{3}") or "\\cdot"


def _settings(analysis: Analysis) -> list[str]:
    if not analysis.settings:
        return []
    labels = list(analysis.settings[0].labels)
    rows = [
        (LATEX.symbol(one.symbol.replace(" ", "")), one.axes, *(LATEX.species(one.labels[label]) for label in labels))
        for one in analysis.settings
    ]
    header = ("setting", "axes", *map(LATEX.species, labels))
    return _table(sentences.permutation_note(analysis, LATEX), "l" * len(header), header, rows)


def _method(analysis: Analysis) -> list[str]:
    lines = ["% Method"]
    for paragraph in paragraphs(analysis, LATEX):
        lines += [f"\\paragraph{{{paragraph.heading}}} {paragraph.text}", ""]
    return [*lines, *_list("References:", map(_plain, references(analysis)), "enumerate")]
