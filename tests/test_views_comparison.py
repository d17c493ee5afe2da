"""Comparisons as text, page, JSON and CSV, and the command `compare`."""

from __future__ import annotations

import csv
import io
import json
from functools import lru_cache
from pathlib import Path

import pytest
from html_reader import Reader, drawings, squeezed
from literature import reference
from phases import of_phase
from test_cli import assert_refused
from views_cases import ESCAPES, FORMULA, HOSTILE, renamed

from sitesym import cli
from sitesym.analysis import analyse
from sitesym.comparison import Comparison, compare
from sitesym.views import compare_csv, compare_html, compare_json, compare_text

DEMO = Path(__file__).parent.parent / "structures_demo"
WARM, COLD = str(DEMO / "strontium_titanate_300K.cif"), str(DEMO / "strontium_titanate_77K.cif")
CALCITE, ARAGONITE = str(DEMO / "calcite.cif"), str(DEMO / "aragonite.cif")
PAIRS = {entry["name"]: entry for entry in reference("phase_pairs.toml")["pair"]}


@lru_cache(maxsize=64)
def compared(name: str) -> Comparison:
    entry = PAIRS[name]
    parts = (analyse(of_phase(entry[key]), scan=False, molecules=False) for key in ("parent", "child"))
    return compare(*parts, 0.1)


SCREEN = """\
SrTiO₃, Pm3̄m → I4/mcm

The space group of SrTiO₃, I4/mcm is a subgroup of that of SrTiO₃, Pm3̄m, of
index 6 (translationengleiche 3, klassengleiche 2); its axes are a + b, −a + b,
2c of the parent, its origin (0, 0, 0). Lengths differ by at most 0.3 %, and
atoms lie within 0.05 Å (root mean square 0.03 Å) of their places in the parent.
The primitive cell is twice as large: R (½, ½, ½) of the parent folds to the
zone centre. The parent allows 3 infrared frequencies, the child 8: 3 more as
degenerate species split; newly active Eu from T₂u, and Eu from R. The parent
allows no Raman frequencies, the child 7: newly active A₁g + B₁g + 2B₂g + 3Eg
from R.

Parent         SrTiO₃, Pm3̄m (number 221), Oh (m3̄m), order 48
Child          SrTiO₃, I4/mcm (number 140), D₄h (4/mmm), order 16
Relation       group and subgroup, index 6 (translationengleiche 3,
               klassengleiche 2)
Axes           a + b, −a + b, 2c; origin (0, 0, 0)
Stretches      0.9972, 0.9972, 0.9982 (principal, child over parent)
"""
"""Numbers: Fleury, Scott and Worlock, Phys. Rev. Lett. 21, 16 (1968), from memory; lengths from the two files."""


def test_first_screen_is_a_paragraph_for_a_draft(capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["compare", WARM, COLD]) == 0
    out, err = capsys.readouterr()
    assert out.startswith(SCREEN)
    assert len(SCREEN.splitlines()) <= 24
    assert err == ""


@pytest.mark.parametrize("name", PAIRS)
def test_text_keeps_to_80_columns(name: str) -> None:
    """Every pair: no line longer, no trailing space, the relation in words."""
    text = compare_text.render(compared(name))
    assert max(len(line) for line in text.splitlines()) <= 80 + text.count("\u0304")
    assert all(line == line.rstrip() for line in text.splitlines())
    words = {"group-subgroup": "is a subgroup of", "same": "by symmetry", "none": "No group-subgroup relation"}
    assert words[PAIRS[name]["relation"]] in " ".join(text.split())


def test_new_activity_is_told_by_where_it_comes_from() -> None:
    """Barium titanate: T1u is seen by the infrared before, T2u is silent; both are new in Raman (common practice)."""
    text = squeezed(compare_text.render(compared("barium titanate, cubic and tetragonal")))
    assert "3 more as degenerate species split; newly active E from T2u." in text
    assert "no Raman frequencies, the child 8: newly active 3A1 + B1 + 4E from T1u and T2u." in text
    assert "no other wavevector folds" in text


