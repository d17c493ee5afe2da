"""Molecules in JSON, CSV, Markdown and LaTeX, against the contract and the published correlations."""

from __future__ import annotations

import csv
import io
import json

import pytest
from test_fate import CASES, NAMES, analysed, row_of
from views_cases import ESCAPES, FORMULA, HOSTILE, SPECIALS, case, renamed

from sitesym.analysis import analyse
from sitesym.views import csv as csv_view
from sitesym.views import json as json_view
from sitesym.views import latex, layout, markdown, text
from sitesym.views import molecule_sentences as words

PARAMETERS = pytest.mark.parametrize("name", NAMES)

VIBRATION = {
    "species": str, "count": int, "kind": str, "site": dict, "crystal": dict,
    "free": {"infrared": bool, "raman": bool}, "site_activity": {"infrared": bool, "raman": bool},
    "crystal_activity": {"infrared": bool, "raman": bool},
}  # fmt: skip
MOLECULE = {
    "formula": str, "count_primitive": int, "point_group": str, "deviation": float, "site_group": str,
    "hermann_mauguin": str, "vibrations": [VIBRATION],
    "librations": {"site": dict, "crystal": dict}, "translations": {"site": dict, "crystal": dict},
}  # fmt: skip
"""The contract: every key that was promised to other programs, with the type of its value."""


def check(pattern: object, value: object, path: str = "") -> None:
    if isinstance(pattern, dict):
        assert isinstance(value, dict), path
        for key, inner in pattern.items():
            assert key in value, f"{path}.{key}"
            check(inner, value[key], f"{path}.{key}")
    elif isinstance(pattern, list):
        assert isinstance(value, list), path
        for item in value:
            check(pattern[0], item, f"{path}[]")
    else:
        assert isinstance(value, pattern), f"{path}: {value!r}"


def document(name: str) -> dict:
    rendered = json_view.render(analysed(name))
    assert rendered.isascii()
    return json.loads(rendered)


@PARAMETERS
def test_json_molecules_keep_the_contract_and_the_published_values(name: str) -> None:
    reference = CASES[NAMES.index(name)]
    found = document(name)
    check([MOLECULE], found["molecules"])
    number = list(analysed(name).molecular.molecules).index(row_of(name))
    molecule = found["molecules"][number]
    assert molecule["count_primitive"] == reference["count_primitive"]
    assert molecule["point_group"] == reference["free_group"]
    assert molecule["site_group"] == reference["site_group"]
    for vibration in reference["vibrations"]:
        own = [one for one in molecule["vibrations"] if one["species"] == vibration["species"]]
        assert own
        for one in own:
            assert one["crystal"] == vibration["crystal"]
            assert one["free"] == {"infrared": vibration["free_infrared"], "raman": vibration["free_raman"]}
            seen = set(vibration["crystal"]) & set(reference["crystal_infrared"])
            assert one["crystal_activity"]["infrared"] == bool(seen)
            assert one["crystal_activity"]["raman"] == bool(set(vibration["crystal"]) & set(reference["crystal_raman"]))
    for key in ("librations", "translations"):
        if key in reference:
            assert molecule[key]["crystal"] == reference[key]["crystal"]


@PARAMETERS
def test_json_origins_add_up_to_the_optic_modes(name: str) -> None:
    for row in document(name)["species"]:
        assert row["translational"] + row["librational"] + row["internal"] + row["framework"] == row["optic"]


def test_json_without_molecules_says_that_they_were_not_looked_for() -> None:
    found = json_view.document(analyse(analysed("calcite").structure, scan=False, molecules=False))
    assert (found["molecules"], found["units"], found["expected_bands"]) == ([], [], [])
    assert {row["internal"] for row in found["species"]} == {None}


def test_json_groups_of_linear_molecules_are_plain_ascii() -> None:
    assert document("carbon dioxide")["molecules"][0]["point_group"] == "Dinfh"
    assert document("portlandite")["molecules"][0]["point_group"] == "Cinfv"
    assert document("calcite")["molecules"][0]["vibrations"][0]["names"] == ["nu1"]


