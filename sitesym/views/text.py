"""The report as plain text for a terminal of 80 columns; the first screen of 24 lines is the answer."""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING

from sitesym.structure import FULL
from sitesym.tensors import element_expressions
from sitesym.views import sentences
from sitesym.views.band_summary import LEGEND, band_lines
from sitesym.views.labels import TEXT, decomposition, printable
from sitesym.views.layout import WIDTH, ZERO, clip, clip_start, side_by_side, table, width, wrap
from sitesym.views.method import paragraphs, references
from sitesym.views.molecule_text import origins, unit_sections
from sitesym.views.units_formula import units_entries

if TYPE_CHECKING:
    from sitesym.analysis import Analysis, SiteRow, SpeciesRow
    from sitesym.molecule_analysis import MoleculeAnalysis, MoleculeComparison
    from sitesym.structure import OpenQuestion

SCREEN = 24
_FIELD = 15
_TOP_CAUTION_LINES = 5


def render(analysis: Analysis) -> str:
    """The whole report, ending in a line feed."""
    screen, left_out = first_screen(analysis)
    sections = (
        ("All cautions", _all_cautions(analysis) if left_out else []),
        *unit_sections(analysis),
        ("Species", [*_species_table(analysis), "", *_notes(analysis)]),
        ("Where the optic modes come from", origins(analysis)),
        ("Sites", _sites_table(analysis)),
        ("What each site contributes", _contributions(analysis)),
        ("Raman tensors", _tensors(analysis)),
        ("Labels in other settings", _settings(analysis)),
        ("Tolerance", _tolerance(analysis)),
        ("Method", _method(analysis)),
    )
    lines = list(screen)
    for title, body in sections:
        if body:
            lines += ["", title, "─" * len(title), *body]
    return "\n".join(line.rstrip() for line in lines) + "\n"


def render_molecule(result: MoleculeAnalysis) -> str:
    """The report on a free molecule."""
    from sitesym.views.blocks import as_text
    from sitesym.views.free_molecule import blocks, title

    return as_text(title(result, TEXT), blocks(result, TEXT))


def render_comparison(result: MoleculeComparison) -> str:
    """The report on two free molecules side by side."""
    from sitesym.views.blocks import as_text
    from sitesym.views.free_molecule import comparison_blocks, comparison_title

    return as_text(comparison_title(result, TEXT), comparison_blocks(result, TEXT))


def first_screen(analysis: Analysis) -> tuple[list[str], int]:
    """At most 24 lines: crystal, groups, axes, counts, cautions; and how many cautions found no room there."""
    top, top_left = _fitting(sentences.serious_cautions(analysis), _TOP_CAUTION_LINES)
    rest = ["", *_sums(analysis), "", *_counts(analysis)]
    head = [*_title(analysis), *top, "", *_crystal(analysis)]
    room = SCREEN - 2 - len(head) - len(rest)
    units = _units(analysis, min(max(room, 1), 2))
    others = sentences.other_cautions(analysis)
    taken = len(units) + sum(len(_caution(question)) for question in others)
    head += [*units, *_bands(analysis, room - taken), *rest]
    if not analysis.cautions:
        return [*head, "", "No cautions: nothing doubtful was found in the structure or its symmetry."], 0
    shown, left = _fitting(others, SCREEN - len(head) - 2)
    missing = top_left + left
    more = f"{missing} more in full under 'All cautions' below." if missing else ""
    tail = [*shown, *([more] if more else [])]
    return [*head, *(["", *tail] if tail else [])], missing


def _fitting(questions: Iterable[OpenQuestion], room: int) -> tuple[list[str], int]:
    """As many whole cautions as `room` lines hold, in order, and the number of those left out."""
    lines: list[str] = []
    left = 0
    for question in questions:
        block = _caution(question)
        if left or len(lines) + len(block) > room:
            left += 1
        else:
            lines += block
    return lines, left


def _caution(question: OpenQuestion) -> list[str]:
    return wrap(printable(question.message), indent="    ", first="  ! ")


def _all_cautions(analysis: Analysis) -> list[str]:
    return [line for question in analysis.cautions for line in _caution(question)]


def _title(analysis: Analysis) -> list[str]:
    structure = analysis.structure
    title = clip("   ".join(filter(None, (TEXT.formula(analysis.formula), printable(structure.name)))), WIDTH)
    return [title]


