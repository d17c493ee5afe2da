"""The HTML page and the fragment for notebooks, read back with parsers that know nothing of the views."""

from __future__ import annotations

import itertools
import re
from dataclasses import replace

import numpy as np
import pytest
from html_reader import SVG, Reader, demo, drawings, squeezed
from views_cases import ESCAPES, HOSTILE, ascii_labels, case, renamed, with_questions

from sitesym.analysis import analyse
from sitesym.structure import Occupant, OpenQuestion, Site, Structure
from sitesym.views.figures import scan_drawing
from sitesym.views.html import page
from sitesym.views.notebook import summary_html

BREAKOUT = '"><img src=x onerror=alert(1)>'
CASES = ["calcite", "forsterite", "yttrium aluminium garnet", "molybdenite 2H", "alpha-quartz", "baddeleyite"]


@pytest.fixture(scope="module", params=CASES)
def crystal_page(request: pytest.FixtureRequest) -> str:
    return page(case(request.param))


def test_page_is_well_formed_and_every_table_has_a_caption(crystal_page: str) -> None:
    read = Reader(crystal_page)
    assert len(read.tables) >= 3
    assert read.captions == len(read.tables)


def test_ids_are_unique_and_references_between_elements_lead_somewhere(crystal_page: str) -> None:
    read = Reader(crystal_page)
    ids = read.values("id")
    assert len(ids) == len(set(ids))
    named = " ".join(read.values("aria-labelledby")).split()
    jumps = [target.removeprefix("#") for target in read.values("href")]
    assert named
    assert jumps
    assert set(named) | set(jumps) <= set(ids)


def test_page_needs_nothing_from_elsewhere(crystal_page: str) -> None:
    """No script, no link but to its own anchors, nothing fetched by element, attribute or style sheet."""
    read = Reader(crystal_page)
    tags = {tag for tag, _ in read.elements}
    assert not tags & {"script", "link", "img", "iframe", "object", "embed", "base", "form", "image", "use"}
    assert not read.values("src")
    assert not [name for _, attributes in read.elements for name in attributes if name.startswith("on")]
    assert all(target.startswith("#") for target in read.values("href"))
    assert "url(" not in crystal_page
    assert "@import" not in crystal_page
    assert re.findall(r"https?://\S+", crystal_page.replace("http://www.w3.org/2000/svg", "")) == []


def test_headings_descend_without_a_gap(crystal_page: str) -> None:
    levels = [int(tag[1]) for tag, _ in Reader(crystal_page).elements if re.fullmatch(r"h[1-6]", tag)]
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(later - earlier <= 1 for earlier, later in itertools.pairwise(levels))


def test_drawings_are_xml_with_title_and_description(crystal_page: str) -> None:
    pictures = [one for one in drawings(crystal_page) if one.get("role") == "img"]
    of_molecules = crystal_page.count('class="unit"')
    assert len(pictures) == 2 + of_molecules
    for picture in pictures:
        parts = {child.tag: child for child in picture}
        assert parts[f"{SVG}title"].text
        assert parts[f"{SVG}desc"].text
        assert picture.get("aria-labelledby", "").split() == [
            parts[f"{SVG}{name}"].get("id") for name in ("title", "desc")
        ]


def test_page_says_it_is_for_screen_and_print_light_and_dark_small_and_wide(crystal_page: str) -> None:
    assert "@media print" in crystal_page
    assert "prefers-color-scheme: dark" in crystal_page
    viewport = [one["content"] for tag, one in Reader(crystal_page).elements if one.get("name") == "viewport"]
    assert viewport == ["width=device-width, initial-scale=1"]


# Porto, Giordmaine and Damen, Phys. Rev. 147, 608 (1966), and White, in Farmer (ed.), The Infrared Spectra of Minerals
# (1974): calcite has A1g + 4Eg in Raman, 3A2u + 5Eu in infrared, 3A2g + 2A1u in neither. From memory.
def test_answer_for_calcite_is_the_published_one() -> None:
    read = Reader(page(demo("calcite.cif")))
    words = squeezed(read.text["answer"])
    assert "Infrared 8 3A2u + 5Eu" in words
    assert "Raman 5 A1g + 4Eg" in words
    assert "Both 0 none" in words
    assert "Silent 5 3A2g + 2A1u" in words
    assert "R3c (number 167" in words
    assert "D3d (3m), order 12" in words


