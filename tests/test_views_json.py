"""The JSON document against its contract, published numbers and strict readers."""

from __future__ import annotations

import json
from dataclasses import replace
from typing import Any

import pytest
from views_cases import ENTRIES, HOSTILE, case, disordered, of_entry, renamed, triclinic, with_questions

from sitesym.analysis import Analysis, analyse
from sitesym.structure import DeclaredSymmetry
from sitesym.version import __version__
from sitesym.views import json as view

NUMBER = (int, float)
OPTIONAL_COUNT = (int, type(None))
CONTRACT: dict[str, Any] = {
    "schema": int,
    "version": str,
    "input": {
        "path": str, "format": str, "formula": str, "atoms_in_cell": int,
        "warnings": [{"code": str, "message": str}],
    },
    "space_group": {
        "number": int, "hermann_mauguin": str, "hall": str, "tolerance": float,
        "declared": (dict, type(None)), "scan": [{"tolerance": float, "number": OPTIONAL_COUNT}],
    },
    "factor_group": {"schoenflies": str, "hermann_mauguin": str, "order": int, "axes": str},
    "sites": [{
        "label": str, "element": str, "wyckoff": str, "multiplicity": int,
        "site_group": {"schoenflies": str, "hermann_mauguin": str}, "contribution": dict,
    }],
    "species": [{
        "label": str, "dimension": int, "total": int, "acoustic": int, "optic": int, "infrared": bool, "raman": bool,
        "hyper_raman": bool, "polar": [str],
        "raman_tensor": {"letters": [str], "components": [{"tensor": [[str]], "polar": (list, type(None))}]},
        "translational": OPTIONAL_COUNT, "librational": OPTIONAL_COUNT, "internal": OPTIONAL_COUNT,
    }],
    "totals": {
        "atoms_primitive": int, "branches": int, "infrared": int, "raman": int, "infrared_and_raman": int,
        "silent": int,
    },
    "molecules": list,
}  # fmt: skip
"""Every key that was promised to other programs, with the type of its value; a list holds the pattern of its items."""

CASES = {
    "calcite": lambda: case("calcite"),
    "quartz": lambda: case("alpha-quartz"),
    "gypsum": lambda: case("gypsum"),
    "forsterite": lambda: case("forsterite"),
    "garnet": lambda: case("yttrium aluminium garnet"),
    "carbide with primes": lambda: case("tungsten carbide"),
    "scheelite with pairs": lambda: case("scheelite"),
    "triclinic": lambda: analyse(triclinic()),
    "no scan": lambda: analyse(triclinic(), scan=False),
    "disordered": lambda: analyse(disordered()),
    "doubtful": lambda: with_questions(case("rutile"), "hydrogen_missing", "deuterium"),
}


def parsed(analysis: Analysis) -> dict[str, Any]:
    """The document through a strict reader: no NaN, no infinity, no key twice."""

    def refuse(constant: str) -> None:
        raise AssertionError(f"{constant} is not JSON")

    def once(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
        assert len({key for key, _ in pairs}) == len(pairs)
        return dict(pairs)

    text = view.render(analysis)
    assert text.isascii()
    assert text.endswith("}\n")
    document: dict[str, Any] = json.loads(text, parse_constant=refuse, object_pairs_hook=once)
    return document


def check(value: Any, pattern: Any, where: str) -> None:
    if isinstance(pattern, dict):
        for key, inner in pattern.items():
            assert key in value, f"{where}.{key} is missing"
            check(value[key], inner, f"{where}.{key}")
    elif isinstance(pattern, list):
        assert isinstance(value, list), where
        for number, item in enumerate(value):
            check(item, pattern[0], f"{where}[{number}]")
    else:
        kinds = pattern if isinstance(pattern, tuple) else (pattern,)
        assert type(value) in kinds, f"{where} is {value!r}"


@pytest.mark.parametrize("name", CASES)
def test_document_keeps_the_contract(name: str) -> None:
    """Every promised key is there with a value of the promised type."""
    document = parsed(CASES[name]())
    check(document, CONTRACT, "document")
    assert (document["schema"], document["version"]) == (1, __version__)
    assert document["species"]
    assert document["sites"]


@pytest.mark.parametrize(
    "name", ["calcite", "rutile", "alpha-quartz", "forsterite", "gypsum", "tungsten carbide", "urea"]
)
def test_numbers_are_the_published_ones(name: str) -> None:
    """Species, activity, sites and totals against tests/reference/decompositions.toml, where the sources stand."""
    entry, document = ENTRIES[name], parsed(case(name))
    rows = {row["label"]: row for row in document["species"]}
    for key in ("total", "acoustic", "optic"):
        assert {label: row[key] for label, row in rows.items() if row[key]} == entry[key]
    for key in ("infrared", "raman"):
        assert {label for label, row in rows.items() if row[key] and row["optic"]} == set(entry[key])
        assert document["totals"][key] == sum(entry["optic"][label] for label in entry[key])
    assert {site["label"]: site["contribution"] for site in document["sites"]} == entry["contributions"]
    assert document["space_group"]["number"] == entry["space_group"]
    assert document["factor_group"]["schoenflies"] == entry["factor_group"]
    assert document["totals"]["atoms_primitive"] == entry["atoms_primitive"]


def test_totals_of_calcite() -> None:
    """Porto, Giordmaine, Damen, Phys. Rev. 147, 608 (1966), from memory: 5 Raman, 8 infrared, 5 silent, 0 both."""
    totals = parsed(case("calcite"))["totals"]
    wanted = {"infrared": 8, "raman": 5, "infrared_and_raman": 0, "silent": 5, "branches": 30, "atoms_primitive": 10}
    assert {key: totals[key] for key in wanted} == wanted


def test_every_species_is_listed_also_those_without_modes() -> None:
    """Rock salt has modes in T1u alone; the class m-3m has ten species (common practice)."""
    rows = parsed(case("rock salt"))["species"]
    assert len(rows) == 10
    assert {row["label"] for row in rows if row["total"]} == {"T1u"}


def test_labels_are_plain_ascii_with_primes() -> None:
    """Class -6m2 of tungsten carbide: the symbols of Mulliken (1955) typed with apostrophes."""
    rows = parsed(case("tungsten carbide"))["species"]
    assert [row["label"] for row in rows] == ["A1'", "A2'", "E'", "A1''", "A2''", "E''"]


def test_tensors_have_letters_and_polar_directions() -> None:
    """Loudon, Adv. Phys. 13, 423 (1964), from memory: D3d Eg with c, d; D3 E(x), E(y) with dipoles along x and y."""
    calcite = {row["label"]: row["raman_tensor"] for row in parsed(case("calcite"))["species"]}
    first, second = (component["tensor"] for component in calcite["Eg"]["components"])
    assert calcite["Eg"]["letters"] == ["c", "d"]
    assert first == [["c", "", ""], ["", "-c", "d"], ["", "d", ""]]
    assert second == [["", "-c", "-d"], ["-c", "", ""], ["-d", "", ""]]
    assert calcite["A2u"]["letters"] == []
    assert calcite["A2u"]["components"] == [{"tensor": [["", "", ""]] * 3, "polar": [0.0, 0.0, 1.0]}]
    quartz = {row["label"]: row["raman_tensor"] for row in parsed(case("alpha-quartz"))["species"]}
    assert [component["polar"] for component in quartz["E"]["components"]] == [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0]]
    assert quartz["A1"]["components"][0]["polar"] is None


