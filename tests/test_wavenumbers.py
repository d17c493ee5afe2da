"""The user's wavenumbers: reading, plain errors, and where bands are expected."""

from __future__ import annotations

from functools import lru_cache
from pathlib import Path

import pytest
from literature import reference
from test_fate import NAMES, row_of
from views_cases import ENTRIES, of_entry

from sitesym.analysis import Analysis, analyse
from sitesym.errors import ReadError, SitesymError, UsageError
from sitesym.wavenumbers import Wavenumbers, ascii_species, read_wavenumbers, usual_name

TOML = """
[[vibration]]
unit = "CO3"
name = "nu3"
wavenumber = 1407

[[vibration]]
unit = "O3C"
species = "A2''"
wavenumber = 872.5
"""
CSV = """unit,name,species,kind,wavenumber
CO3,v3,,,1407
CO3,,A2″,out-of-plane,872.5
"""


@lru_cache(maxsize=4)
def structure(name: str):
    return of_entry(ENTRIES[name])


def written(folder: Path, text: str, name: str = "mine.toml") -> Wavenumbers:
    path = folder / name
    path.write_text(text, encoding="utf-8")
    return read_wavenumbers(path)


def with_wavenumbers(folder: Path, text: str, name: str = "mine.toml", crystal: str = "calcite") -> Analysis:
    return analyse(structure(crystal), scan=False, wavenumbers=written(folder, text, name))


def values(analysis: Analysis) -> dict[str, float | None]:
    return {one.name: one.wavenumber for row in analysis.molecular.molecules for names in row.names for one in names}


@pytest.mark.parametrize(("text", "name"), [(TOML, "mine.toml"), (CSV, "mine.csv"), (TOML, "mine"), (CSV, "mine.txt")])
def test_given_wavenumbers_take_the_place_of_tabulated_ones(text: str, name: str, tmp_path: Path) -> None:
    """TOML and CSV alike, by suffix or by content; the other vibrations keep the table's values."""
    result = with_wavenumbers(tmp_path, text, name)
    assert values(result) == {"ν1": 1063, "ν2": 872.5, "ν3": 1407, "ν4": 680}
    given = {one.name for names in result.molecular.molecules[0].names for one in names if one.given}
    assert given == {"ν2", "ν3"}


@pytest.mark.parametrize("separator", [";", "\t"])
def test_other_separators_comments_and_spaces_are_read(separator: str, tmp_path: Path) -> None:
    text = "# mine\nunit, name, wavenumber\n\nCO3, nu1, 1086\n".replace(",", separator)
    assert values(with_wavenumbers(tmp_path, text, "mine.csv"))["ν1"] == 1086


@pytest.mark.parametrize(
    ("typed", "name"),
    [("nu3", "ν3"), ("v3", "ν3"), ("ν₃", "ν3"), ("nu_3", "ν3"), ("ν", "ν"), ("nu", "ν"), ("ring", "ring")],
)
def test_usual_names_may_be_typed_in_several_ways(typed: str, name: str) -> None:
    assert usual_name(typed) == name


@pytest.mark.parametrize(
    ("typed", "label"),
    [
        ("E′", "E'"),
        ("A₂″", "A2''"),
        ('A2"', "A2''"),
        ("Σg⁺", "Sigma_g+"),
        ("Pi_u", "Pi_u"),
        ("Πu", "Pi_u"),
        ("T1u", "T1u"),
    ],
)
def test_species_may_be_typed_as_printed(typed: str, label: str) -> None:
    assert ascii_species(typed) == label


BROKEN = [
    ("", "mine.toml", "is empty"),
    ("[[vibration]\n", "mine.toml", "no valid TOML"),
    ("unit = 'CO3'\n", "mine.toml", "no [[vibration]] entries"),
    ("a,b\n1,2\n", "mine.csv", "no columns 'unit' and 'wavenumber'"),
    ("unit,wavenumber\n", "mine.csv", "gives no wavenumbers"),
    ("unit,name,wavenumber\nCO3,nu1,fast\n", "mine.csv", "line 2: 'fast' is no wavenumber"),
    ("unit,name,wavenumber\nCO3,nu1,-3\n", "mine.csv", "'-3' is no wavenumber"),
    ("unit,name,wavenumber\nCO3,nu1,nan\n", "mine.csv", "'nan' is no wavenumber"),
    ("unit,name,wavenumber\nCO3,nu1,1e9\n", "mine.csv", "'1e9' is no wavenumber"),
    ("unit,name,wavenumber\nCO3,,1086\n", "mine.csv", "says for no vibration of CO3 what it is"),
    ("unit,name,wavenumber\ncarbonate,nu1,1086\n", "mine.csv", "'carbonate' is no formula"),
    ("[[vibration]]\nunit = 'CO3'\nname = 'nu1'\nwavenumbre = 1\n", "mine.toml", "unknown field 'wavenumbre'"),
]


@pytest.mark.parametrize(("text", "name", "problem"), BROKEN)
def test_broken_files_are_told_plainly(text: str, name: str, problem: str, tmp_path: Path) -> None:
    with pytest.raises(ReadError) as caught:
        written(tmp_path, text, name)
    assert problem in caught.value.problem
    assert caught.value.mend