def _crystal(analysis: Analysis) -> list[str]:
    fields = (
        ("File", _file(analysis)),
        ("Space group", sentences.space_group_words(analysis)),
        ("Factor group", sentences.factor_group_words(analysis)),
        ("Axes", printable(analysis.axes)),
        ("Atoms", sentences.atoms_words(analysis)),
    )
    return [line for name, words in fields if words for line in _field(name, words)]


def _units(analysis: Analysis, lines: int) -> list[str]:
    """The units found, cut to one or two lines; all of them stand in the section on units."""
    words = "; ".join(units_entries(analysis))
    whole = _field("Units", words) if words else []
    if len(whole) <= lines:
        return whole
    return [*whole[: lines - 1], clip(f"{whole[lines - 1]} …", WIDTH)]


def _bands(analysis: Analysis, room: int) -> list[str]:
    """One line a kind of unit on its known vibrations, if there is room beside the cautions."""
    found = band_lines(analysis)
    lines = [line for one in found for line in wrap(one, indent=" " * (_FIELD + 2), first=" " * _FIELD)]
    if not found:
        return []
    legend = _field("Bands of units", f"{LEGEND} in the crystal:")
    if len(lines) + len(legend) > room:
        return _field("Bands of units", "see the sections below on each unit") if room > 0 else []
    return [*legend, *lines]


def _file(analysis: Analysis) -> str:
    structure = analysis.structure
    kind = f" ({structure.format})" if structure.format else ""
    return clip_start(printable(structure.source), WIDTH - _FIELD - width(kind)) + kind if structure.source else ""


def _field(name: str, words: str) -> list[str]:
    return wrap(words, indent=" " * _FIELD, first=f"{name:<{_FIELD}}")


def _sums(analysis: Analysis) -> list[str]:
    return [
        *wrap(sentences.optic_sum(analysis), indent=" " * 14, first="Γ(optic)    = "),
        *wrap(sentences.acoustic_sum(analysis), indent=" " * 14, first="Γ(acoustic) = "),
    ]


def _counts(analysis: Analysis) -> list[str]:
    rows = sentences.count_rows(analysis)
    lines = ["Distinct optic frequencies (a degenerate mode counts once)"]
    for row in rows:
        lines += wrap(row.species if row.count else "", indent=" " * 20, first=f"  {row.title:<10}{row.count:>5}   ")
    return lines


def _species_table(analysis: Analysis) -> list[str]:
    header = (
        ("", "", "", "", "", "", "hyper-"),
        ("species", "total", "acoustic", "optic", "infrared", "Raman", "Raman"),
    )
    return table([*header, *(_species_line(row) for row in analysis.species)], "<>>><<<")


def _species_line(row: SpeciesRow) -> tuple[str, ...]:
    infrared = sentences.infrared_words(row) or ZERO
    raman = sentences.raman_or_silent(row) or ZERO
    hyper = "yes" if row.activity.hyper_raman else ZERO
    counts = (str(count) if count else ZERO for count in (row.total, row.acoustic, row.optic))
    return (TEXT.species(row.label), *counts, infrared, raman, hyper)


def _notes(analysis: Analysis) -> list[str]:
    return [line for note in sentences.notes(analysis) for line in wrap(note, indent="  ", first="- ")]


def _sites_table(analysis: Analysis) -> list[str]:
    header = ("atom", "element", "Wyckoff", "site", "group", "moves as", "x", "y", "z")
    rows = [header, *(_site_line(row) for row in analysis.sites)]
    return [*table(rows, "<<><<<>>>", shrink=(1, 0)), *_shared_sites(analysis)]


def _site_line(row: SiteRow) -> tuple[str, ...]:
    return (
        clip(printable(row.label), 10),
        printable(row.element),
        f"{row.multiplicity}{row.wyckoff}",
        TEXT.symbol(row.symbol),
        TEXT.schoenflies(row.group.schoenflies),
        decomposition(row.site_species),
        *(f"{value:.4f}" for value in row.position),
    )


def _shared_sites(analysis: Analysis) -> list[str]:
    shared = [row for row in analysis.sites if "/" in row.element or row.occupancy < FULL]
    if not shared:
        return []
    listed = ", ".join(f"{printable(row.label)} ({printable(row.element)} {row.occupancy:.3g})" for row in shared)
    return ["", *wrap(f"Shared or partly filled, with the sum of the occupancies: {listed}.")]


