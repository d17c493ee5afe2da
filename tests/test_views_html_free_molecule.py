"""The HTML pages on a molecule alone and on two side by side, read back with parsers that know nothing of the views."""

from __future__ import annotations

import itertools
import re
import xml.etree.ElementTree as Tree

import numpy as np
import pytest
from drawing_reader import SVG, heads_of, words_of
from html_reader import Reader, drawings, squeezed
from views_cases import ESCAPES, HOSTILE

from sitesym.molecule_analysis import analyse_molecule, compare_molecules
from sitesym.reading.molecule import Molecule
from sitesym.views.figures import free_spectrum, molecule_picture
from sitesym.views.html import render_comparison, render_molecule


def turned(height: float, distance: float, degrees: float) -> list[float]:
    angle = np.radians(degrees)
    return [distance * np.cos(angle), distance * np.sin(angle), height]


def benzene(name: str = "benzene") -> Molecule:
    """Regular hexagons, C-C 1.395 Å and C-H 1.085 Å (common values)."""
    places = [turned(0.0, radius, 60 * k) for radius in (1.395, 2.48) for k in range(6)]
    return Molecule(("C",) * 6 + ("H",) * 6, np.array(places), name, name)


def dichloroethane(torsion: float) -> Molecule:
    """1,2-dichloroethane with tetrahedral angles; 180° is anti, about 65° gauche."""
    elements, places = ["C", "C"], [[0.0, 0.0, 0.76], [0.0, 0.0, -0.76]]
    for sign, start in ((1, 0.0), (-1, torsion)):
        for step, (element, length) in enumerate((("Cl", 1.79), ("H", 1.09), ("H", 1.09))):
            elements.append(element)
            height = sign * (0.76 + length * np.cos(np.radians(70.5)))
            places.append(turned(height, length * np.sin(np.radians(70.5)), start + 120 * step))
    return Molecule(tuple(elements), np.array(places), f"torsion {torsion:g}")


@pytest.fixture(scope="module")
def pages() -> dict[str, str]:
    anti, gauche = (analyse_molecule(dichloroethane(torsion)) for torsion in (180.0, 65.0))
    return {
        "benzene": render_molecule(analyse_molecule(benzene())),
        "anti": render_molecule(anti),
        "argon": render_molecule(analyse_molecule(Molecule(("Ar",), np.zeros((1, 3)), "argon"))),
        "conformers": render_comparison(compare_molecules(anti, gauche)),
    }


def test_pages_are_well_formed_unique_in_ids_and_need_nothing_from_elsewhere(pages: dict[str, str]) -> None:
    for name, document in pages.items():
        read = Reader(document)
        ids = read.values("id")
        assert len(ids) == len(set(ids)), name
        assert {target.removeprefix("#") for target in read.values("href")} <= set(ids)
        assert set(" ".join(read.values("aria-labelledby")).split()) <= set(ids)
        assert read.captions == len(read.tables)
        assert not {tag for tag, _ in read.elements} & {"script", "img", "link", "iframe"}
        assert "url(" not in document
        assert all(one.tag == f"{SVG}svg" for one in drawings(document))


def test_headings_descend_without_a_gap(pages: dict[str, str]) -> None:
    for document in pages.values():
        levels = [int(tag[1]) for tag, _ in Reader(document).elements if re.fullmatch(r"h[1-6]", tag)]
        assert levels[0] == 1
        assert all(later - earlier <= 1 for earlier, later in itertools.pairwise(levels))


# Wilson, Phys. Rev. 45, 706 (1934), from memory: 20 frequencies; infrared A2u + 3E1u, Raman 2A1g + E1g + 4E2g.
def test_answer_for_benzene_is_the_published_one(pages: dict[str, str]) -> None:
    read = Reader(pages["benzene"])
    words = squeezed(read.text["answer"])
    assert "Infrared 4 A2u + 3E1u" in words
    assert "Raman 7 2A1g + E1g + 4E2g" in words
    assert "Both 0 none" in words
    assert "Silent 9" in words
    assert "D6h" in words
    assert "centre of inversion" in words
    assert "2 Raman bands (A1g) are polarized" in words


