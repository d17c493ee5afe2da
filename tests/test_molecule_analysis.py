"""Free molecules and pairs of conformers, against textbooks and against characters worked out here from the shapes."""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest
from molecule_shapes import INVERSION, Shape, all_shapes, scattered

import sitesym
from sitesym.bonding import BondRules
from sitesym.errors import UsageError
from sitesym.molecule_analysis import MoleculeAnalysis, MoleculeComparison, analyse_molecule, compare_molecules
from sitesym.reading.molecule import Molecule
from sitesym.selection import activity_of

SHAPES = list(all_shapes())
FINITE = [name for name in SHAPES if "∞" not in all_shapes()[name].schoenflies and len(all_shapes()[name].elements) > 1]


def molecule(name: str) -> Molecule:
    shape = all_shapes()[name]
    return Molecule(tuple(shape.elements), shape.positions, name)


@cache
def analysed(name: str) -> MoleculeAnalysis:
    return analyse_molecule(molecule(name))


@pytest.mark.parametrize("name", SHAPES)
def test_point_group_and_number_of_vibrations(name: str) -> None:
    """The group by which the shape was built, and 3N - 6 (3N - 5) vibrations with all partners (common practice)."""
    result, shape = analysed(name), all_shapes()[name]
    assert result.point_group == shape.schoenflies
    atoms = len(shape.elements)
    vibrations = max(3 * atoms - (5 if "∞" in shape.schoenflies else 6), 0)
    assert sum(one.dimension * one.internal for one in result.species) == vibrations
    assert sum(one.dimension * one.count for one in result.vibrations) == vibrations


def characters(shape: Shape) -> tuple[np.ndarray, np.ndarray]:
    """Characters of the internal vibrations and of a polar vector for each operation of the shape."""
    operations, points = shape.operations, shape.positions
    vector = np.trace(operations, axis1=1, axis2=2)
    fixed = [sum(np.linalg.norm(operation @ point - point) < 0.05 for point in points) for operation in operations]
    axial = vector * np.linalg.det(operations)
    return np.array(fixed) * vector - vector - axial, vector


@pytest.mark.parametrize("name", FINITE)
def test_species_agree_with_the_characters_of_the_shape(name: str) -> None:
    """Scalar products of characters, taken here from the operations that built the shape: of the internal vibrations
    with themselves and with a vector (Wilson, Decius and Cross 1955, chapter 6). Pairs joined to one E count twice."""
    result, (internal, vector) = analysed(name), characters(all_shapes()[name])
    norms = {one.label: one.norm for one in result.free.group.species}
    own = sum(norms[one.label] * one.internal**2 for one in result.species)
    shared = sum(norms[one.label] * one.internal * one.translations for one in result.species)
    assert own == pytest.approx(np.mean(internal * internal))
    assert shared == pytest.approx(np.mean(internal * vector))


@pytest.mark.parametrize("name", SHAPES)
def test_a_centre_of_inversion_excludes(name: str) -> None:
    """Rule of mutual exclusion: no band in both spectra where the shape has a centre (common practice)."""
    shape = all_shapes()[name]
    centred = any(np.allclose(operation, INVERSION) for operation in shape.operations) and len(shape.elements) > 1
    assert analysed(name).has_exclusion == centred
    if centred:
        assert analysed(name).counts.both == 0


COUNTS = {
    # name: infrared, Raman, in both; sources: Herzberg 1945, Infrared and Raman Spectra; from memory
    "water": (3, 3, 3),
    "carbon dioxide": (2, 1, 0),
    "ammonia": (4, 4, 4),
    "methane": (2, 4, 2),
    "carbonate": (3, 3, 2),
    "ethylene": (5, 6, 0),
    "ethyne": (2, 3, 0),
    "benzene": (4, 7, 0),
    "sulfur hexafluoride": (2, 3, 0),
    "phosphorus pentafluoride": (5, 6, 3),
    "allene": (7, 11, 7),
    "formaldehyde": (6, 6, 6),
    "hydrogen cyanide": (3, 3, 3),
    "ethane staggered": (5, 6, 0),
    "ethane eclipsed": (5, 9, 3),
    "white phosphorus": (1, 3, 1),
    "cyclooctasulfur": (3, 7, 0),  # Scott, McCullough and Kruse 1964, J. Mol. Spectrosc. 13, 313
    "fullerene C60": (4, 10, 0),  # Krätschmer, Fostiropoulos and Huffman 1990, Chem. Phys. Lett. 170, 167
    "fullerene C70": (31, 53, 0),  # Bethune and others 1991, Chem. Phys. Lett. 179, 181
    "iron pentacarbonyl": (10, 13, 6),  # Nakamoto, Infrared and Raman Spectra of Inorganic Compounds
    "tetrachloroplatinate": (3, 3, 0),
    "cubane": (3, 8, 0),  # Della and others 1979, J. Am. Chem. Soc. 101, 7441
    "dodecahedrane": (3, 8, 0),
    "boron icosahedron": (1, 3, 0),
    "cyclohexane chair": (13, 14, 0),
    "argon": (0, 0, 0),
}


