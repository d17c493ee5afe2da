"""Molecules on the HTML page: tables and sentences, read back and held against the literature.

The published values are those of tests/reference/correlations.toml, where each names its source.
"""

from __future__ import annotations

import re
from dataclasses import replace

import numpy as np
import pytest
from drawing_reader import CASES, NAMES, SVG, analysed, heads_of
from html_reader import Reader, demo, drawings, squeezed
from views_cases import ESCAPES, HOSTILE

from sitesym.analysis import analyse
from sitesym.structure import Occupant, Site, Structure
from sitesym.views.figures import line_spectrum
from sitesym.views.html import page
from sitesym.wavenumbers import Assignment, Wavenumbers

# The page


def two_hydroxides(label: str = "O{}", name: str = "") -> Structure:
    """Two OH groups that no operation connects, in a triclinic cell without symmetry, and a sodium ion for each."""
    lattice = np.array([[6.1, 0, 0], [0.7, 6.6, 0], [0.5, 0.9, 7.3]])
    centres = np.array([[0.1, 0.1, 0.1], [0.6, 0.55, 0.62], [0.6, 0.1, 0.12], [0.12, 0.57, 0.66]])
    hydrogens = centres[:2] + np.array([[0.0, 0.02, 0.131], [0.13, 0.05, 0.06]])
    elements = ["O", "O", "Na", "Na", "H", "H"]
    sites = tuple(Site(label.format(k), (Occupant(element),)) for k, element in enumerate(elements))
    return Structure(lattice, np.vstack([centres, hydrogens]), sites, name=name)


def split_carbonate() -> Structure:
    """Calcite with each oxygen on two half-occupied places 0.4 Å apart, as an average structure may have them."""
    whole = demo("calcite.cif").structure
    oxygens = [k for k, site in enumerate(whole.sites) if site.element == "O"]
    shift = np.array([0.0, 0.0, 0.2 / np.linalg.norm(whole.lattice[2])])
    points, sites = [], []
    for k, (point, site) in enumerate(zip(whole.fractional, whole.sites, strict=True)):
        moves = (shift, -shift) if k in oxygens else (0 * shift,)
        points += [point + move for move in moves]
        sites += [replace(site, occupants=(Occupant(site.element, 1 / len(moves)),))] * len(moves)
    return Structure(whole.lattice, np.array(points), tuple(sites))


@pytest.fixture(scope="module")
def pages() -> dict[str, str]:
    found = {name: page(demo(f"{name}.cif")) for name in ("calcite", "aragonite", "gypsum", "quartz")}
    found["two hydroxides"] = page(analyse(two_hydroxides()))
    found["buckminsterfullerene"] = page(analysed(NAMES["buckminsterfullerene, one orientation"]))
    return found


def rows_of(document: str, caption: str) -> dict[str, list[str]]:
    """The table whose caption begins so: first cell of each row -> its other cells, labels plain."""
    captions = [" ".join(one.split()) for one in re.findall(r"<caption.*?><span>(.*?)</span>", document, re.DOTALL)]
    table = Reader(document).tables[next(k for k, one in enumerate(captions) if one.startswith(caption))]
    return {squeezed(row[0]): [squeezed(cell).lstrip("–") for cell in row[1:]] for row in table}


def test_pages_with_several_units_have_no_id_twice_and_references_lead_somewhere(pages: dict[str, str]) -> None:
    assert pages["gypsum"].count('class="unit"') == 3
    for name, document in pages.items():
        read = Reader(document)
        ids = read.values("id")
        assert len(ids) == len(set(ids)), name
        assert set(" ".join(read.values("aria-labelledby")).split()) <= set(ids)
        assert read.captions == len(read.tables)


def test_drawings_are_xml_with_title_description_and_nothing_from_elsewhere(pages: dict[str, str]) -> None:
    for document in pages.values():
        for picture in drawings(document):
            if picture.get("aria-hidden") != "true":
                assert picture.get("role") == "img"
                assert picture[0].tag == f"{SVG}title"
                assert picture[1].tag == f"{SVG}desc"
                assert all(one.text for one in picture[:2])
        assert "url(" not in document
        assert not re.findall(r"(?:href|src)=\"(?!#)", document)
        assert not re.findall(r"https?://", document.replace("http://www.w3.org/2000/svg", ""))


def test_words_for_screen_readers_do_not_widen_the_page(pages: dict[str, str]) -> None:
    """They are placed absolutely, so the box that scrolls must be their frame; else a phone scrolls the whole page."""
    rules = re.findall(r"(\.[\w, .]+?) \{([^{}]*)\}", pages["calcite"])
    placed = {name for name, style in rules if "position: absolute" in style}
    frames = {name for name, style in rules if "position: relative" in style}
    assert ".unseen, .skip" in placed
    assert ".scroll" in frames


def test_page_of_calcite_tells_groups_site_orientation_and_bonds(pages: dict[str, str]) -> None:
    """D3h on D3 (32), Wyckoff position 6a, the axis along c, Ca-O no bond: Halford 1946 and International Tables."""
    words = squeezed(Reader(pages["calcite"]).text["molecules"])
    for part in (
        "2 CO3 (D3h on D3)",
        "D3 (32), Wyckoff position 6a",
        "∥ c",
        "C-O (1.28 Å): bonded",
        "Ca-O",
        "not bonded",
    ):
        assert part in words, part


