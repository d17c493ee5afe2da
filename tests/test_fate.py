"""What becomes of each vibration, against the published correlations of tests/reference/correlations.toml."""

from __future__ import annotations

from functools import cache
from typing import Any

import pytest
from literature import expanded, reference

from sitesym.analysis import Analysis, analyse
from sitesym.fate import Counts, Degeneracy, Fate, counts
from sitesym.known_units import composition_of
from sitesym.molecular import MoleculeRow

CASES = reference("correlations.toml")["case"]
NAMES = [case["name"] for case in CASES]
PARAMETERS = pytest.mark.parametrize("name", NAMES)


@cache
def analysed(name: str) -> Analysis:
    case = CASES[NAMES.index(name)]
    sites = [{"label": site["label"], "element": site["element"], "xyz": site["position"]} for site in case["sites"]]
    return analyse(expanded(case["hermann_mauguin"], case["lattice"], sites), scan=False)


def row_of(name: str) -> MoleculeRow:
    wanted = composition_of(CASES[NAMES.index(name)]["unit"])
    return next(row for row in analysed(name).molecular.molecules if composition_of(row.formula) == wanted)


def fate(name: str, species: str) -> Fate:
    return next(one for one in row_of(name).fates if one.free.label == species)


def published_counts(case: dict[str, Any], vibration: dict[str, Any]) -> Counts:
    """Bands of one vibration in the crystal, from the published species and their activity."""
    infrared, raman = set(case["crystal_infrared"]), set(case["crystal_raman"])
    parts = vibration["crystal"]
    return Counts(
        sum(parts.values()),
        sum(count for label, count in parts.items() if label in infrared),
        sum(count for label, count in parts.items() if label in raman),
        sum(count for label, count in parts.items() if label in infrared & raman),
    )


@PARAMETERS
def test_number_of_bands_in_the_crystal_is_the_published_one(name: str) -> None:
    case = CASES[NAMES.index(name)]
    for vibration in case["vibrations"]:
        for one in row_of(name).fates:
            if one.free.label == vibration["species"]:
                assert one.in_crystal == published_counts(case, vibration), vibration["name"]
                assert one.at_site.components == sum(vibration["site"].values()), vibration["name"]
                assert one.at_free.infrared == vibration["free_infrared"]
                assert one.at_free.raman == vibration["free_raman"]


@PARAMETERS
def test_branches_add_up_to_the_crystal(name: str) -> None:
    """What each species of the site gives, times how often it occurs, is all that the crystal shows."""
    row = row_of(name)
    for one in (*row.fates, *row.librations, *row.translations):
        summed: dict[str, int] = {}
        for branch in one.branches:
            for part in branch.crystal:
                summed[part.label] = summed.get(part.label, 0) + branch.site.count * part.count
        assert summed == {part.label: part.count for part in one.crystal}


@PARAMETERS
def test_activity_comes_with_the_site_and_is_never_lost(name: str) -> None:
    """Frobenius reciprocity (Fateley, McDevitt and Bentley 1971 use it throughout): a species of the site is active
    exactly when one of its components in the crystal is, and what is active in the free unit stays so."""
    row = row_of(name)
    for one in (*row.fates, *row.librations, *row.translations):
        for branch in one.branches:
            assert branch.site.activity.infrared == (counts(branch.crystal).infrared > 0)
            assert branch.site.activity.raman == (counts(branch.crystal).raman > 0)
        assert one.at_free.infrared <= one.at_site.infrared <= one.in_crystal.infrared
        assert one.at_free.raman <= one.at_site.raman <= one.in_crystal.raman


@PARAMETERS
def test_librations_and_translations_are_followed_species_by_species(name: str) -> None:
    """Their sum is that of the published ones, where these are given."""
    case, row = CASES[NAMES.index(name)], row_of(name)
    for key, fates in (("librations", row.librations), ("translations", row.translations)):
        summed: dict[str, int] = {}
        for one in fates:
            for part in one.crystal:
                summed[part.label] = summed.get(part.label, 0) + one.free.count * part.count
        if key in case:
            assert summed == case[key]["crystal"]