def test_overbars_and_subscripts_of_the_space_group_are_typeset() -> None:
    assert 'R<span style="text-decoration:overline">3</span>c' in page(case("calcite"))
    assert "P4<sub>2</sub>/mnm" in page(case("rutile"))


# Rousseau, Bauman and Porto, J. Raman Spectrosc. 10, 253 (1981), tables for D3d: A1g (xx+yy, zz), Eg (xx-yy, xy) and
# (xz, yz), A2u along z, Eu along x and y. From memory.
def test_species_table_of_calcite_has_polarizations_and_tensor_elements() -> None:
    rows = {ascii_labels(row[0]).split()[0]: row for row in Reader(page(case("calcite"))).tables[0][1:]}
    assert rows["A1g"][1:4] == ["1", "–not active", "xx+yy, zz"]
    assert rows["A2u"][1:3] == ["3", "E ∥ z"]
    assert rows["Eu"][1:3] == ["5", "E ∥ (x, y)"]
    assert rows["A1u"][3:5] == ["silent", "active"]
    assert set(re.findall(r"\((.*?)\)", rows["Eg"][3].replace("yz, xz", "xz, yz"))) == {"xx−yy, xy", "xz, yz"}


# Loudon, Adv. Phys. 13, 423 (1964), table 1, D4h: A1g diag(a, a, b), B1g diag(c, -c, 0), B2g d in xy. From memory.
def test_raman_tensors_of_rutile_have_the_shapes_of_loudon() -> None:
    spoken = [one["aria-label"] for tag, one in Reader(page(case("rutile"))).elements if one.get("class") == "matrix"]
    assert spoken[:3] == ["xx a, yy a, zz b", "xx c, yy −c", "xy d"]


# Loudon (1964), C3v: A1 is polar along z, the components of E along x and y. From memory.
def test_polar_directions_stand_beside_the_tensors_of_lithium_niobate() -> None:
    words = squeezed(Reader(page(case("lithium niobate"))).text["tensors"])
    assert {"A1(z)", "E(x)", "E(y)"} <= set(re.findall(r"\w+\([xyz]\)", words))


# Site table of calcite as printed by White (1974) and by Rousseau, Bauman and Porto (1981), from memory; Ca on S6, C on
# D3, O on C2.
def test_site_table_of_calcite_is_the_published_one() -> None:
    table = next(one for one in Reader(page(case("calcite"))).tables if one[0][0] == "Site")
    columns = [ascii_labels(cell) for cell in table[0][5:]]
    counts = {
        row[0][:2]: dict(zip(columns, (int(cell.strip("·")) for cell in row[5:]), strict=True)) for row in table[1:4]
    }
    assert counts["Ca"] == {"A1g": 0, "A2g": 0, "Eg": 0, "A1u": 1, "A2u": 1, "Eu": 2}
    assert counts["C1"] == {"A1g": 0, "A2g": 1, "Eg": 1, "A1u": 0, "A2u": 1, "Eu": 1}
    assert counts["O1"] == {"A1g": 1, "A2g": 2, "Eg": 3, "A1u": 1, "A2u": 2, "Eu": 3}
    groups = [re.sub(r".*\((.*)\)", r"\1", row[3]) for row in table[1:4]]
    assert groups == ["S6", "D3", "C2"]
    assert table[-1][1:] == ["R", "–silent", "R", "–silent", "IR", "IR"]


# Pnma to Pbnm: a, b, c become b, c, a, so B1g (of c) of Pbnm is B2g (of b) in Pnma. International Tables A; common
# practice.
def test_forsterite_gets_the_table_of_settings_and_calcite_none() -> None:
    read = Reader(page(case("forsterite")))
    table = next(one for one in read.tables if one[0][0] == "Setting")
    standard = next(row for row in table if "standard" in row[0])
    assert standard[0].startswith("Pnma")
    assert dict(zip(map(ascii_labels, table[0][2:5]), map(ascii_labels, standard[2:5]), strict=True)) == {
        "B1g here": "B2g", "B2g here": "B3g", "B3g here": "B1g",
    }  # fmt: skip
    assert "settings" not in Reader(page(case("calcite"))).text