def test_json_expected_bands_of_calcite() -> None:
    """The line spectrum: 879 cm-1 in infrared along z only, 1063 in Raman only (Halford 1946)."""
    bands = document("calcite")["expected_bands"]
    at = {(band["wavenumber"], band["species"]): band for band in bands}
    assert at[879.0, "A2u"]["infrared"]
    assert at[879.0, "A2u"]["polar"] == ["z"]
    assert (at[1063.0, "A1g"]["infrared"], at[1063.0, "A1g"]["raman"]) == (False, True)


@PARAMETERS
def test_csv_of_the_diagram_is_the_published_correlation(name: str) -> None:
    reference = CASES[NAMES.index(name)]
    rows = list(csv.DictReader(io.StringIO(csv_view.molecules_table(analysed(name)))))
    number = str(1 + list(analysed(name).molecular.molecules).index(row_of(name)))
    for vibration in reference["vibrations"]:
        own = [
            r
            for r in rows
            if r["molecule"] == number and r["motion"] == "vibration" and r["free_species"] == vibration["species"]
        ]
        for kind in {row["kind"] for row in own}:
            crystal: dict[str, int] = {}
            for row in own:
                if row["kind"] == kind:
                    times = int(row["site_count"]) * int(row["crystal_count"])
                    crystal[row["crystal_species"]] = crystal.get(row["crystal_species"], 0) + times
                    assert (row["infrared"] == "yes") == (row["crystal_species"] in reference["crystal_infrared"])
                    assert (row["raman"] == "yes") == (row["crystal_species"] in reference["crystal_raman"])
            assert crystal == vibration["crystal"]


def test_csv_species_table_has_the_origins() -> None:
    rows = {row["species"]: row for row in csv.DictReader(io.StringIO(csv_view.species_table(analysed("calcite"))))}
    assert [rows["Eu"][name] for name in words.ORIGINS] == ["2", "1", "2", "0"]


def test_markdown_and_latex_show_the_correlation() -> None:
    document = markdown.render(analysed("calcite"))
    assert "- Units: 2 CO₃ (D₃h on D₃); 2 Ca" in document
    assert "| ν3 | E′ | I R | E | I R | Eg | - R |  |" in document
    assert "|  |  |  |  |  | Eu | I - | E ∥ (x, y) |" in document
    assert "- ν3 (E′ stretching, near 1415 cm⁻¹, infrared and Raman in the free ion) keeps its degeneracy" in document
    table = latex.render(analysed("calcite"))
    assert "$\\nu$3 & $E'$ & I R & $E$ & I R & $E_{g}$ & - R &  \\\\" in table
    assert "(U+" not in table


@pytest.mark.parametrize("label", [HOSTILE, FORMULA, ESCAPES, SPECIALS])
def test_labels_of_strangers_do_no_harm(label: str) -> None:
    """The labels of atoms come from files; they stand in titles only where units must be told apart."""
    result = renamed(case("calcite"), "name", label)
    assert max(map(layout.width, text.render(result).splitlines())) <= 80
    assert "\x1b" not in text.render(result) + markdown.render(result) + latex.render(result)
    json.loads(json_view.render(result))
    for row in csv.reader(io.StringIO(csv_view.render(result))):
        assert not any(cell.startswith(("=", "+", "@", "\t", "\r")) for cell in row)


def test_the_method_note_speaks_of_molecules_only_where_there_are_some() -> None:
    report = text.render(analysed("calcite"))
    for cited in ("Halford", "Hornig", "H. Winston", "Fateley", "Cordero"):
        assert cited in report.partition("Method")[2]
    without = text.render(analyse(analysed("calcite").structure, scan=False, molecules=False))
    assert "Cordero" not in without
    assert "Molecules and ions." not in without
