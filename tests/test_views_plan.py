"""The run sheet as printed, as a page, as JSON and as CSV, read back by parsers that know nothing of the views."""

from __future__ import annotations

import csv
import io
import itertools
import json
import re
from typing import Any

import numpy as np
import pytest
from ase.build import bulk
from html_reader import SVG, Reader, drawings, squeezed
from plan_cases import CRYSTALS, measured, sheet
from views_cases import ESCAPES, HOSTILE, ascii_labels, case, renamed, with_questions

from sitesym.analysis import Analysis, analyse
from sitesym.experiment.run_sheet import RunSheet, plan
from sitesym.reading import read
from sitesym.views import plan_csv, plan_html, plan_json, plan_symbols, plan_text
from sitesym.views.labels import HTML
from sitesym.views.layout import width

SHEETS: list[tuple[str, dict[str, Any]]] = [(name, {"lasers": ("532",)}) for name in CRYSTALS] + [
    ("molybdenite 2H", {"sample": "flake", "curves": ("001",), "edges": ("100",)}),
    ("calcite", {"sample": "powder", "temperature": 77.0}),
    ("spinel", {"sample": "grain", "lasers": ("785", "514.5")}),
    ("lithium niobate", {"faces": ("001", "010"), "mounts": ("right-angle", "forward"), "geometries": ("x(z*)y",)}),
    ("rutile", {"geometries": ("z(RL)-z", "x(z*)y", "z(x+30° x+120°)-z", "z(xx)z")}),
    ("rock salt", {}),
]


def grown(formula: str, kind: str, edge: float) -> Analysis:
    """A simple crystal from a general library."""
    return analyse(read(bulk(formula, kind, a=edge)))


@pytest.fixture(scope="module", params=SHEETS, ids=lambda one: f"{one[0]} {' '.join(one[1])}")
def any_sheet(request: pytest.FixtureRequest) -> RunSheet:
    name, options = request.param
    return plan(grown("NaCl", "rocksalt", 5.64)) if name == "rock salt" else sheet(name, **options)


# Text -----------------------------------------------------------------------------------------------------------------


def test_lines_keep_to_the_width_of_a_terminal(any_sheet: RunSheet) -> None:
    text = plan_text.render(any_sheet)
    assert text.endswith("\n")
    assert [line for line in text.splitlines() if width(line) > 80] == []
    assert "\n\n\n" not in text


def test_every_plan_speaks_of_safety(any_sheet: RunSheet) -> None:
    """Laser class, laser safety officer, heating: in every view (IEC 60825-1; common practice)."""
    for text in (plan_text.render(any_sheet), plan_html.render(any_sheet), plan_json.render(any_sheet)):
        for words in ("IEC 60825-1", "laser safety officer", "never a clearance"):
            assert words in " ".join(text.split())


# Porto, Giordmaine and Damen, Phys. Rev. 147, 608 (1966), from memory: A1g and Eg of calcite, A1g not in z(xy)z̄.
def test_first_screen_of_calcite() -> None:
    """Printed exactly: what the reader sees first."""
    assert plan_text.render(sheet("calcite")).splitlines()[1:18] == [
        "Crystal   R3̄c (number 167, hexagonal axes)",
        "Sample    Crystal with the faces (001), (010) and (21̄0) (assumed, because none",
        "          was named); backscattering",
        "Axes      x ∥ a, y ∥ b*, z ∥ c of the cell of the input",
        "Safety    laser class, eyes, heating: see Cautions before you open the shutter",
        "",
        " 1  z(xx)z̄      (001), backscattering; laser ∥ x, analyser ∥ x",
        "    A₁g: a²     Eg: c²",
        " 2  z(xy)z̄      (001), backscattering; laser ∥ x, analyser ∥ y",
        "    Eg: c²",
        "    Against 1: Eg stays, A₁g goes.",
        "",
        "Bands of",
        "  A₁g  in 1, not in 2",
        "  Eg   in 1 and 2",
        "  Every Raman-active species is seen and told from every other.",
        "",
    ]


# Verble and Wieting, Phys. Rev. Lett. 25, 362 (1970), from memory: E1g of MoS2 is not seen from the basal plane.
def test_flake_of_molybdenite_misses_a_species_and_says_which_face_would_help() -> None:
    text = plan_text.render(sheet("molybdenite 2H", sample="flake"))
    assert "Sample    Flake with the face (001)" in text
    assert "Not seen in any geometry offered: E₁g." in text
    assert re.search(r"A face \(\d+\) would help: it shows E₁g\.", text)