def test_hexagonal_crystal_is_told_about_divided_labels() -> None:
    assert "divided on which species are called B1" in squeezed(Reader(page(case("molybdenite 2H"))).text["species"])


def test_serious_cautions_stand_before_the_counts_and_others_after() -> None:
    words = Reader(page(with_questions(case("calcite"), "hydrogen_missing", "disorder"))).text["answer"]
    serious, counts, mild = words.index("(hydrogen_missing)"), words.index("Infrared"), words.index("(disorder)")
    assert serious < counts < mild
    assert "Check first." in words
    assert "Caution." in words


def test_method_note_cites_by_number_what_the_list_of_references_holds() -> None:
    read = Reader(page(case("calcite")))
    cited = {int(n) for group in re.findall(r"\[([\d, ]+)\]", read.text["method"]) for n in group.split(",")}
    listed = page(case("calcite")).split('<ol class="references">')[1].count("<li>")
    assert cited == set(range(1, listed + 1))


@pytest.mark.parametrize("text", [HOSTILE, BREAKOUT, "'><svg/onload=alert(1)>", "{{ 7*7 }}", ESCAPES, "]]>&amp;&lt;"])
def test_hostile_names_and_labels_stay_text(text: str) -> None:
    """The same elements as for a harmless name, and the text to be read as it was written (steering signs replaced)."""
    plain, hostile = page(renamed(case("calcite"), "calcite", "X1")), page(renamed(case("calcite"), text, text))
    expected, found = Reader(plain), Reader(hostile)
    assert [tag for tag, _ in found.elements] == [tag for tag, _ in expected.elements]
    assert not [name for _, attributes in found.elements for name in attributes if name.startswith("on")]
    if text != ESCAPES:
        assert found.text[""].count(text) == 2
        assert text in found.text["sites"]
    assert not re.search("[\x00-\x08\x0b-\x1f\x7f\u202a-\u202e\u2066-\u2069]", hostile)


@pytest.mark.parametrize("text", [HOSTILE, BREAKOUT])
def test_hostile_elements_cautions_and_symbols_stay_text(text: str) -> None:
    """Elements reach the drawing, messages and declared symbols reach the page."""
    structure = Structure(np.eye(3) * 4.0, np.zeros((1, 3)), (Site("A", (Occupant(text),)),))
    declared = replace(structure.declared, hermann_mauguin=text)
    asked = replace(structure, declared=declared, questions=(OpenQuestion("disorder", text),))
    document = page(analyse(asked))
    read = Reader(document)
    assert not [name for _, attributes in read.elements for name in attributes if name.startswith("on")]
    assert not {tag for tag, _ in read.elements} & {"script", "img"}
    assert text in read.text["cell"]
    assert text in read.text["answer"]
    assert len(drawings(document)) == 3


def test_hostile_text_stays_text_in_the_notebook() -> None:
    expected = Reader(summary_html(renamed(case("calcite"), "calcite")))
    for text in (HOSTILE, BREAKOUT, ESCAPES):
        assert [tag for tag, _ in Reader(summary_html(renamed(case("calcite"), text))).elements] == [
            tag for tag, _ in expected.elements
        ]


def test_notebook_fragment_has_the_answer_no_ids_and_stays_small() -> None:
    fragment = case("calcite")._repr_html_()
    read = Reader(fragment)
    assert not read.values("id")
    assert read.captions == len(read.tables) == 1
    assert "8 infrared; 5 raman; 0 both; 5 silent" in squeezed(read.text[""]).lower()
    assert len(fragment) < 6000


def test_page_without_a_scan_leaves_the_section_out() -> None:
    analysis = analyse(case("calcite").structure, scan=False)
    assert scan_drawing(analysis) == ""
    assert "tolerance" not in Reader(page(analysis)).text