@pytest.mark.parametrize("name", ["calcite", "aragonite"])
def test_table_of_vibrations_has_the_published_stages(pages: dict[str, str], name: str) -> None:
    case = CASES[NAMES[name]]
    rows = rows_of(pages[name], "Each internal vibration")
    kinds = {"nu1": "ν1 stretching", "nu2": "ν2 out-of-plane", "nu3": "ν3 stretching", "nu4": "ν4 bending"}
    for one in case["vibrations"]:
        wavenumber, free, _, infrared, raman, silent = rows[kinds[one["name"]]]
        seen = "I" * one["free_infrared"] + " " * (one["free_infrared"] and one["free_raman"]) + "R" * one["free_raman"]
        assert free == f"{one['species']} {seen}"
        shown = {"infrared": set(infrared.split(" + ")), "raman": set(raman.split(" + "))}
        assert shown["infrared"] - {"none"} == set(one["crystal"]) & set(case["crystal_infrared"])
        assert shown["raman"] - {"none"} == set(one["crystal"]) & set(case["crystal_raman"])
        left = set(one["crystal"]) - set(case["crystal_infrared"]) - set(case["crystal_raman"])
        assert set(silent.split(" + ")) - {"none"} == left
        assert 600 < float(wavenumber) < 1600


# White 1974, in Farmer (ed.), The Infrared Spectra of Minerals, from memory: calcite has external Raman modes 2Eg (one
# translation, one libration), in infrared 3Eu + 2A2u external, inside CO3 2Eg + A1g and 2Eu + A2u.
def test_table_of_origins_of_calcite_is_the_published_one(pages: dict[str, str]) -> None:
    rows = rows_of(pages["calcite"], "Where the optic modes")
    counts = {label: [int(cell.strip("·")) for cell in cells] for label, cells in rows.items() if label != "Species"}
    assert counts["Eg"] == [4, 1, 1, 2]
    assert counts["A1g"] == [1, 0, 0, 1]
    assert counts["Eu"] == [5, 2, 1, 2]
    assert counts["A2u"] == [3, 1, 1, 1]


def test_each_vibration_of_aragonite_has_its_sentence(pages: dict[str, str]) -> None:
    """ν1 of the carbonate becomes infrared active on the mirror site (Halford 1946; Fateley 1971, from memory)."""
    items = [squeezed(re.sub(r"<.*?>", "", one)) for one in re.findall(r"<li>(.*?)</li>", pages["aragonite"])]
    sentences = [one for one in items if one.startswith("ν")]
    assert [one.split()[0] for one in sentences] == ["ν1", "ν2", "ν3", "ν4"]
    assert "Cs site" in sentences[0]
    assert "infrared" in sentences[0].partition("Raman only")[2]


def test_net_is_said_to_be_one_and_has_no_diagram(pages: dict[str, str]) -> None:
    words = squeezed(Reader(pages["quartz"]).text["molecules"])
    assert "three-dimensional net" in words
    assert "Si-O" in words
    assert 'id="unit-1"' not in pages["quartz"]
    assert "of one origin: framework" in squeezed(Reader(pages["quartz"]).text["species"])


def test_unit_that_cannot_be_followed_is_said() -> None:
    document = page(analyse(split_carbonate()))
    words = squeezed(Reader(document).text["molecules"])
    assert "0.40 Å apart" in words
    assert 'id="unit-1"' not in document


def test_inequivalent_units_are_told_apart_and_said(pages: dict[str, str]) -> None:
    words = squeezed(Reader(pages["two hydroxides"]).text["molecules"])
    assert "two inequivalent" in words
    assert "twice as many" in words
    titles = re.findall(r'<h3 id="unit-\d-heading">(.*?)</h3>', pages["two hydroxides"])
    assert len(titles) == len(set(titles)) == 2


@pytest.mark.parametrize("text", [HOSTILE, '"><img src=x onerror=alert(1)>', ESCAPES, "a & b ]]> <!--"])
def test_hostile_labels_stay_text(text: str) -> None:
    label = text.replace("{", "").replace("}", "") + "{}"
    expected, read = Reader(page(analyse(two_hydroxides()))), Reader(page(analyse(two_hydroxides(label, text))))
    tags = [tag for tag, _ in expected.elements]
    found = [tag for tag, _ in read.elements]
    assert sorted(set(found)) == sorted(set(tags))
    assert found.count("svg") == tags.count("svg")
    assert not [name for _, attributes in read.elements for name in attributes if name.startswith("on")]
    drawings(page(analyse(two_hydroxides(label, text))))


def test_page_without_molecules_leaves_the_section_and_the_origins_out() -> None:
    document = page(analyse(demo("calcite.cif").structure, molecules=False))
    read = Reader(document)
    assert "molecules" not in read.text
    assert "Where the optic modes" not in read.text["species"]


def test_the_users_wavenumbers_take_the_place_of_the_tabulated_ones() -> None:
    given = Wavenumbers("mine.csv", (Assignment("line 2", "CO3", "ν1", "", "", "", 1086.0),))
    result = analyse(demo("calcite.cif").structure, wavenumbers=given)
    assert ("1086", "ν1", "A1g") in heads_of(line_spectrum(result, "bands"))["raman"]
    assert rows_of(page(result), "Each internal vibration")["ν1 stretching"][0] == "1086"


def test_crystal_without_known_wavenumbers_has_no_line_spectrum() -> None:
    assert line_spectrum(demo("quartz.cif"), "bands") == ""
    assert 'id="bands"' not in page(demo("quartz.cif"))
