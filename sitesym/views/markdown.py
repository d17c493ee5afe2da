"""The report in Markdown (with tables as most dialects have them), for notebooks, wikis and issue trackers."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING

from sitesym.tensors import element_expressions
from sitesym.views import molecule_sentences, molecule_tables, sentences
from sitesym.views.labels import MARKDOWN, decomposition
from sitesym.views.method import paragraphs, references
from sitesym.views.units_formula import units_entries

if TYPE_CHECKING:
    from sitesym.analysis import Analysis, SiteRow, SpeciesRow
    from sitesym.molecular import MoleculeRow
    from sitesym.molecule_analysis import MoleculeAnalysis, MoleculeComparison

_plain = MARKDOWN.plain


def render(analysis: Analysis) -> str:
    """The whole report, ending in a line feed."""
    sections = (
        *_unit_sections(analysis),
        ("Species", [*_species_table(analysis), "", *(f"- {note}" for note in sentences.notes(analysis, MARKDOWN))]),
        ("Sites", _sites_table(analysis)),
        ("What each site contributes", _contributions(analysis)),
        ("Raman tensors", _tensors(analysis)),
        ("Labels in other settings", _settings(analysis)),
        ("Tolerance", _tolerance(analysis)),
        ("Method", _method(analysis)),
    )
    lines = _answer(analysis)
    for title, body in sections:
        if body:
            lines += ["", f"## {title}", "", *body]
    return "\n".join(lines) + "\n"


def render_molecule(result: MoleculeAnalysis) -> str:
    """The report on a free molecule."""
    from sitesym.views.blocks import as_markdown
    from sitesym.views.free_molecule import blocks, title

    return as_markdown(title(result, MARKDOWN), blocks(result, MARKDOWN))


def render_comparison(result: MoleculeComparison) -> str:
    """The report on two free molecules side by side."""
    from sitesym.views.blocks import as_markdown
    from sitesym.views.free_molecule import comparison_blocks, comparison_title

    return as_markdown(comparison_title(result, MARKDOWN), comparison_blocks(result, MARKDOWN))


def _answer(analysis: Analysis) -> list[str]:
    structure = analysis.structure
    title = " ".join(filter(None, (MARKDOWN.formula(analysis.formula), _plain(structure.name))))
    fields = (
        ("File", " ".join(filter(None, (structure.source, f"({structure.format})" if structure.format else "")))),
        ("Axes", analysis.axes),
        ("Atoms", sentences.atoms_words(analysis)),
    )
    units = "; ".join(units_entries(analysis, MARKDOWN))
    return [
        f"# {title}",
        "",
        *(f"- **Caution:** {_plain(one.message)}" for one in sentences.serious_cautions(analysis)),
        f"- Space group: {sentences.space_group_words(analysis, MARKDOWN)}",
        f"- Factor group: {sentences.factor_group_words(analysis, MARKDOWN)}",
        *(f"- {name}: {_plain(words)}" for name, words in fields if words),
        *([f"- Units: {units}"] if units else []),
        f"- Γ(optic) = {sentences.optic_sum(analysis, MARKDOWN)}",
        f"- Γ(acoustic) = {sentences.acoustic_sum(analysis, MARKDOWN)}",
        *(f"- **Caution:** {_plain(one.message)}" for one in sentences.other_cautions(analysis)),
        "",
        *_table(
            ("", "distinct frequencies", "species"),
            ((row.title, str(row.count), row.species) for row in sentences.count_rows(analysis, MARKDOWN)),
            "<><",
        ),
    ]


def _table(header: Sequence[str], rows: Iterable[Sequence[str]], align: str) -> list[str]:
    """A table; `align` has one of `<` and `>` for each column. Cells are safe for Markdown already."""
    rules = ["---:" if side == ">" else ":---" for side in align]
    return [f"| {' | '.join(cells)} |" for cells in (header, rules, *rows)]


def _species_table(analysis: Analysis) -> list[str]:
    origins = analysis.molecular.origins if analysis.molecular else {}
    names = molecule_sentences.ORIGINS if origins else ()
    header = ("species", "total", "acoustic", "optic", "infrared", "Raman", "hyper-Raman", *names)
    rows = [
        (*_species_line(row), *(str(getattr(origins[row.label], name)) for name in names)) for row in analysis.species
    ]
    return _table(header, rows, "<>>><<<" + ">" * len(names))


def _species_line(row: SpeciesRow) -> tuple[str, ...]:
    infrared, raman = sentences.infrared_words(row), sentences.raman_or_silent(row)
    hyper = "yes" if row.activity.hyper_raman else ""
    counts = (str(row.total), str(row.acoustic), str(row.optic))
    return (MARKDOWN.species(row.label), *counts, infrared, raman, hyper)


def _unit_sections(analysis: Analysis) -> list[tuple[str, list[str]]]:
    """The units, each kind of molecule from the free unit to the crystal, and where bands are expected."""
    notes = [
        *molecule_sentences.net_sentences(analysis, MARKDOWN),
        *molecule_sentences.inequivalent_sentences(analysis, MARKDOWN),
    ]
    sections = [("Units", [f"- {note}" for note in notes])]
    for row in molecule_tables.molecules(analysis):
        sections.append((molecule_sentences.title(row, analysis, MARKDOWN), _molecule(analysis, row)))
    bands = molecule_tables.band_cells(analysis, MARKDOWN)
    if bands:
        table = _table(molecule_tables.BAND_HEADER, bands, "><<<<<")
        sections.append(("Where internal vibrations are expected", [*table, "", _plain(molecule_sentences.BAND_NOTE)]))
    return sections


def _molecule(analysis: Analysis, row: MoleculeRow) -> list[str]:
    facts = [f"- {name}: {words}" for name, words in molecule_sentences.facts(analysis, row, MARKDOWN)]
    facts += [f"- **Caution:** {words}" for words in molecule_sentences.remarks(analysis, row, MARKDOWN)]
    cells = molecule_tables.stage_cells(analysis, row, MARKDOWN)
    return [
        *facts, "", *_table(molecule_tables.HEADER, cells, "<" * len(molecule_tables.HEADER)), "",
        _plain(molecule_sentences.LEGEND.partition(" T ")[0]), "",
        *(f"- {one}" for one in molecule_sentences.vibration_sentences(analysis, row, MARKDOWN)),
        f"- {molecule_sentences.exclusion_sentence(analysis, row, MARKDOWN)}",
    ]  # fmt: skip


def _sites_table(analysis: Analysis) -> list[str]:
    header = ("atom", "element", "occupancy", "Wyckoff", "site group", "", "moves as", "x", "y", "z")
    return _table(header, map(_site_line, analysis.sites), "<<><<<<>>>")


def _site_line(row: SiteRow) -> tuple[str, ...]:
    return (
        _plain(row.label), _plain(row.element), f"{row.occupancy:.4g}", f"{row.multiplicity}{row.wyckoff}",
        MARKDOWN.symbol(row.symbol), MARKDOWN.schoenflies(row.group.schoenflies),
        decomposition(row.site_species, MARKDOWN), *(f"{value:.4f}" for value in row.position),
    )  # fmt: skip


def _contributions(analysis: Analysis) -> list[str]:
    labels = [row.label for row in analysis.species]
    rows = [(_plain(row.label), *(str(row.contribution.get(one, 0)) for one in labels)) for row in analysis.sites]
    sums = [
        ("**total**", *(str(row.total) for row in analysis.species)),
        ("acoustic", *(str(row.acoustic) for row in analysis.species)),
        ("**optic**", *(str(row.optic) for row in analysis.species)),
    ]
    return _table(("", *map(MARKDOWN.species, labels)), [*rows, *sums], "<" + ">" * len(labels))


def _tensors(analysis: Analysis) -> list[str]:
    rows = [
        _tensor_line(row, component)
        for row in analysis.species
        if row.activity.raman
        for component in range(row.dimension)
    ]
    return _table(("species", "dipole", "xx", "yy", "zz", "xy", "xz", "yz"), rows, "<<<<<<<<")


def _tensor_line(row: SpeciesRow, component: int) -> tuple[str, ...]:
    elements = element_expressions(row.tensor.components[component], row.tensor.letters)
    name = MARKDOWN.species(row.label) + (f"({component + 1})" if row.dimension > 1 else "")
    places = ((0, 0), (1, 1), (2, 2), (0, 1), (0, 2), (1, 2))
    cells = (sentences.element_words(elements[i][j]) or "·" for i, j in places)
    return (name, sentences.polar_words(row, component), *cells)


def _settings(analysis: Analysis) -> list[str]:
    if not analysis.settings:
        return []
    labels = list(analysis.settings[0].labels)
    rows = [
        (MARKDOWN.symbol(one.symbol.replace(" ", "")), one.axes, *(MARKDOWN.species(one.labels[key]) for key in labels))
        for one in analysis.settings
    ]
    header = ("setting", "axes", *map(MARKDOWN.species, labels))
    return [sentences.permutation_note(analysis, MARKDOWN), "", *_table(header, rows, "<" * len(header))]


def _tolerance(analysis: Analysis) -> list[str]:
    rows = [
        (f"{run.low:g}", f"{run.high:g}", MARKDOWN.symbol(run.symbol), str(run.number or ""), "yes" if run.used else "")
        for run in sentences.scan_runs(analysis)
    ]
    header = ("from (Å)", "to (Å)", "space group", "number", "this report")
    used = f"This report: {analysis.symmetry.tolerance:g} Å. {sentences.declared_words(analysis, MARKDOWN)}"
    return [*(_table(header, rows, ">><><") if rows else ["No other tolerance was tried."]), "", used]


def _method(analysis: Analysis) -> list[str]:
    lines: list[str] = []
    for paragraph in paragraphs(analysis, MARKDOWN):
        lines += [f"**{paragraph.heading}.** {paragraph.text}", ""]
    return lines + [f"{number}. {_plain(text)}" for number, text in enumerate(references(analysis), start=1)]