@pytest.mark.parametrize("name", COUNTS)
def test_numbers_of_bands_are_those_of_textbooks(name: str) -> None:
    found = analysed(name).counts
    assert (found.infrared, found.raman, found.both) == COUNTS[name]


SPECIES = {
    # Herzberg 1945 and Nakamoto, from memory; C60: Dresselhaus, Dresselhaus and Eklund 1996
    "benzene": "2 A1g 1 A2g 2 B2g 1 E1g 4 E2g 1 A2u 2 B1u 2 B2u 3 E1u 2 E2u",
    "fullerene C60": "2 Ag 3 T1g 4 T2g 6 Gg 8 Hg 1 Au 4 T1u 5 T2u 6 Gu 7 Hu",
    "sulfur hexafluoride": "1 A1g 1 Eg 1 T2g 2 T1u 1 T2u",
    "cyclooctasulfur": "2 A1 1 B1 1 B2 2 E1 3 E2 2 E3",
    "ethane staggered": "3 A1g 3 Eg 1 A1u 2 A2u 3 Eu",
    "dichloroethane anti": "6 Ag 3 Bg 4 Au 5 Bu",
    "naphthalene": "9 Ag 3 B1g 4 B2g 8 B3g 4 Au 8 B1u 8 B2u 4 B3u",
}


@pytest.mark.parametrize("name", SPECIES)
def test_species_are_those_of_textbooks(name: str) -> None:
    """Naphthalene with x normal to the plane and z through its length (Mulliken 1955)."""
    found = " ".join(f"{one.internal} {one.label}" for one in analysed(name).species if one.internal)
    assert found == SPECIES[name]


@pytest.mark.parametrize(
    ("name", "pair", "species"),
    [
        ("iron pentacarbonyl", "C-O", {"A1'": 2, "A2''": 1, "E'": 1}),
        ("pentacarbonyl chloride", "C-O", {"A1": 2, "B1": 1, "E": 1}),
        ("hexacyanoferrate", "C-N", {"A1g": 1, "Eg": 1, "T1u": 1}),
        ("water", "O-H", {"A1": 1, "B2": 1}),
        ("methane", "C-H", {"A1": 1, "T2": 1}),
        ("benzene", "C-H", {"A1g": 1, "E2g": 1, "B1u": 1, "E1u": 1}),
        ("dichloroethane anti", "C-Cl", {"Ag": 1, "Bu": 1}),
        ("dichloroethane gauche", "C-Cl", {"A": 1, "B": 1}),
    ],
)
def test_stretches_of_one_kind_of_bond(name: str, pair: str, species: dict[str, int]) -> None:
    """Carbonyl and cyanide stretches: Cotton, Chemical Applications of Group Theory, and Nakamoto, from memory."""
    found = next(one for one in analysed(name).stretches if one.pair == pair)
    assert found.species == species


def test_totally_symmetric_bands_alone_are_polarized() -> None:
    """Common practice: benzene has two polarized Raman lines, methane one."""
    assert analysed("benzene").counts.polarized == 2
    assert analysed("methane").counts.polarized == 1
    assert [one.label for one in analysed("methane").species if one.polarized] == ["A1"]


@pytest.mark.parametrize(
    ("name", "species", "polar"),
    [
        ("water", "A1", ("z",)), ("water", "B1", ("x",)), ("water", "B2", ("y",)), ("ammonia", "E", ("x", "y")),
        ("carbon dioxide", "Pi_u", ("x", "y")), ("carbon dioxide", "Sigma_u+", ("z",)),
        ("methane", "T2", ("x", "y", "z")),
        ("thionyl chloride", "A''", ("z",)), ("dichloroethane anti", "Au", ("z",)), ("ethylene", "B3u", ("x",)),
    ],
)  # fmt: skip
def test_dipoles_lie_along_the_molecules_own_axes(name: str, species: str, polar: tuple[str, ...]) -> None:
    """Character tables with Mulliken's axes of 1955: planar molecules have x normal to the plane."""
    assert activity_of(analysed(name).free.group, species).polar == polar


# The conformers of 1,2-dichloroethane and ethane: common practice


def operations(name: str) -> np.ndarray:
    return analysed(name).free.group.matrices