def test_polymorphs_are_told_by_counts(capsys: pytest.CaptureFixture[str]) -> None:
    """Calcite 8 infrared and 5 Raman, aragonite 21 and 30 (common practice), with site groups of the carbonate."""
    assert cli.main(["compare", CALCITE, ARAGONITE]) == 0
    text = squeezed(capsys.readouterr().out)
    assert "The first has 8 infrared and 5 Raman frequencies, the second 21 and 30." in text
    assert "2 CO3 (D3h on D3)" in text
    assert "4 CO3 (D3h on Cs)" in text
    assert "formula units 2 4" in text


def test_the_wrong_order_is_told(capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["compare", COLD, WARM]) == 0
    assert "the other way round" in capsys.readouterr().out


def test_labels_that_change_with_the_setting_are_named() -> None:
    """Aragonite: B1g of Pmcn is B3g of Pnma (permutation of the axes)."""
    text = squeezed(compare_text.render(compared("aragonite in two settings")))
    assert "B1g → B3g, B2g → B1g, B3g → B2g" in text


@pytest.mark.parametrize("name", PAIRS)
def test_json_keeps_its_contract(name: str) -> None:
    """The keys that other programs read, strict JSON in ASCII, and the numbers of the reference."""
    entry, text = PAIRS[name], compare_json.render(compared(name))
    document = json.loads(text, parse_constant=lambda value: pytest.fail(f"{value} is no JSON"))
    assert text.isascii()
    assert {"schema", "version", "relation", "supercell", "species", "new"} <= set(document)
    assert document["schema"] == 1
    assert document["relation"] == entry["relation"]
    assert set(document["new"]) == {"infrared", "raman"}
    if entry["relation"] == "none":
        assert document["supercell"] is None
        assert document["new"] == {"infrared": {}, "raman": {}}
        return
    assert {len(row) for row in document["supercell"]} == {3}
    centre = {row["parent"]: row["child"] for row in document["species"] if row["wavevector"] == [0, 0, 0]}
    assert centre == entry["correlation"]
    if entry["counted"]:
        assert document["new"] == {"infrared": entry["new_infrared"], "raman": entry["new_raman"]}


def test_json_of_a_folded_wavevector() -> None:
    """R of the cube, in units of the reciprocal of the primitive vectors, which are those of the cube."""
    document = compare_json.document(compared("strontium titanate, cubic and tetragonal"))
    row = next(row for row in document["species"] if row["parent"] is None)
    assert (row["wavevector"], row["conventional"], row["point"], row["star_size"]) == ([0.5] * 3, [0.5] * 3, "R", 1)
    assert row["child"] == PAIRS["strontium titanate, cubic and tetragonal"]["from_folding"]
    assert document["embedding"]["index"] == 6
    assert document["new_from"]["infrared"]["zone_centre_silent"] == {"Eu": 1}


def test_csv_has_one_row_for_each_path() -> None:
    tables = compare_csv.render(compared("strontium titanate, cubic and tetragonal")).split("\n\n")
    species, counts, sites = ([*csv.DictReader(io.StringIO(one))] for one in tables)
    raman = {row["child_species"]: int(row["child_modes"]) for row in species if row["new_raman"] == "yes"}
    assert raman == {"A1g": 1, "B1g": 1, "B2g": 2, "Eg": 3}
    assert [(row["structure"], row["infrared"], row["raman"]) for row in counts] == [
        ("parent", "3", "0"),
        ("child", "8", "7"),
    ]
    assert {row["child_site"]: row["parent_site"] for row in sites} == {"Sr": "Sr", "Ti": "Ti", "O1": "O", "O2": "O"}