def test_named_geometries_are_judged_as_they_stand() -> None:
    """Silicon (001), common practice; here diamond, whose rules are the same."""
    text = plan_text.render(sheet("diamond", geometries=("z(xy)-z", "z(xx)-z")))
    assert re.search(r" 1  z\(xy\)z̄ .*\n    T₂g: ", text)
    assert re.search(r" 2  z\(xx\)z̄ .*\n    nothing\n    forbidden: T₂g\n", text)


def test_powder_has_no_directions() -> None:
    text = plan_text.render(sheet("calcite", sample="powder"))
    assert "1  parallel" in text
    assert "2  crossed" in text
    assert "z(" not in text.split("Cautions")[0]


def test_crystal_without_raman_modes_is_said() -> None:
    """All optic modes of rock salt are T1u: infrared only (common practice)."""
    made = plan(grown("NaCl", "rocksalt", 5.64))
    assert "No optic mode of this crystal is Raman active" in plan_text.render(made)
    assert "T₁u(TO)" in plan_text.render(made)
    assert json.loads(plan_json.render(made))["geometries"] == []
    assert "Raman active" in Reader(plan_html.render(made)).text[""]


def test_serious_cautions_of_the_structure_stand_at_the_top() -> None:
    made = plan(with_questions(case("calcite"), "hydrogen_missing"))
    assert plan_text.render(made).splitlines()[1].startswith("! Question 0 (hydrogen_missing)")
    assert "Check first." in plan_html.render(made)


def test_flags_of_the_sample_stand_on_the_first_screen() -> None:
    """Arsenides are toxic (UN GHS): that is not to be found out about on page five."""
    text = plan_text.render(plan(grown("GaAs", "zincblende", 5.653)))
    assert "! Check the sample first: toxic (As" in " ".join(text.splitlines()[:10])


# Geometry notation ----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "text", "html"),
    [
        ("-z", "z̄", '<span class="bar">z</span>'),
        ("[1-10]", "[11̄0]", '[1<span class="bar">1</span>0]'),
        ("(00-1)", "(001̄)", '(00<span class="bar">1</span>)'),
        ("[10 -12 1]", "[10 1̄2̄ 1]", '[10 <span class="bar">12</span> 1]'),
        ("x-45°", "x−45°", "x−45°"),
        ("[110]+12.5°", "[110]+12.5°", "[110]+12.5°"),
    ],
)
def test_directions_are_set_with_bars(name: str, text: str, html: str) -> None:
    """Overbars as in International Tables; an angle keeps its sign."""
    assert plan_symbols.direction(name) == text
    assert plan_symbols.direction(name, HTML) == html


def test_every_notation_printed_in_json_can_be_typed_again() -> None:
    from sitesym.geometry.notation import parse_geometry

    for name in CRYSTALS:
        made = sheet(name, faces=("001", "010", "111"), mounts=("backscattering", "forward"))
        lattice = made.analysis.symmetry.lattice
        assert made.raman is not None
        for result in made.raman.results:
            again = parse_geometry(result.geometry.notation, lattice)
            for one, other in (
                (again.incoming, result.geometry.incoming), (again.outgoing, result.geometry.outgoing),
            ):  # fmt: skip
                overlap = np.abs(np.sum(one.vectors.conj() * other.vectors, axis=1))
                assert overlap == pytest.approx(1, abs=1e-3), result.geometry.notation


# JSON -----------------------------------------------------------------------------------------------------------------


def test_document_is_strict_and_keeps_the_contract(any_sheet: RunSheet) -> None:
    text = plan_json.render(any_sheet)
    document = json.loads(text, parse_constant=lambda name: pytest.fail(name))
    assert text.isascii()
    assert {"schema", "version", "axes", "geometries", "least_plan", "powder", "cautions"} <= set(document)
    for geometry in document["geometries"]:
        assert {"notation", "face", "species"} <= set(geometry)
        for one in geometry["species"]:
            assert {"label", "allowed", "phonon", "expression"} <= set(one)
            assert one["phonon"] in ("LO", "TO", "oblique", None)
            assert one["allowed"] is (one["expression"] != "0")
    least = document["least_plan"]
    assert {"measurements", "separated", "inseparable", "unseen"} <= set(least)
    assert all(0 <= index < len(document["geometries"]) for index in least["measurements"])
    assert all(len(row["depolarization"]) == 2 for row in document["powder"])
    assert all(isinstance(words, str) for words in document["cautions"])


