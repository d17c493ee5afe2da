"""What the first screen says of molecules: bands of each known vibration, labels, and the formula by units."""

from __future__ import annotations

import pytest
from html_reader import Reader, squeezed
from test_fate import analysed
from test_views_molecules import two_waters
from views_cases import case, with_questions

from sitesym.analysis import analyse
from sitesym.views import html, layout, markdown, text
from sitesym.views.band_summary import band_lines
from sitesym.views.units_formula import units_formula

# Calcite: Halford 1946. Aragonite: Cs sites in D2h, A' to two infrared and two Raman species, A" to one and two.
# Scheelite: Russell and Loudon 1965, S4 sites in C4h. All from memory.
BANDS = {
    "calcite": "CO₃: ν1 1R, ν2 1I, ν3 1I+1R, ν4 1I+1R",
    "aragonite": "CO₃: ν1 2I+2R, ν2 2I+2R, ν3 3I+4R, ν4 3I+4R",
    "scheelite": "WO₄: ν1 1R, ν2 1I+2R, ν3 2I+2R, ν4 2I+2R",
}


@pytest.mark.parametrize("name", BANDS)
def test_the_first_screen_counts_the_bands_of_each_known_vibration(name: str) -> None:
    screen, _ = text.first_screen(analysed(name))
    assert any(line.strip() == BANDS[name] for line in screen)
    assert len(screen) <= 24
    answer = squeezed(Reader(html.render(analysed(name))).text["answer"])
    assert BANDS[name].translate(str.maketrans("₃₄", "34")) in answer


def test_many_vibrations_are_left_to_the_sections() -> None:
    """Benzene has 20 of them (Wilson 1934)."""
    assert band_lines(analysed("benzene")) == ()


def test_cautions_go_before_the_bands_of_units() -> None:
    screen = "\n".join(text.first_screen(with_questions(case("calcite"), "deuterium", "hydrogen_missing"))[0])
    assert "(deuterium)" in screen
    assert "ν1 1R" not in screen


def test_inequivalent_units_are_told_apart_by_an_atom() -> None:
    result = analyse(two_waters(), scan=False)
    screen = " ".join(" ".join(text.first_screen(result)[0]).split())
    assert "2 H₂O with O1 (" in screen
    assert "2 H₂O with O2 (" in screen
    assert "H₂O O1: ν1 1I+1R" in screen


@pytest.mark.parametrize(
    ("name", "formula"),
    [("gypsum", "CaSO₄·2H₂O"), ("calcite", ""), ("rutile", ""), ("urea", ""), ("fluorapatite", "Ca₅(PO₄)₃F")],
)
def test_the_formula_by_units_is_that_of_the_mineral(name: str, formula: str) -> None:
    """Names of minerals and their formulas: International Mineralogical Association, from memory."""
    assert units_formula(case(name)) == formula
    for report in (text.render(case(name)), markdown.render(case(name))):
        assert ("together " in report) is bool(formula)
    assert max(map(layout.width, text.render(case(name)).splitlines())) <= 80
