"""The sections of the text report on units: which there are, and each molecule from the free unit to the crystal."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from sitesym.views import molecule_sentences as words
from sitesym.views.correlation_diagram import correlation_diagram
from sitesym.views.labels import TEXT, printable
from sitesym.views.layout import NO_BREAK, ZERO, table, wrap
from sitesym.views.molecule_tables import BAND_HEADER, band_cells

if TYPE_CHECKING:
    from sitesym.analysis import Analysis
    from sitesym.molecular import MolecularAnalysis, MoleculeRow

_FIELD = 13
_JOINT = "A number in a joint: so many times."

Section = tuple[str, list[str]]


def unit_sections(analysis: Analysis) -> tuple[Section, ...]:
    """Titles and lines: the units, each kind of molecule, and where bands are expected; none without molecules."""
    molecular = analysis.molecular
    if molecular is None:
        return ()
    molecules = [(words.title(row, analysis), _molecule(analysis, row)) for row in molecular.molecules]
    bands = [("Where internal vibrations are expected", _bands(analysis, molecular))] if molecular.bands else []
    return (("Units", _units(analysis, molecular)), *molecules, *bands)


# Units


def _units(analysis: Analysis, molecular: MolecularAnalysis) -> list[str]:
    lines = [line for one in words.units_words(analysis) for line in wrap(one, indent="    ", first="  ")]
    notes = [*words.net_sentences(analysis), *words.inequivalent_sentences(analysis)]
    if not molecular.molecules:
        notes.append("There is no molecule or complex ion whose vibrations could be followed into the crystal.")
    lines += [line for note in notes for line in wrap(note, indent="  ", first="- ")]
    reasons = _other_reasons(molecular)
    return [*lines, *(["", *reasons] if reasons else [])]


def _other_reasons(molecular: MolecularAnalysis) -> list[str]:
    """Why single atoms, chains, layers and nets end where they do, as far as no molecule's own section says it."""
    told = " ".join(row.units.unit.reason for row in molecular.molecules)
    lines: list[str] = []
    for one in (*molecular.nets, *molecular.unfollowed, *(atom.units for atom in molecular.atoms)):
        reason = one.unit.reason
        if reason not in told:
            told += reason
            lines += wrap(f"{TEXT.formula(one.unit.name)}: {printable(reason)}", indent="  ", first="- ")
    return lines


# One kind of molecule


def _molecule(analysis: Analysis, row: MoleculeRow) -> list[str]:
    lines = [
        line
        for name, text in words.facts(analysis, row)
        for line in wrap(_tied(text), " " * _FIELD, f"{name:<{_FIELD}}")
    ]
    lines += [line for one in words.remarks(analysis, row) for line in wrap(one, indent="    ", first="  ! ")]
    notes = [*words.vibration_sentences(analysis, row), words.exclusion_sentence(analysis, row)]
    sentences = [line for note in notes for line in wrap(_tied(note), indent="  ", first="- ")]
    return [*lines, "", *correlation_diagram(analysis, row), *wrap(f"{words.LEGEND} {_JOINT}"), "", *sentences]


def _tied(sentence: str) -> str:
    """The sentence with spaces that no line may be broken at: in `E ∥ (x, y)` and `1415 cm⁻¹`."""
    tied = re.sub(r"E (?:∥|in plane) (?:\([^)]*\)|\S)", lambda found: found[0].replace(" ", NO_BREAK), sentence)
    return tied.replace(" cm⁻¹", f"{NO_BREAK}cm⁻¹")


# Where bands are expected


def _bands(analysis: Analysis, molecular: MolecularAnalysis) -> list[str]:
    rows = [tuple(cell or ZERO for cell in cells) for cells in band_cells(analysis, TEXT)]
    missing = words.without_wavenumber(molecular)
    notes = [words.BAND_NOTE, *([missing] if missing else [])]
    return [
        *table([BAND_HEADER, *rows], "><<<<<", shrink=(3, 4, 5)),
        "",
        *(line for one in notes for line in wrap(one)),
    ]


# Where the modes come from


def origins(analysis: Analysis) -> list[str]:
    """A table of the optic modes by species and origin; none where all are of one origin that needs no table."""
    molecular = analysis.molecular
    if molecular is None:
        return []
    names = [name for name in words.ORIGINS if any(getattr(one, name) for one in molecular.origins.values())]
    if names == ["framework"]:
        return []
    rows = [("species", "optic", *names)]
    for row in analysis.species:
        counts = [row.optic, *(getattr(molecular.origins[row.label], name) for name in names)]
        rows.append((TEXT.species(row.label), *(str(count) if count else ZERO for count in counts)))
    return [*table(rows, "<" + ">" * (len(names) + 1)), "", *wrap(words.origin_note())]
