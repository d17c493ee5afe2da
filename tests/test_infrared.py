"""Polarized infrared on a face: published polarizations of known crystals, LO at oblique incidence, free dipoles."""

from __future__ import annotations

from functools import lru_cache

import numpy as np
import pytest
from literature import of_entry, reference

from sitesym.analysis import Analysis, analyse
from sitesym.errors import UsageError
from sitesym.experiment.infrared import GRAZING, NORMAL, InfraredRow, dipole_space, infrared_rows, infrared_words
from sitesym.geometry.directions import parse_direction

STRUCTURES = {entry["name"]: entry for entry in reference("decompositions.toml")["compound"]}


@lru_cache(maxsize=64)
def crystal(name: str) -> Analysis:
    return analyse(of_entry(STRUCTURES[name]), scan=False, molecules=False)


def row_along(name: str, face: str, direction: str) -> InfraredRow:
    analysis = crystal(name)
    chosen = parse_direction(direction, analysis.symmetry.lattice)
    return infrared_rows(analysis, face, [chosen])[0]


def seen(row: InfraredRow) -> list[str]:
    return [band.name for band in row.allowed]


def grazing(name: str, face: str) -> InfraredRow:
    return infrared_rows(crystal(name), face)[-1]


@pytest.mark.parametrize(
    ("name", "along", "across"),
    [
        ("calcite", "A2u", "Eu"),  # Hellwege, Lesch, Plihal and Schaack, Z. Phys. 232, 61 (1970), from memory
        ("rutile", "A2u", "Eu"),  # Spitzer, Miller, Kleinman and Howarth, Phys. Rev. 126, 1710 (1962), from memory
        ("corundum (alpha-alumina)", "A2u", "Eu"),  # Barker, Phys. Rev. 132, 1474 (1963), from memory
        ("alpha-quartz", "A2", "E"),  # Spitzer and Kleinman, Phys. Rev. 121, 1324 (1961), from memory
        ("lithium niobate", "A1", "E"),  # Barker and Loudon, Phys. Rev. 158, 433 (1967), from memory
        (
            "wurtzite (zinc oxide)",
            "A1",
            "E1",
        ),  # Collins and Kleinman, J. Phys. Chem. Solids 11, 190 (1959), from memory
        ("anatase", "A2u", "Eu"),  # Gonzalez, Zallen and Berger, Phys. Rev. B 55, 7014 (1997), from memory
        ("graphite", "A2u", "E1u"),  # Nemanich, Lucovsky and Solin, Solid State Commun. 23, 117 (1977), from memory
    ],
)
def test_uniaxial_crystals_by_the_polarization_along_and_across_c(name: str, along: str, across: str) -> None:
    """On a prism face E along c and E across c show one species each, both as transverse modes."""
    assert seen(row_along(name, "100", "z")) == [f"{along}(TO)"]
    assert seen(row_along(name, "100", "[010]")) == [f"{across}(TO)"]
    for direction in ("x", "y"):
        assert seen(row_along(name, "001", direction)) == [f"{across}(TO)"]


def test_numbers_of_bands_in_rutile() -> None:
    """Spitzer et al. (1962), from memory: one band with E along c, three with E across c."""
    rows = {row.label: row.optic for row in crystal("rutile").species}
    assert (rows["A2u"], rows["Eu"]) == (1, 3)


def test_longitudinal_mode_of_a_cubic_film_at_oblique_incidence() -> None:
    """Berreman, Phys. Rev. 130, 2193 (1963): films of LiF absorb at TO, and tilted in p light at LO too."""
    rows = infrared_rows(crystal("rock salt"), "001")
    assert [(row.incidence, seen(row)) for row in rows] == [
        (NORMAL, ["T1u(TO)"]), (NORMAL, ["T1u(TO)"]), (GRAZING, ["T1u(LO)"])
    ]  # fmt: skip