# Arguello, Rousseau and Porto, Phys. Rev. 181, 1351 (1969), from memory.
def test_wurtzite_geometries_in_json() -> None:
    document = json.loads(
        plan_json.render(sheet("wurtzite (zinc oxide)", geometries=("z(xx)-z", "x(zz)-x", "x(zy)-x")))
    )
    found = [
        {(one["label"], one["phonon"]) for one in geometry["species"] if one["allowed"]}
        for geometry in document["geometries"]
    ]
    assert found == [{("A1", "LO"), ("E2", None)}, {("A1", "TO")}, {("E1", "TO")}]
    assert [geometry["notation"] for geometry in document["geometries"]] == ["z(xx)-z", "x(zz)-x", "x(zy)-x"]


def test_forbidden_species_are_listed_once() -> None:
    """y(xz)ȳ of LiNbO3 shows E(TO) and no E(LO), which is no entry of its own (Kaminow, Johnston 1967, from memory)."""
    document = json.loads(plan_json.render(sheet("lithium niobate", geometries=("y(xz)-y",))))
    assert document["geometries"][0]["species"] == [
        {"label": "A1", "allowed": False, "phonon": None, "expression": "0"},
        {"label": "E", "allowed": True, "phonon": "TO", "expression": "d²"},
    ]


def test_least_plan_points_at_the_right_geometries() -> None:
    made = sheet("calcite", faces=("001",), geometries=("x(yz)y",))
    document = json.loads(plan_json.render(made))
    chosen = [document["geometries"][k]["notation"] for k in document["least_plan"]["measurements"]]
    assert chosen == [step.measurement.result.geometry.notation for step in made.steps]
    assert document["geometries"][0]["notation"] == "x(yz)y"
    assert document["geometries"][0]["face"] is None
    assert document["least_plan"]["separated"] == [["A1g", "Eg"]]


def test_powder_limits_are_the_published_ones() -> None:
    """0 to 3/4 for A1g of a uniaxial crystal, 3/4 for the rest; 0 for A1g of a cubic one (Long 2002, from memory)."""
    rows = {one["label"]: one["depolarization"] for one in json.loads(plan_json.render(sheet("calcite")))["powder"]}
    assert rows == {"A1g": [0.0, 0.75], "Eg": [0.75, 0.75]}
    rows = {one["label"]: one["depolarization"] for one in json.loads(plan_json.render(sheet("spinel")))["powder"]}
    assert rows == {"A1g": [0.0, 0.0], "Eg": [0.75, 0.75], "T2g": [0.75, 0.75]}


def test_infinite_limits_are_null_with_words() -> None:
    """The antisymmetric part of a species raises its ratio without limit (Placzek 1934, from memory)."""
    rows = json.loads(plan_json.render(sheet("alpha-quartz")))["powder"]
    (resonant,) = [row for row in rows if row["label"] == "E"]
    assert resonant["resonance"][1] is None
    assert "without limit" in resonant["words"]


# CSV ------------------------------------------------------------------------------------------------------------------


def tables(text: str) -> list[list[list[str]]]:
    return [list(csv.reader(io.StringIO(block))) for block in text.split("\n\n")]


def test_measurements_are_a_table(any_sheet: RunSheet) -> None:
    text = plan_csv.render(any_sheet)
    assert text.isascii()
    rows = tables(text)[0]
    assert rows[0] == list(plan_csv.MEASUREMENT_COLUMNS)
    assert {len(row) for row in rows} == {len(rows[0])}
    shown = {(int(row[0]), row[8], row[9]) for row in rows[1:] if row[10] == "yes"}
    expected = {
        (number, one.label, one.phonon or "")
        for number, step in enumerate(any_sheet.steps, start=1)
        for one in step.measurement.result.allowed
    } | {
        (number, label, "")
        for number, one in enumerate(any_sheet.unoriented, start=1)
        for label, _ in one.species
    }  # fmt: skip
    assert shown == expected


def test_curves_are_exported_point_by_point() -> None:
    """Calcite on (001): A1g a² at every angle, nothing crossed; Eg c² in both (Loudon 1964, from memory)."""
    made = sheet("calcite", curves=("001",))
    rows = tables(plan_csv.render(made))[1]
    assert rows[0] == list(plan_csv.CURVE_COLUMNS)
    points = {(row[1], float(row[3])): (float(row[4]), float(row[5])) for row in rows[1:]}
    assert points["A1g", 40.0] == pytest.approx((1.0, 0.0))
    assert points["Eg", 40.0] == pytest.approx((1.0, 1.0))
    assert {row[0] for row in rows[1:]} == {"001"}
    assert {angle for label, angle in points if label == "Eg"} == set(np.arange(0.0, 361.0, 2.0))


# HTML -----------------------------------------------------------------------------------------------------------------