def test_missing_and_binary_files_are_told_plainly(tmp_path: Path) -> None:
    with pytest.raises(ReadError, match="There is no file"):
        read_wavenumbers(tmp_path / "nothing.toml")
    (tmp_path / "binary.csv").write_bytes(b"\x00\x01\x02unit")
    with pytest.raises(ReadError, match="no text file"):
        read_wavenumbers(tmp_path / "binary.csv")


WRONG = [
    ("SO4,nu1,,,983", "there is no unit SO4", "The units are CO3."),
    ("CO3,nu9,,,983", "CO3 has no vibration called ν9", "ν1, ν3, ν4, ν2"),
    ("CO3,,B2,,983", "B2 of CO3 does not occur", "A1' stretching"),
    ("CO3,,E',,983", "E' of CO3 is not clear", "E' stretching, E' bending"),
    ("CO3,,E',torsion,983", "E' torsion of CO3 does not occur", "E' bending"),
    ("CO3,nu1,,,983\nCO3,v1,,,984", "gives ν1 of CO3 once more", "Keep one"),
    ("CO3,,A1',stretching,983\nCO3,,A1',stretching,984", "2 given for the 1 A1' stretching", "names"),
]


@pytest.mark.parametrize(("lines", "problem", "mend"), WRONG)
def test_what_fits_nothing_in_the_crystal_is_told_plainly(lines: str, problem: str, mend: str, tmp_path: Path) -> None:
    with pytest.raises(UsageError) as caught:
        with_wavenumbers(tmp_path, f"unit,name,species,kind,wavenumber\n{lines}\n", "mine.csv")
    assert problem in caught.value.problem
    assert mend in caught.value.mend


def test_an_atom_tells_inequivalent_units_apart(tmp_path: Path) -> None:
    """Gypsum has one kind of water: its oxygen is known by its label, another atom is not in it."""
    water = "unit,species,kind,atom,wavenumber\nH2O,A1,bending,{},1640\n"
    label = next(one for one in ENTRIES["gypsum"]["sites"] if one["element"] == "H")["label"]
    assert values(with_wavenumbers(tmp_path, water.format(label), "mine.csv", "gypsum"))["ν2"] == 1640
    with pytest.raises(SitesymError, match="no unit H2O with an atom Ca1"):
        with_wavenumbers(tmp_path, water.format("Ca1"), "mine.csv", "gypsum")


def test_every_component_of_a_known_vibration_is_expected_at_its_wavenumber() -> None:
    """Calcite (Halford 1946): nu3 at 1415 in infrared as Eu across c and in Raman as Eg, nu2 at 879 as A2u along c."""
    bands = analyse(structure("calcite"), scan=False).molecular.bands
    found = {(band.vibration, band.species): band for band in bands}
    assert {key for key, band in found.items() if band.infrared} == {("ν2", "A2u"), ("ν3", "Eu"), ("ν4", "Eu")}
    assert {key for key, band in found.items() if band.raman} == {("ν1", "A1g"), ("ν3", "Eg"), ("ν4", "Eg")}
    assert found["ν3", "Eu"].polar == ("x", "y")
    assert found["ν2", "A2u"].polar == ("z",)
    assert (found["ν2", "A2u"].wavenumber, found["ν2", "A2u"].given) == (879, False)
    assert [band.wavenumber for band in bands] == sorted(band.wavenumber for band in bands)


@pytest.mark.parametrize("name", NAMES)
def test_no_more_bands_are_expected_than_there_are_vibrations(name: str) -> None:
    """Every name stands once, and its species is that of the vibration it names (the published one)."""
    row = row_of(name)
    species = {
        one["species"]
        for one in next(c for c in reference("correlations.toml")["case"] if c["name"] == name)["vibrations"]
    }
    for vibration, known in zip(row.correlation.vibrations, row.names, strict=True):
        assert len(known) <= vibration.count
        assert all(one.species == vibration.species and one.species in species for one in known)
    names = [one.name for known in row.names for one in known]
    assert len(names) == len(set(names))


def test_a_unit_that_is_tabulated_with_several_charges_gets_no_wavenumbers() -> None:
    """NO2 alone is nitrogen dioxide, beside sodium it is nitrite (common practice); of superoxide and peroxide the
    formula tells nothing."""
    from sitesym.vibration_names import known_vibrations

    nitrite = next(name for name in NAMES if name.startswith("sodium nitrite"))
    row = row_of(nitrite)
    assert row.known.name == "nitrite"
    assert known_vibrations("NO2", "C2v", row.correlation.vibrations, alone=True).unit.charge == 0
    stretch = row_of("oxygen, alpha").correlation.vibrations
    assert known_vibrations("O2", "D∞h", stretch, alone=True).unit.charge == 0
    several = known_vibrations("O2", "D∞h", stretch, alone=False)
    assert several.unit is None
    assert "charges" in several.remark
    assert all(one.wavenumber is None for names in several.names for one in names)
