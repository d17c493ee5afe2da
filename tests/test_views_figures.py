"""The drawings of the page: content, places and colours, against what crystallographers draw and WCAG asks for."""

from __future__ import annotations

import re
import tomllib
import xml.etree.ElementTree as Tree

import numpy as np
import pytest
from html_reader import DEMO, ROOT, SVG, Reader, demo, drawings, squeezed
from views_cases import case, disordered, triclinic

import sitesym
from sitesym.analysis import analyse
from sitesym.structure import Occupant, Site, Structure
from sitesym.symmetry.crystal import find_symmetry
from sitesym.views.figures import cell_picture, scan_drawing
from sitesym.views.figures.colours import element_colours
from sitesym.views.figures.contents import cell_contents
from sitesym.views.figures.edges import free_stretches
from sitesym.views.figures.view import TOWARD
from sitesym.views.html import page


# Common practice: an atom at a corner is drawn eight times, on an edge four times, on a face twice.
def test_corner_edge_and_face_atoms_are_repeated() -> None:
    lattice, points = np.diag([4.0, 5.0, 6.0]), np.array([[0, 0, 0], [0.5, 0, 0], [0.5, 0.5, 0], [0.5, 0.5, 0.5]])
    elements = ("He", "Ne", "Ar", "Kr")
    structure = Structure(lattice * 3, points, tuple(Site(one, (Occupant(one),)) for one in elements))
    contents = cell_contents(find_symmetry(structure), TOWARD)
    drawn = [elements[site] for site in contents.sites.tolist()]
    assert [drawn.count(one) for one in elements] == [8, 4, 2, 1]


def test_centring_fills_the_cell() -> None:
    """Diamond, Fd-3m: eight atoms in the cubic cell, 8 corners + 6 faces + 4 inside drawn (common practice)."""
    contents = cell_contents(find_symmetry(sitesym.read(DEMO / "silicon.cif")), TOWARD)
    assert len(contents.sites) == 18
    assert len(contents.bonds) == 16
    lengths = np.linalg.norm(contents.points[contents.bonds[:, 0]] - contents.points[contents.bonds[:, 1]], axis=1)
    assert np.abs(lengths - 2.352).max() < 0.005  # Si-Si 2.352 Å, from a = 5.431 Å


def test_complex_ions_are_drawn_whole() -> None:
    """Calcite: each drawn carbon has its three oxygens at 1.28 Å (Effenberger and others 1981, from memory)."""
    structure = sitesym.read(DEMO / "calcite.cif")
    contents = cell_contents(find_symmetry(structure), TOWARD)
    elements = np.array([structure.sites[site].element for site in contents.sites])
    carbons = np.flatnonzero(elements == "C")
    neighbours = np.bincount(contents.bonds.ravel(), minlength=len(elements))
    assert (neighbours[carbons] == 3).all()
    assert (elements == "O").sum() == 3 * len(carbons)
    assert not contents.bonds[np.isin(contents.bonds, np.flatnonzero(elements == "Ca")).any(axis=1)].size


def test_too_many_atoms_are_left_out_from_behind_and_it_is_said() -> None:
    symmetry = find_symmetry(sitesym.read(DEMO / "pyrope.cif"))
    whole, part = cell_contents(symmetry, TOWARD), cell_contents(symmetry, TOWARD, largest=50)
    assert whole.omitted == 0
    assert part.omitted == len(whole.sites) - 50
    assert (part.points @ TOWARD).min() >= np.sort(whole.points @ TOWARD)[-50] - 1e-9


def test_edges_are_left_out_inside_atoms() -> None:
    """An edge of 10 Å with balls of radius 1 Å at its start and middle, one of radius 2 Å that it misses by 3 Å."""
    points, radii = np.array([[0.0, 0, 0], [5.0, 0, 0], [7.0, 3.0, 0]]), np.array([1.0, 1.0, 2.0])
    stretches = free_stretches(np.zeros(3), np.array([10.0, 0, 0]), points, radii)
    assert np.allclose(stretches, [(0.1, 0.4), (0.6, 1.0)])


def test_mixed_site_is_drawn_as_a_pie_and_named_in_the_legend() -> None:
    picture = cell_picture(analyse(disordered()))
    assert [entry.words for entry in picture.legend] == ["Ca 0.9, Mg 0.1", "C", "O"]
    assert "<path" in picture.legend[0].mark
    assert "<path" not in picture.legend[1].mark


def test_letters_name_cell_edges_and_cartesian_axes() -> None:
    drawing = Tree.fromstring(cell_picture(analyse(triclinic())).svg)
    letters = [one.text for one in drawing.iter(f"{SVG}text")]
    assert all(letters.count(letter) == 1 for letter in "abcxyz")