def test_page_is_well_formed_with_unique_ids_and_living_links(any_sheet: RunSheet) -> None:
    page = Reader(plan_html.render(any_sheet))
    ids = page.values("id")
    assert len(ids) == len(set(ids))
    assert page.captions == len(page.tables)
    named = " ".join(page.values("aria-labelledby")).split()
    jumps = [target.removeprefix("#") for target in page.values("href")]
    assert set(named) | set(jumps) <= set(ids)


def test_page_needs_nothing_from_elsewhere(any_sheet: RunSheet) -> None:
    page = plan_html.render(any_sheet)
    elements = Reader(page).elements
    tags = {tag for tag, _ in elements}
    assert not tags & {"script", "link", "img", "iframe", "object", "embed", "base", "form", "image", "use"}
    assert not [name for _, attributes in elements for name in attributes if name.startswith("on")]
    assert "url(" not in page
    assert "@import" not in page
    assert re.findall(r"https?://\S+", page.replace("http://www.w3.org/2000/svg", "")) == []
    assert "@media print" in page
    assert "prefers-color-scheme: dark" in page


def test_headings_descend_without_a_gap(any_sheet: RunSheet) -> None:
    levels = [int(tag[1]) for tag, _ in Reader(plan_html.render(any_sheet)).elements if re.fullmatch(r"h[1-6]", tag)]
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(later - earlier <= 1 for earlier, later in itertools.pairwise(levels))


def test_each_measurement_has_a_sketch_told_in_words(any_sheet: RunSheet) -> None:
    pictures = [one for one in drawings(plan_html.render(any_sheet)) if one.get("role") == "img"]
    sketches = [one for one in pictures if "Set-up" in (one.findtext(f"{SVG}title") or "")]
    assert len(sketches) == len(any_sheet.steps)
    for picture in sketches:
        assert "laser" in (picture.findtext(f"{SVG}desc") or "")


def test_reading_table_marks_what_each_measurement_shows() -> None:
    made = sheet("lithium niobate")
    rows = Reader(plan_html.render(made)).tables[0]
    assert [cell.strip() for cell in rows[0]] == ["Bands of", "1", "2", "3", "4"]
    for row in rows[1:]:
        name = ascii_labels(row[0])
        seen = [
            name in {one.name for one in step.measurement.result.allowed} for step in made.steps
        ]  # fmt: skip
        assert [cell.startswith("●") for cell in row[1:]] == seen


def test_names_from_files_do_no_harm() -> None:
    for text in (HOSTILE, ESCAPES, '"><img src=x onerror=alert(1)>'):
        made = plan(renamed(case("calcite"), text, text))
        page = plan_html.render(made)
        tags = {tag for tag, _ in Reader(page).elements}
        assert not tags & {"script", "img"}
        assert "\x1b" not in page + plan_text.render(made) + plan_csv.render(made)
        assert "\u202e" not in page + plan_text.render(made)


def test_answer_of_the_page_is_that_of_the_text() -> None:
    words = squeezed(re.sub(r"<[^>]+>", " ", plan_html.render(sheet("calcite")).split('id="sheet"')[1]))
    assert "Every Raman-active species is seen and told from every other." in words


# Comparison -----------------------------------------------------------------------------------------------------------


def test_measurement_is_compared_with_the_earlier_one_most_like_it() -> None:
    """Of LiNbO3: y(zz)ȳ differs from y(xx)ȳ by E(LO) only, from the others by more."""
    made = sheet("lithium niobate")
    assert [step.comparison and step.comparison.other for step in made.steps] == [None, 0, 1, 2]
    last = made.steps[3].comparison
    assert last is not None
    assert (last.stay, last.go, last.new) == (("A1(TO)",), ("E(LO)",), ())


# Fit ------------------------------------------------------------------------------------------------------------------


def test_fit_stands_before_the_plan_in_every_view() -> None:
    """A tensor diag(1, 0.3) made by hand, with noise: the ratio is found and said."""
    made = plan(case("lithium niobate"), faces=["010"], measured=measured("A1(TO)"))
    text = plan_text.render(made)
    assert text.index("Fit of A₁(TO) on (010)") < text.index(" 1  ")
    assert re.search(r"b/a = 0\.\d+ ± 0\.0\d+", text)
    document = json.loads(plan_json.render(made))["fit"]
    (ratio,) = [one for one in document["values"] if one["name"] == "b/a"]
    assert ratio["value"] == pytest.approx(0.3, abs=5 * ratio["error"])
    page = plan_html.render(made)
    assert "b/a = 0" in page
    circles = [len(list(one.iter(f"{SVG}circle"))) for one in drawings(page)]
    assert max(circles) > 50