def axis_of(rotation: np.ndarray) -> np.ndarray:
    values, vectors = np.linalg.eig(rotation)
    return np.real(vectors[:, np.argmin(abs(values - 1))])


def proper(matrices: np.ndarray, trace: float) -> np.ndarray:
    chosen = np.isclose(np.trace(matrices, axis1=1, axis2=2), trace) & np.isclose(np.linalg.det(matrices), 1)
    return matrices[chosen]


def test_anti_dichloroethane_is_c2h_with_its_axis_normal_to_the_mirror() -> None:
    """The mirror holds both chlorine and both carbon atoms, the twofold axis is normal to it."""
    result = analysed("dichloroethane anti")
    assert result.point_group == "C2h"
    assert result.has_exclusion
    (turn,) = proper(operations("dichloroethane anti"), -1)
    heavy = np.array(
        [place for place, element in zip(result.free.positions, result.free.elements, strict=True) if element != "H"]
    )
    assert np.abs(heavy @ axis_of(turn)).max() < 1e-6
    assert all(not (one.activity.infrared and one.activity.raman) for one in result.vibrations)
    assert (result.counts.infrared, result.counts.raman, result.counts.both) == (9, 9, 0)


def test_gauche_dichloroethane_is_c2_and_loses_exclusion() -> None:
    """All 18 vibrations are active in both; Mizushima 1954, Structure of Molecules, from memory."""
    result = analysed("dichloroethane gauche")
    assert result.point_group == "C2"
    assert not result.has_exclusion
    assert (result.counts.infrared, result.counts.raman, result.counts.both) == (18, 18, 18)


def test_staggered_ethane_is_d3d_with_three_axes_through_the_middle_of_the_bond() -> None:
    """Three C2 through the midpoint of C-C, normal to C3; a centre of inversion there; eclipsed D3h has none."""
    result = analysed("ethane staggered")
    assert result.point_group == "D3d"
    carbon = result.free.positions[[element == "C" for element in result.free.elements]]
    assert np.allclose(carbon.sum(axis=0), 0, atol=1e-6)  # the origin, through which all axes pass, is the midpoint
    axes = [axis_of(turn) for turn in proper(operations("ethane staggered"), -1)]
    threefold = axis_of(proper(operations("ethane staggered"), 0)[0])
    assert len(axes) == 3
    assert np.abs(np.array(axes) @ threefold).max() < 1e-6
    assert abs(threefold @ (carbon[0] / np.linalg.norm(carbon[0]))) == pytest.approx(1)
    assert result.has_exclusion
    assert analysed("ethane eclipsed").point_group == "D3h"
    assert not analysed("ethane eclipsed").has_exclusion


# Robustness


@pytest.mark.parametrize("name", ["dichloroethane anti", "benzene", "ammonia", "fullerene C60", "allene", "urea"])
def test_counts_do_not_hang_on_orientation_order_and_noise(name: str) -> None:
    """Turned at random, atoms shuffled, 0.02 Å of noise: group, counts and kinds stay."""
    elements, positions = scattered(all_shapes()[name], 0.02, seed=7)
    result = analyse_molecule(Molecule(tuple(elements), positions))
    assert result.point_group == analysed(name).point_group
    assert result.counts == analysed(name).counts
    assert result.vibrations == analysed(name).vibrations
    assert 0.005 < result.free.symmetry.deviation < 0.15


def test_a_distorted_molecule_is_told_with_its_deviation() -> None:
    """Benzene drawn out by 8 % along one axis is still taken for D6h at 0.25 Å, and at 0.02 Å is not."""
    shape = all_shapes()["benzene"]
    pulled = shape.positions * np.array([1.08, 1, 1])
    loose = analyse_molecule(Molecule(tuple(shape.elements), pulled))
    strict = analyse_molecule(Molecule(tuple(shape.elements), pulled), 0.02)
    assert loose.point_group == "D6h"
    assert "molecule_distorted" in {one.code for one in loose.cautions}
    assert strict.point_group == "D2h"
    assert strict.free.higher_group == ""
    assert strict.counts.infrared > loose.counts.infrared


def test_the_next_higher_group_is_told() -> None:
    """Ammonia flattened to 0.2 Å is C3v, planar D3h comes next (common practice)."""
    shape = all_shapes()["ammonia"]
    height = np.ptp(shape.positions[:, 2])
    flat = shape.positions * np.array([1, 1, 0.2 / height])
    result = analyse_molecule(Molecule(tuple(shape.elements), flat), 0.15)
    assert (result.point_group, result.free.higher_group) == ("C3v", "D3h")


def test_a_single_atom_has_no_vibrations() -> None:
    result = analyse_molecule(Molecule(("Xe",), np.zeros((1, 3))))
    assert result.point_group == "Kh"
    assert result.species == ()
    assert result.counts.total == 0