@pytest.mark.parametrize("name", ["calcite", "forsterite", "yttrium aluminium garnet", "baddeleyite"])
def test_everything_drawn_lies_inside_the_picture(name: str) -> None:
    for picture in drawings(page(case(name))):
        left, top, width, height = map(float, picture.get("viewBox", "").split())
        for tag, x, y in (("circle", "cx", "cy"), ("line", "x1", "y1"), ("line", "x2", "y2"), ("text", "x", "y")):
            for one in picture.iter(f"{SVG}{tag}"):
                rim = float(one.get("r", 0))
                assert left <= float(one.get(x, "nan")) - rim + 0.1
                assert float(one.get(x, "nan")) + rim <= left + width + 0.1
                assert top <= float(one.get(y, "nan")) - rim + 0.1
                assert float(one.get(y, "nan")) + rim <= top + height + 0.1


def test_scan_is_drawn_on_a_logarithmic_axis_with_plateau_and_supergroup() -> None:
    """Strontium titanate at 77 K, cubic Pm-3m (221) within 0.1 Å: the octahedra turn by 1.4° (structures_demo)."""
    analysis = demo("strontium_titanate_77K.cif")
    drawing = Tree.fromstring(scan_drawing(analysis))
    assert analysis.scan is not None
    words = [one.text for one in drawing.iter(f"{SVG}text")]
    assert {"I4/mcm · 140", "Pm3\u0304m · 221", "used: 0.01 Å", "10⁻⁴", "10⁻¹"} <= set(words)
    circles = [float(one.get("cx", "nan")) for one in drawing.iter(f"{SVG}circle") if one.get("r") == "4"]
    assert len(circles) == len(analysis.scan.points)
    logs = np.log10([point.tolerance for point in analysis.scan.points])
    slopes = np.diff(circles) / np.diff(logs)
    assert np.ptp(slopes) < 0.02 * slopes.mean()
    plateau, square = drawing.iter(f"{SVG}rect")
    inside = [
        float(plateau.get("x", 0)) < x < float(plateau.get("x", 0)) + float(plateau.get("width", 0)) for x in circles
    ]
    assert inside == [point.number == 140 for point in analysis.scan.points]
    assert float(square.get("x", 0)) + 6 == pytest.approx(circles[-1], abs=0.2)
    assert "Next supergroup: Pm3m (number 221)" in squeezed(Reader(page(analysis)).text["tolerance"])


def luminance(colour: str) -> float:
    """Relative luminance as WCAG 2.1 defines it."""
    channels = [int(colour[k : k + 2], 16) / 255 for k in (1, 3, 5)]
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in channels]
    return float(np.dot((0.2126, 0.7152, 0.0722), linear))


def contrast(one: str, other: str) -> float:
    bright, dark = sorted((luminance(one), luminance(other)), reverse=True)
    return (bright + 0.05) / (dark + 0.05)


def schemes() -> list[dict[str, str]]:
    """Colour variables of the style sheet, light then dark."""
    style = (ROOT / "sitesym/views/templates/style.css").read_text(encoding="utf-8")
    blocks = re.findall(r":root \{(.*?)\}", style, re.DOTALL)[:2]
    return [dict(re.findall(r"--(\w+): (#\w{6});", block)) for block in blocks]


def test_text_has_the_contrast_that_accessibility_asks_for() -> None:
    """WCAG 2.1, 1.4.3: 4.5 to 1 for text of ordinary size."""
    for scheme in schemes():
        for name in ("ink", "soft", "accent", "caution", "serious"):
            assert contrast(scheme[name], scheme["paper"]) >= 4.5, name


def test_atoms_stand_out_from_light_and_dark_paper() -> None:
    """WCAG 2.1, 1.4.11: 3 to 1 for graphics; hydrogen is paler and gets a rim in ink."""
    table = tomllib.loads((ROOT / "sitesym/data/picture_colours.toml").read_text(encoding="utf-8"))
    for colour in [*table["fixed"].values(), *table["free"]["colours"]]:
        if colour != table["fixed"]["H"]:
            assert min(contrast(colour, scheme["paper"]) for scheme in schemes()) >= 2.95, colour
    hydrogen = cell_picture(demo("benzene.cif")).legend[1]
    assert hydrogen.words == "H"
    assert 'stroke="currentColor"' in hydrogen.mark


def test_elements_of_one_crystal_have_different_colours() -> None:
    names = ["Y", "Ba", "Cu", "Ca", "Sr", "Ti", "Mg", "Al", "Si", "O", "C", "N"]
    assert len(set(element_colours(names).values())) == len(names)