@pytest.mark.parametrize(
    ("name", "species", "expected"),
    [
        ("calcite", "A1'", Degeneracy.NONE),
        ("calcite", "E'", Degeneracy.KEPT),
        ("aragonite", "E'", Degeneracy.LIFTED),
        ("scheelite", "T2", Degeneracy.PARTLY),
        ("scheelite", "E", Degeneracy.LIFTED),
        ("barite", "T2", Degeneracy.LIFTED),
        ("zircon", "T2", Degeneracy.PARTLY),
        ("potassium hexachloroplatinate", "T1u", Degeneracy.KEPT),
        ("carbon dioxide", "Pi_u", Degeneracy.KEPT),
        ("benzene", "E1u", Degeneracy.LIFTED),
    ],
)
def test_what_the_site_does_to_degeneracy(name: str, species: str, expected: Degeneracy) -> None:
    """Site group splitting as in Halford 1946 and Hornig 1948 (common practice): a D3 or S6 site keeps E, Cs and Ci
    keep nothing, S4 and D2d keep a pair of T2."""
    assert fate(name, species).degeneracy is expected


@pytest.mark.parametrize(
    ("name", "species", "expected"),
    [
        ("aragonite", "A1'", ("infrared",)),  # the forbidden 1083 cm-1 band of aragonite (common practice)
        ("aragonite", "A2''", ("raman",)),
        ("calcite", "A1'", ()),
        ("calcite", "A2''", ()),
        ("barite", "A1", ("infrared",)),
        ("scheelite", "A1", ()),
        ("scheelite", "E", ("infrared",)),
        ("potassium hexafluoroarsenate", "T2u", ("infrared",)),
        ("benzene", "A2g", ("raman",)),
        ("benzene", "B2u", ("infrared",)),
        ("benzene", "A1g", ()),
        ("sulfur", "B1", ("infrared", "raman")),
    ],
)
def test_what_the_site_allows(name: str, species: str, expected: tuple[str, ...]) -> None:
    """Forbidden bands that the crystal shows: Halford 1946, Hornig 1948, and for AsF6 Fateley and others 1971, from
    memory; each follows from the character tables of the site group (common practice)."""
    assert fate(name, species).gained == expected


def test_the_correlation_field_forbids_components_in_which_moments_cancel() -> None:
    """Calcite: the two ions' dipoles cancel in A2g of nu2, the two polarizabilities in A1u of nu1 (Hornig 1948)."""
    assert [part.label for part in fate("calcite", "A2''").cancelled] == ["A2g"]
    assert [part.label for part in fate("calcite", "A1'").cancelled] == ["A1u"]
    assert fate("calcite", "E'").cancelled == ()


@pytest.mark.parametrize(
    ("name", "splits"),
    [("calcite", True), ("benzene", True), ("potassium hexachloroplatinate", False), ("sodium azide", False)],
)
def test_one_unit_in_the_primitive_cell_has_no_correlation_splitting(name: str, splits: bool) -> None:
    """Hornig 1948; common practice."""
    assert all(one.is_split_by_correlation is splits for one in row_of(name).fates)


def test_two_units_may_join_to_a_degenerate_mode_without_splitting() -> None:
    """Urea, two molecules on C2v sites of D2d: B1 and B2 both become E (Fateley and others 1971, from memory)."""
    assert not fate("urea", "B1").is_split_by_correlation
    assert fate("urea", "A1").is_split_by_correlation


def test_silent_is_what_neither_shows() -> None:
    assert Counts(5, 2, 3, 1).silent == 1
    assert fate("potassium hexachloroplatinate", "T2u").in_crystal.silent == 1


def test_polarization_of_calcite() -> None:
    """nu2 along the c axis, nu3 and nu4 across it (Halford 1946; Decius 1955; common practice)."""
    assert {part.label: part.activity.polar for part in fate("calcite", "A2''").crystal}["A2u"] == ("z",)
    assert {part.label: part.activity.polar for part in fate("calcite", "E'").crystal}["Eu"] == ("x", "y")


@pytest.mark.parametrize("name", ["1,2-dichloroethane, anti, ordered", "carbon dioxide", "benzene", "naphthalene"])
def test_exclusion_holds_on_a_site_with_a_centre(name: str) -> None:
    """An ordered crystal of the anti form of 1,2-dichloroethane on a Ci site keeps exclusion (common practice): each
    vibration, free, on its site and in the crystal, shows in one of the two spectra or in none."""
    for one in row_of(name).fates:
        for found in (one.at_free, one.at_site, one.in_crystal):
            assert not (found.infrared and found.raman)