def test_a_diatomic_has_one_vibration() -> None:
    """N2 Raman only, CO in both (common practice)."""
    assert [one.activity.infrared for one in analysed("dinitrogen").vibrations] == [False]
    assert analysed("carbon monoxide").counts.both == 1


def test_parts_without_a_bond_are_taken_together_and_told() -> None:
    """Two water molecules 3 Å apart: 3 x 6 - 6 vibrations, six of them between the molecules."""
    shape = all_shapes()["water"]
    pair = np.vstack([shape.positions, shape.positions + np.array([3.0, 0.4, 0.3])])
    result = analyse_molecule(Molecule(tuple(shape.elements * 2), pair))
    assert result.parts == ("H2O", "H2O")
    assert {one.code for one in result.cautions} >= {"several_parts"}
    assert sum(one.count * one.dimension for one in result.vibrations) == 12
    assert "skeletal" in {one.kind for one in result.vibrations}


def test_the_users_word_on_bonds_counts() -> None:
    rules = BondRules(forbid=(("C", "Cl"),))
    result = analyse_molecule(molecule("chloromethane"), bonds=rules)
    assert [one.pair for one in result.stretches] == ["C-H"]
    with pytest.raises(UsageError):
        analyse_molecule(molecule("chloromethane"), bonds=BondRules(forbid=(("C", "Br"),)))


@pytest.mark.parametrize("tolerance", [0, -1, 2, float("nan")])
def test_a_senseless_tolerance_is_refused(tolerance: float) -> None:
    with pytest.raises(UsageError, match="tolerance"):
        analyse_molecule(molecule("water"), tolerance)


def test_names_and_wavenumbers_of_known_molecules() -> None:
    """Water: 3657, 1595, 3756 cm-1 (Shimanouchi 1972, from memory)."""
    found = {one.name: one.wavenumber for names in analysed("water").names for one in names}
    assert found == {"ν1": 3657, "ν2": 1595, "ν3": 3756}


# Two molecules


def compared(first: str, second: str) -> MoleculeComparison:
    return compare_molecules(analysed(first), analysed(second))


def test_conformers_of_dichloroethane_are_told_apart_by_coincidences() -> None:
    """Mizushima 1954 (from memory): the C-Cl stretch of the anti form is one infrared and one Raman band that exclude
    each other, those of the gauche form are both in both."""
    found = {one.what: one for one in compared("dichloroethane anti", "dichloroethane gauche").telling}
    stretch = found["C-Cl stretching"]
    assert (stretch.first.infrared, stretch.first.raman, stretch.first.both) == (1, 1, 0)
    assert (stretch.second.infrared, stretch.second.raman, stretch.second.both) == (2, 2, 2)
    assert (found["all vibrations"].first.both, found["all vibrations"].second.both) == (0, 18)


def test_staggered_and_eclipsed_ethane_differ_in_raman_only() -> None:
    """Herzberg 1945, table 105 (from memory): 6 Raman bands against 9, infrared 5 in both."""
    whole = compared("ethane staggered", "ethane eclipsed").bands[0]
    assert (whole.first.infrared, whole.second.infrared) == (5, 5)
    assert (whole.first.raman, whole.second.raman) == (6, 9)
    assert (whole.first.both, whole.second.both) == (0, 3)


def test_ferrocene_forms_have_equal_numbers_of_bands() -> None:
    """D5d and D5h ferrocene: 10 infrared and 15 Raman fundamentals both (Lippincott and Nelson 1958, from memory)."""
    found = compared("ferrocene staggered", "ferrocene eclipsed")
    assert not found.bands[0].differs
    assert (found.bands[0].first.infrared, found.bands[0].first.raman) == (10, 15)


def test_unlike_molecules_are_said_to_be_so() -> None:
    assert [one.code for one in compared("water", "methane").cautions] == ["formulas_differ"]
    assert compared("ethane staggered", "ethane eclipsed").cautions == ()


def test_the_public_names_serve_molecules(tmp_path) -> None:
    shape = all_shapes()["water"]
    lines = [f"{e} {x} {y} {z}" for e, (x, y, z) in zip(shape.elements, shape.positions, strict=True)]
    path = tmp_path / "water.xyz"
    path.write_text("\n".join([str(len(lines)), "water", *lines]) + "\n")
    result = sitesym.analyse_molecule(sitesym.read_molecule(path))
    assert isinstance(result, sitesym.MoleculeAnalysis)
    assert repr(result) == "MoleculeAnalysis(H2O, C2v: 3 infrared, 3 Raman, 3 in both)"
    assert not sitesym.compare_molecules(result, result).telling