def test_basal_plate_of_a_uniaxial_crystal_shows_the_axial_species_only_when_tilted() -> None:
    """Common practice: A2u of calcite is missing from a basal plate at normal incidence; tilted, it shows at LO."""
    assert seen(grazing("calcite", "001")) == ["A2u(LO)"]
    assert seen(grazing("calcite", "100")) == ["Eu(LO)"]


def test_orthorhombic_crystal_has_one_species_for_each_axis() -> None:
    """Common practice for mmm: B1u, B2u, B3u absorb with E along z, y, x."""
    for direction, label in (("x", "B3u"), ("y", "B2u")):
        assert seen(row_along("forsterite", "001", direction)) == [f"{label}(TO)"]
    assert seen(grazing("forsterite", "001")) == ["B1u(LO)"]


def test_monoclinic_crystal_has_its_dipoles_free_in_the_plane_across_b() -> None:
    """Common practice for 2/m: Au along b; Bu anywhere in the plane across it, each mode its own way."""
    for direction in ("x", "z", "[101]"):
        row = row_along("gypsum", "010", direction)
        assert seen(row) == ["Bu(TO)"]
        assert row.allowed[0].free
    assert seen(grazing("gypsum", "010")) == ["Au(LO)"]
    assert seen(row_along("gypsum", "100", "y")) == ["Au(TO)"]
    assert seen(row_along("gypsum", "100", "z")) == ["Bu(oblique)"]
    words = " ".join(infrared_words(crystal("gypsum"), "010"))
    assert "Dipoles of Bu lie in the plane across y, each mode in its own direction" in words
    assert "three or more polarization angles" in words


def test_triclinic_crystal_has_its_dipoles_free_in_space() -> None:
    words = " ".join(infrared_words(crystal("kyanite"), "001"))
    assert "Dipoles of Au may point anywhere in space" in words
    assert all(band.free for row in infrared_rows(crystal("kyanite"), "001") for band in row.bands)


@pytest.mark.parametrize("name", ["calcite", "alpha-quartz", "zincblende", "forsterite", "scheelite", "gypsum", "urea"])
def test_couplings_add_up(name: str) -> None:
    """Three perpendicular electric vectors see every component of a species once, and kinds add up to (e·P)²."""
    analysis = crystal(name)
    for face in ("001", "100", "101", "213"):
        rows = infrared_rows(analysis, face)
        for species in analysis.species:
            if not (species.activity.infrared and species.optic):
                continue
            space = dipole_space(species)
            totals = [sum(band.coupling for band in row.bands if band.label == species.label) for row in rows]
            expected = [float(np.sum((space @ row.direction.vector) ** 2)) for row in rows]
            assert np.allclose(totals, expected)
            assert sum(totals) == pytest.approx(len(space))


def test_dipoles_point_along_the_axes_of_the_selection_rules() -> None:
    """The space of dipoles has an axis of the group's frame in it exactly where the character tables give x, y or z."""
    for name in STRUCTURES:
        for row in crystal(name).species:
            if row.activity.infrared:
                space = dipole_space(row)
                weights = np.sum(space**2, axis=0) if len(space) else np.zeros(3)
                axes = tuple(axis for axis, weight in zip("xyz", weights, strict=True) if weight > 1e-6)
                assert axes == row.activity.polar, (name, row.label)


def test_a_crystal_without_infrared_modes_says_so() -> None:
    rows = infrared_rows(crystal("diamond"), "001")
    assert all(not row.bands and "no infrared-active" in row.words for row in rows)
    assert infrared_words(crystal("diamond"), "001") == ("This crystal has no infrared-active optic mode.",)


def test_words_of_a_row() -> None:
    assert row_along("calcite", "001", "x").words == "electric vector along x: Eu(TO)"
    assert "A2u(oblique) with" in row_along("calcite", "101", "[21-2]").words


def test_what_cannot_be_is_said() -> None:
    with pytest.raises(UsageError, match="normal to the face"):
        row_along("calcite", "001", "z")
    with pytest.raises(UsageError, match="no set of indices"):
        infrared_rows(crystal("calcite"), "face")