def test_open_directions_are_told_from_fixed_ones() -> None:
    """Monoclinic: Au along the unique axis y, Bu somewhere in the plane xz (common practice)."""
    rows = {row["label"]: row for row in parsed(case("gypsum"))["species"]}
    assert rows["Au"]["raman_tensor"]["components"][0]["polar"] == [0.0, 1.0, 0.0]
    assert rows["Bu"]["raman_tensor"]["components"][0]["polar"] is None
    assert rows["Bu"]["polar"] == ["x", "z"]
    assert len(rows["Bu"]["polar_space"]) == 2


def test_what_the_file_declares_is_kept_beside_what_was_found() -> None:
    calcite = of_entry(ENTRIES["calcite"])
    assert parsed(analyse(calcite))["space_group"]["declared"] is None
    stated = replace(calcite, declared=DeclaredSymmetry(155, "R 3 2:H", None))
    document = parsed(analyse(stated))
    assert document["space_group"]["declared"] == {"number": 155, "hermann_mauguin": "R 3 2:H", "hall": None}
    assert document["space_group"]["number"] == 167
    assert "declared_differs" in [warning["code"] for warning in document["input"]["warnings"]]


def test_warnings_are_the_cautions_in_their_order() -> None:
    doubtful = with_questions(case("rutile"), "deuterium", "hydrogen_missing")
    assert [warning["code"] for warning in parsed(doubtful)["input"]["warnings"]] == ["hydrogen_missing", "deuterium"]
    assert parsed(doubtful)["input"]["warnings"][1]["message"].startswith("Question 0")


def test_scan_lists_every_tolerance_and_is_empty_when_none_was_made() -> None:
    assert [point["number"] for point in parsed(case("calcite"))["space_group"]["scan"]] == [167] * 7
    bare = parsed(analyse(triclinic(), scan=False))["space_group"]
    assert (bare["scan"], bare["plateau"], bare["supergroup"]) == ([], None, None)


def test_settings_of_orthorhombic_crystals_translate_labels() -> None:
    """Perovskites: B1g of Pbnm is B2g of Pnma (7 modes in either; Iliev 1998, from memory)."""
    settings = parsed(case("calcium titanate"))["settings"]
    standard = next(one for one in settings if one["standard"])
    assert standard["hermann_mauguin"].replace(" ", "") == "Pnma"
    assert standard["labels"]["B1g"] == "B2g"
    assert parsed(case("calcite"))["settings"] == []


@pytest.mark.parametrize("name", [HOSTILE, '"},{"', "\u202e\x00\x1b", "\udcff.cif", "NaN", "方解石"])
def test_foreign_names_are_data_and_nothing_else(name: str) -> None:
    """Names come back as they were, except bytes that are no text, which strict readers refuse."""
    document = parsed(renamed(case("rutile"), name, name))
    wanted = name.replace("\udcff", "\ufffd")
    assert document["input"]["path"] == document["input"]["name"] == wanted
    assert document["sites"][0]["label"] == wanted