# Wilson 1934 and Shimanouchi 1972, from memory: ν1 and ν2 A1g, ν11 A2u, ν18 to ν20 E1u.
def test_table_and_spectrum_of_benzene_name_the_vibrations(pages: dict[str, str]) -> None:
    table = next(one for one in Reader(pages["benzene"]).tables if "Kind" in one[0])
    rows = [[squeezed(cell) for cell in row] for row in table[1:]]
    assert ["A1g", "2", "stretching", "Raman only", "ν1, ν2", "993, 3073"] in rows
    assert ["A2u", "1", "out-of-plane", "infrared only", "ν11", "674"] in rows
    found = heads_of(free_spectrum(analyse_molecule(benzene()), "bands"))
    assert [heads[1] for heads in found["infrared"]] == ["ν20", "ν19", "ν18", "ν11"]
    assert ("674", "ν11", "A2u (z)") in found["infrared"]
    assert {heads[1] for heads in found["raman"]} == {"ν1", "ν2", "ν6", "ν7", "ν8", "ν9", "ν10"}


# Common practice: the anti form is C2h and keeps exclusion; the gauche form is C2, all its 18 vibrations show in both.
def test_conformers_are_told_apart(pages: dict[str, str]) -> None:
    read = Reader(pages["conformers"])
    table = {squeezed(row[0]): [squeezed(cell) for cell in row[1:]] for row in read.tables[0]}
    assert table["all vibrations"][:4] == ["9 / 18", "9 / 18", "0 / 18", "0"]
    assert "A: point group C2h, B: point group C2" in squeezed(read.text[""])
    assert "A has a centre of inversion" in squeezed(read.text["answer"])
    marked = re.findall(r'<tr class="own">\s*<th scope="row">(.*?)</th>', pages["conformers"])
    assert "all vibrations" in marked
    assert len([one for one in drawings(pages["conformers"]) if one.get("role") == "img"]) == 2


def test_rows_that_agree_are_not_marked() -> None:
    same = analyse_molecule(dichloroethane(180.0))
    document = render_comparison(compare_molecules(same, same))
    assert '<tr class="own">' not in document
    assert "the same numbers of bands" in squeezed(Reader(document).text["answer"])


def test_single_atom_has_a_page_that_says_so(pages: dict[str, str]) -> None:
    assert "no vibrations" in squeezed(Reader(pages["argon"]).text["answer"])
    assert not Reader(pages["argon"]).tables


def test_picture_shows_every_atom_and_bond_with_the_flat_side_to_the_viewer() -> None:
    """Benzene has 12 atoms and 12 bonds; the ring lies across z, so z points to the viewer and the ring is open."""
    root = Tree.fromstring(molecule_picture(analyse_molecule(benzene())).svg)
    balls = root.findall(f"{SVG}circle")
    places = {(one.attrib["cx"], one.attrib["cy"]) for one in balls}
    assert len(places) == 12
    assert len({(one.attrib["x1"], one.attrib["y1"], one.attrib["x2"]) for one in root.findall(f"{SVG}line")}) == 12
    extent = np.ptp(np.array([[float(x), float(y)] for x, y in places]), axis=0)
    assert extent.min() > 0.7 * extent.max()
    assert {words_of(one) for one in root.iter(f"{SVG}text")} == {"C", "H", "x", "y", "z"}


@pytest.mark.parametrize("text", [HOSTILE, '"><img src=x onerror=alert(1)>', ESCAPES, "a & b ]]> <!--"])
def test_hostile_names_stay_text(text: str) -> None:
    expected = [tag for tag, _ in Reader(render_molecule(analyse_molecule(benzene("benzene")))).elements]
    result = analyse_molecule(benzene(text))
    read = Reader(render_molecule(result))
    assert [tag for tag, _ in read.elements] == expected
    compared = Reader(render_comparison(compare_molecules(result, result)))
    assert not {tag for tag, _ in compared.elements} & {"script", "img"}
    for document in (read, compared):
        assert not [name for _, attributes in document.elements for name in attributes if name.startswith("on")]