def _contributions(analysis: Analysis) -> list[str]:
    labels = [row.label for row in analysis.species]
    rows = [("", *map(TEXT.species, labels))]
    rows += [
        (clip(printable(row.label), 10), *_numbers(row.contribution.get(one, 0) for one in labels))
        for row in analysis.sites
    ]
    sums = [
        ("total", *_numbers(row.total for row in analysis.species)),
        ("acoustic", *_numbers(row.acoustic for row in analysis.species)),
        ("optic", *_numbers(row.optic for row in analysis.species)),
    ]
    gap = 2 if _fits([*rows, *sums], 2) else 1
    lines = table([*rows, *sums], "<" + ">" * len(labels), gap=gap, shrink=(0,))
    rule = "─" * max(map(width, lines))
    return [lines[0], *lines[1 : len(rows)], rule, *lines[len(rows) :]]


def _fits(rows: list[tuple[str, ...]], gap: int) -> bool:
    sizes = [max(map(width, column)) for column in zip(*rows, strict=True)]
    return sum(sizes) + gap * (len(sizes) - 1) <= WIDTH


def _numbers(values: Iterable[int]) -> list[str]:
    return [str(value) if value else ZERO for value in values]


def _tensors(analysis: Analysis) -> list[str]:
    active = [row for row in analysis.species if row.activity.raman]
    blocks = [_tensor(row, component) for row in active for component in range(row.dimension)]
    absent = [row for row in active if not row.optic]
    lines = side_by_side(blocks)
    if any(row.activity.polar for row in active):
        lines += ["", *wrap("In brackets after a species: the direction of the dipole that goes with the tensor.")]
    if absent:
        lines += ["", *wrap(f"No optic mode of this crystal belongs to {sentences.listed(absent)}.")]
    return lines


def _tensor(row: SpeciesRow, component: int) -> list[str]:
    """Four lines: the species with its polar direction or the number of its component, and the matrix."""
    elements = element_expressions(row.tensor.components[component], row.tensor.letters)
    cells = [[sentences.element_words(cell) or ZERO for cell in line] for line in elements]
    body = table(cells, ">>>")
    size = max(map(width, body))
    frame = (("⎡", "⎤"), ("⎢", "⎥"), ("⎣", "⎦"))
    matrix = [
        f"{left} {line}{' ' * (size - width(line))} {right}" for line, (left, right) in zip(body, frame, strict=True)
    ]
    return [_tensor_title(row, component), *matrix]


def _tensor_title(row: SpeciesRow, component: int) -> str:
    inside = sentences.polar_words(row, component) or (str(component + 1) if row.dimension > 1 else "")
    return TEXT.species(row.label) + (f"({inside})" if inside else "")


def _settings(analysis: Analysis) -> list[str]:
    if not analysis.settings:
        return []
    labels = list(analysis.settings[0].labels)
    rows = [("setting", "axes", *map(TEXT.species, labels), "")]
    for index, one in enumerate(analysis.settings):
        remark = " ".join(filter(None, ("this report" if index == 0 else "", "standard" if one.standard else "")))
        names = (TEXT.species(one.labels[label]) for label in labels)
        rows.append((TEXT.symbol(one.symbol.replace(" ", "")), one.axes, *names, remark))
    return [*wrap(sentences.permutation_note(analysis)), "", *table(rows, "<<" + "<" * len(labels) + "<")]


def _tolerance(analysis: Analysis) -> list[str]:
    rows = [
        (_range(run), TEXT.symbol(run.symbol), str(run.number or ZERO), "this report" if run.used else "")
        for run in sentences.scan_runs(analysis)
    ]
    lines = (
        table([("found at (Å)", "space group", "number", ""), *rows], "<<><")
        if rows
        else ["No other tolerance was tried."]
    )
    used = f"This report: {analysis.symmetry.tolerance:g} Å."
    return [*lines, "", *wrap(f"{used} {sentences.declared_words(analysis)}")]


def _range(run: sentences.ScanRun) -> str:
    return f"{run.low:g}" if run.low == run.high else f"{run.low:g} to {run.high:g}"


def _method(analysis: Analysis) -> list[str]:
    lines: list[str] = []
    for paragraph in paragraphs(analysis):
        lines += [*wrap(f"{paragraph.heading}. {paragraph.text}"), ""]
    for number, reference in enumerate(references(analysis), start=1):
        lines += wrap(reference, indent="     ", first=f"{f'[{number}]':<5}")
    return lines