@pytest.mark.parametrize(
    "name",
    [
        "strontium titanate, cubic and tetragonal",
        "calcite and aragonite",
        "sodium nitrite, paraelectric and ferroelectric",
    ],
)
def test_page_is_well_formed(name: str) -> None:
    """Tags match, ids are unique, links and labels lead somewhere, the drawings are XML, nothing is fetched."""
    document = compare_html.render(compared(name))
    read = Reader(document)
    ids = read.values("id")
    assert len(ids) == len(set(ids))
    assert {target.removeprefix("#") for target in read.values("href")} <= set(ids)
    assert set(" ".join(read.values("aria-labelledby")).split()) <= set(ids)
    assert len(read.tables) == read.captions
    assert len(drawings(document)) >= 2
    assert not {"script", "link", "img"} & {tag for tag, _ in read.elements}


def test_page_shows_the_answer() -> None:
    read = Reader(compare_html.render(compared("strontium titanate, cubic and tetragonal")))
    answer = squeezed(read.text["answer"])
    assert "newly active A1g + B1g + 2B2g + 3Eg from R" in answer
    assert "3 → 8" in answer
    assert "0 → 7" in answer


@pytest.mark.parametrize("name", [HOSTILE, FORMULA, ESCAPES])
def test_names_from_strangers_are_harmless(name: str) -> None:
    """Names of compounds, atoms and files that hold markup, formulas or terminal sequences."""
    entry = PAIRS["barium titanate, cubic and tetragonal"]
    result = compare(*(renamed(analyse(of_phase(entry[key])), name, name) for key in ("parent", "child")))
    page, text, table = compare_html.render(result), compare_text.render(result), compare_csv.render(result)
    assert "<script" not in page.lower()
    Reader(page)
    assert not any(ord(one) < 32 and one != "\n" for one in text)
    assert "\u202e" not in text + page
    assert not any(cell.startswith(("=", "+", "@")) for row in csv.reader(io.StringIO(table)) for cell in row)
    json.loads(compare_json.render(result))


@pytest.mark.parametrize(
    ("form", "start"), [("text", "SrTiO₃"), ("html", "<!doctype"), ("json", "{"), ("csv", "point,")]
)
def test_formats_are_written_by_name_and_suffix(
    form: str, start: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert cli.main(["compare", WARM, COLD, "--format", form]) == 0
    printed = capsys.readouterr().out
    assert printed.lower().startswith(start.lower())
    path = tmp_path / f"pair{cli.FORMATS[form][0]}"
    assert cli.main(["compare", WARM, COLD, "--output", str(path)]) == 0
    assert path.read_text(encoding="utf-8") == printed


def test_limits_and_settings_of_the_command(capsys: pytest.CaptureFixture[str]) -> None:
    """A strain of 0.1 % is too narrow for strontium titanate (0.3 %); a setting relabels the child."""
    assert cli.main(["compare", WARM, COLD, "--strain", "0.1", "--format", "json"]) == 0
    assert json.loads(capsys.readouterr().out)["refusal"]["code"] == "lattice"
    assert cli.main(["compare", ARAGONITE, ARAGONITE, "--child-setting", "Pnma", "--format", "json"]) == 0
    document = json.loads(capsys.readouterr().out)
    assert document["child"]["space_group"]["hermann_mauguin"] == "Pnma"
    assert {row["parent"]: row["child"] for row in document["species"]}["B1g"] == {"B3g": 1}


def test_mistakes_are_told_in_two_lines(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Exit codes 2 and 3; no file is overwritten."""
    empty = tmp_path / "empty.cif"
    empty.write_text("", encoding="utf-8")
    assert_refused(capsys, ["compare", WARM], 2, "CHILD")
    assert_refused(capsys, ["compare", WARM, COLD, "--strain", "80"], 2, "80 %")
    assert_refused(capsys, ["compare", WARM, COLD, "--displacement", "-1"], 2, "-1 Å")
    assert_refused(capsys, ["compare", WARM, COLD, "--child-setting", "Pnma"], 2, "Pnma")
    assert_refused(capsys, ["compare", "-", "-"], 2, "standard input")
    assert_refused(capsys, ["compare", WARM, str(tmp_path / "missing.cif")], 3, "missing.cif")
    assert_refused(capsys, ["compare", str(empty), COLD], 3, "empty.cif")
    assert_refused(capsys, ["compare", WARM, COLD, "--output", COLD, "--force"], 2, "structure file itself")
