"""Where the known vibrations of each molecule or ion show in the crystal, a line each: `ν1 1R, ν2 1I, ν3 1I+1R`."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from sitesym.views.labels import TEXT, Style
from sitesym.views.molecule_sentences import distinguishing_label, names_words

if TYPE_CHECKING:
    from sitesym.analysis import Analysis
    from sitesym.fate import Counts
    from sitesym.molecular import MoleculeRow

MOST = 9
"""Vibrations that still read well in one line."""

LEGEND = "Numbers of infrared (I) and Raman (R) bands"


def band_lines(analysis: Analysis, style: Style = TEXT) -> tuple[str, ...]:
    """`CO₃: ν1 1R, ν2 1I, ν3 1I+1R, ν4 1I+1R`, one entry a kind of unit with few vibrations that all have usual names.

    Numbers are those of bands in the crystal that one vibration of the free unit gives; a dash where none shows.
    """
    rows = analysis.molecular.molecules if analysis.molecular else ()
    lines = ((row, _words(row)) for row in rows)
    return tuple(f"{_name(row, analysis, style)}: {style.plain(words)}" for row, words in lines if words)


def _name(row: MoleculeRow, analysis: Analysis, style: Style) -> str:
    label = distinguishing_label(row, analysis)
    return style.formula(row.name) + (f" {style.plain(label)}" if label else "")


def _words(row: MoleculeRow) -> str:
    found: dict[int, str] = {}
    for index, fate in enumerate(row.fates):
        numbers = [re.fullmatch(r"ν(\d+)", name) for name in names_words(row, index).split(", ")]
        for number in numbers:
            if number is None:
                return ""
            found[int(number[1])] = _counted(fate.in_crystal)
    if len(found) > MOST:
        return ""
    return ", ".join(f"ν{number} {words}" for number, words in sorted(found.items()))


def _counted(found: Counts) -> str:
    """`1I`, `2R`, `1I+1R`; an equals sign where infrared and Raman show the same bands: `2I=2R`."""
    infrared, raman = (
        f"{count}{letter}" if count else "" for count, letter in ((found.infrared, "I"), (found.raman, "R"))
    )
    sign = "=" if found.both and found.both == found.infrared == found.raman else "+"
    return sign.join(filter(None, (infrared, raman))) or "–"
