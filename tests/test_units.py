"""Units of crystals: molecules, complex ions, chains, layers and nets."""

from pathlib import Path

import ase.build
import ase.data
import numpy as np
import pytest
from ase import Atoms
from ase.collections import g2
from ase.neighborlist import neighbor_list
from literature import reference
from pymatgen.analysis.dimensionality import get_structure_components
from pymatgen.analysis.graphs import StructureGraph
from pymatgen.core import Lattice
from pymatgen.core import Structure as OtherStructure
from unit_crystals import crystal, in_a_box, listed

from sitesym.bonding.graph import connected_parts, rank
from sitesym.reading import read
from sitesym.structure import Occupant, Site, Structure
from sitesym.units import Unit, bonds_of, customary, find_units, hill, units_of

CRYSTALS = reference("unit_structures.toml")
DEMO = Path(__file__).parent.parent / "structures_demo"
CORPUS = Path(__file__).resolve().parents[2] / "shared" / "corpus" / "cif"

pytestmark = pytest.mark.filterwarnings("ignore::UserWarning:pymatgen", "ignore::DeprecationWarning:pymatgen")


def summary(units: tuple[Unit, ...]) -> dict[str, list[int]]:
    """Formula -> [number in the cell, dimension]."""
    found: dict[str, list[int]] = {}
    for unit in units:
        found.setdefault(unit.formula, [0, unit.dimension])[0] += 1
    return found


@pytest.mark.parametrize("name", [name for name, entry in CRYSTALS.items() if "bond" in entry])
def test_coordinates_quoted_from_memory_give_the_bond_length_of_the_paper(name):
    structure = listed(name)
    one, other, length = CRYSTALS[name]["bond"]
    symbols = [element.replace("D", "H") for element in structure.elements]
    atoms = Atoms(symbols, cell=structure.lattice, scaled_positions=structure.fractional, pbc=True)
    i, j, distance = neighbor_list("ijd", atoms, length + 0.5)
    pairs = [
        d
        for a, b, d in zip(i, j, distance, strict=True)
        if {structure.elements[a], structure.elements[b]} == {one, other}
    ]
    assert min(pairs) == pytest.approx(length, abs=0.03)


@pytest.mark.parametrize("name", CRYSTALS)
def test_units_of_a_known_crystal(name):
    found, entry = summary(units_of(listed(name))), CRYSTALS[name]
    if entry.get("only"):
        found = {formula: found.get(formula) for formula in entry["units"]}
    assert found == entry["units"]


@pytest.mark.parametrize("name", CRYSTALS)
def test_dimensions_are_those_of_the_general_library(name):
    """Source: pymatgen, which applies Larsen and others 2019, Phys. Rev. Materials 3, 034003, to the same bonds."""
    structure = listed(name)
    bonds = bonds_of(structure)
    other = OtherStructure(Lattice(structure.lattice), structure.elements, structure.fractional)
    graph = StructureGraph.from_empty_graph(other)
    for i, j, shift in zip(bonds.first.tolist(), bonds.second.tolist(), bonds.shift.tolist(), strict=True):
        graph.add_edge(i, j, from_jimage=(0, 0, 0), to_jimage=tuple(shift), warn_duplicates=False)
    expected = [
        (component["dimensionality"], len(component["structure_graph"].structure))
        for component in get_structure_components(graph)
    ]
    assert sorted((unit.dimension, len(unit.atoms)) for unit in units_of(structure)) == sorted(expected)


@pytest.mark.parametrize("name", CRYSTALS)
def test_every_atom_belongs_to_one_unit(name):
    structure = listed(name)
    atoms = np.concatenate([unit.atoms for unit in units_of(structure)])
    assert sorted(atoms.tolist()) == list(range(len(structure)))


@pytest.mark.parametrize("name", CRYSTALS)
def test_translations_put_finite_units_together(name):
    """Within a molecule every bond has its length without further translations."""
    structure = listed(name)
    bonds, place = bonds_of(structure), {}
    for unit in units_of(structure):
        if unit.dimension == 0:
            positions = (structure.fractional[unit.atoms] + unit.shifts) @ structure.lattice
            place |= dict(zip(unit.atoms.tolist(), positions, strict=True))
    for i, j, length in zip(bonds.first.tolist(), bonds.second.tolist(), bonds.distance, strict=True):
        if i in place:
            assert np.linalg.norm(place[i] - place[j]) == pytest.approx(length)


def altered(structure: Structure, matrix: np.ndarray, origin: np.ndarray, order: np.ndarray) -> Structure:
    """The same crystal in other axes (rows of `matrix` times the old), about another origin, atoms in another order."""
    fractional = (structure.fractional + origin) @ np.linalg.inv(matrix)
    sites = tuple(structure.sites[index] for index in order)
    return Structure(matrix @ structure.lattice, fractional[order], sites)


@pytest.mark.parametrize("name", CRYSTALS)
def test_units_do_not_depend_on_axes_origin_and_order(name):
    structure, random = listed(name), np.random.default_rng(len(name))
    matrix = np.array([[1, 1, 0], [0, 1, -1], [1, 0, 0]])
    order = random.permutation(len(structure))
    other = altered(structure, matrix, random.uniform(-3, 3, 3), order)
    assert summary(units_of(other)) == summary(units_of(structure))


@pytest.mark.parametrize("name", [name for name in CRYSTALS if name != "argon"])
def test_a_double_cell_holds_twice_the_molecules(name):
    one = listed(name)
    double = Structure(
        one.lattice * np.array([[2], [1], [1]]),
        np.concatenate([one.fractional * [0.5, 1, 1], one.fractional * [0.5, 1, 1] + [0.5, 0, 0]]),
        one.sites * 2,
    )
    small = [unit for unit in units_of(one) if unit.dimension == 0]
    large = [unit for unit in units_of(double) if unit.dimension == 0]
    assert sorted(unit.formula for unit in large) == sorted([unit.formula for unit in small] * 2)


# Molecules


@pytest.mark.parametrize("name", [*g2.names, "C60"])
def test_each_molecule_of_the_g2_set_is_one_unit(name):
    """Source: ase.build.molecule, the G2 test set of small molecules and radicals (Curtiss and others 1997)."""
    molecule = ase.build.molecule(name)
    structure = in_a_box(molecule.get_chemical_symbols(), molecule.positions + 10, 30.0)
    units = units_of(structure)
    assert [sorted(unit.atoms) for unit in units] == [list(range(len(molecule)))]
    assert units[0].is_molecule == (len(molecule) > 1)


def ring(radius: float, height: float, turn: float) -> np.ndarray:
    angles = np.radians(72 * np.arange(5) + turn)
    return np.column_stack([radius * np.cos(angles), radius * np.sin(angles), np.full(5, height)])


def ferrocene(turn: float) -> Structure:
    """Fe-ring 1.66, C-C 1.43, C-H 1.09 Å (common textbook values)."""
    carbon = 1.43 / (2 * np.sin(np.pi / 5))
    rings = [ring(r, h, t) for h, t in ((1.66, 0), (-1.66, turn)) for r in (carbon, carbon + 1.09)]
    return in_a_box(["Fe"] + (["C"] * 5 + ["H"] * 5) * 2, np.concatenate([np.zeros((1, 3)), *rings]) + 10)


def octahedron(length: float) -> np.ndarray:
    return np.concatenate([np.eye(3), -np.eye(3)]) * length


def dodecaborate() -> Structure:
    """B12H12 2-: B-B 1.78 Å, B-H 1.20 Å (common textbook values)."""
    golden = (1 + np.sqrt(5)) / 2
    corners = np.array([np.roll((0, a, b * golden), k) for a in (1, -1) for b in (1, -1) for k in range(3)])
    boron = corners * 1.78 / 2
    hydrogen = boron * (1 + 1.20 / np.linalg.norm(boron[0]))
    return in_a_box(["B"] * 12 + ["H"] * 12, np.concatenate([boron, hydrogen]) + 10)


def hexacarbonyl() -> Structure:
    """W(CO)6: W-C 2.06, C-O 1.15 Å (common textbook values)."""
    return in_a_box(
        ["W"] + ["C"] * 6 + ["O"] * 6, np.concatenate([np.zeros((1, 3)), octahedron(2.06), octahedron(3.21)]) + 10
    )


def decacarbonyldimanganese() -> Structure:
    """Mn2(CO)10, halves joined by Mn-Mn only: Mn-Mn 2.90, Mn-C 1.80 and 1.86, C-O 1.15 Å (common textbook values)."""
    atoms: list[tuple[str, np.ndarray]] = []
    for sign, turn in ((1, 0), (-1, 45)):
        middle = np.array([0, 0, 1.45 * sign])
        atoms.append(("Mn", middle))
        legs = [np.array([0, 0, sign])]
        legs += [np.array([np.cos(a), np.sin(a), 0]) for a in np.radians(turn + 90 * np.arange(4))]
        for leg, length in zip(legs, (1.80, 1.86, 1.86, 1.86, 1.86), strict=True):
            atoms += [("C", middle + leg * length), ("O", middle + leg * (length + 1.15))]
    return in_a_box([name for name, _ in atoms], np.array([place for _, place in atoms]) + 10)


@pytest.mark.parametrize(
    ("structure", "formula"),
    [
        (ferrocene(0), "C10H10Fe"),
        (ferrocene(36), "C10H10Fe"),
        (dodecaborate(), "B12H12"),
        (hexacarbonyl(), "C6O6W"),
        (decacarbonyldimanganese(), "C10Mn2O10"),
        (in_a_box(["P"] * 4, ase.build.molecule("P4").positions if "P4" in g2.names else
                  np.array([(1, 1, 1), (1, -1, -1), (-1, 1, -1), (-1, -1, 1)]) * 2.21 / np.sqrt(8) + 5), "P4"),
        (in_a_box(["Xe", "F", "F"], np.array([(0, 0, 0), (1.977, 0, 0), (-1.977, 0, 0)]) + 5), "F2Xe"),
        (in_a_box(["I"] * 3, np.array([(0, 0, 0), (2.92, 0, 0), (-2.92, 0, 0)]) + 5), "I3"),
        (in_a_box(["U", "O", "O"], np.array([(0, 0, 0), (1.77, 0, 0), (-1.77, 0, 0)]) + 5), "O2U"),
        (in_a_box(["S"] + ["F"] * 6, np.concatenate([np.zeros((1, 3)), octahedron(1.56)]) + 5), "F6S"),
        (in_a_box(["Cr"] + ["Cl"] * 6, np.concatenate([np.zeros((1, 3)), octahedron(2.34)]) + 5), "Cl6Cr"),
        (in_a_box(["H", "F", "F"], np.array([(0, 0, 0), (1.14, 0, 0), (-1.14, 0, 0)]) + 5), "F2H"),
    ],
)  # fmt: skip
def test_cages_carbonyls_and_organometallics_are_molecules(structure, formula):
    units = units_of(structure)
    assert [(unit.formula, unit.is_molecule) for unit in units] == [(formula, True)]


def hydrated(metal: str, oxygen: float) -> Structure:
    """M(H2O)6 beside nothing else: six water molecules on the axes."""
    atoms = [(metal, np.zeros(3))]
    for axis in octahedron(1.0):
        side = np.roll(np.abs(axis), 1) * 0.77
        atoms.append(("O", axis * oxygen))
        atoms += [("H", axis * (oxygen + 0.57) + side), ("H", axis * (oxygen + 0.57) - side)]
    return in_a_box([name for name, _ in atoms], np.array([place for _, place in atoms]) + 10)


@pytest.mark.parametrize(
    ("metal", "length", "expected"),
    [
        ("Cr", 1.96, {"CrH12O6": [1, 0]}),
        ("Fe", 2.12, {"FeH12O6": [1, 0]}),
        ("Mg", 2.07, {"Mg": [1, 0], "H2O": [6, 0]}),
        ("Na", 2.40, {"Na": [1, 0], "H2O": [6, 0]}),
    ],
)
def test_water_on_a_transition_metal_makes_a_complex_and_on_an_ionic_metal_does_not(metal, length, expected):
    """A decision of this project: rules 4 and 9 of sitesym.bonding.rule."""
    assert summary(units_of(hydrated(metal, length))) == expected


def test_water_that_would_join_an_endless_chain_stays_water():
    """Trans-M(H2O)2Cl2 octahedra sharing Cl-Cl edges, the chain of CoCl2 2H2O (Morosin and Graeber 1965)."""
    sites = [["Co", 0, 0, 0], ["Cl", 0.5, 0.2426, 0], ["Cl", 0.5, -0.2426, 0], ["O", 0, 0, 0.2], ["O", 0, 0, -0.2]]
    sites += [["H", 0, s * 0.11, t * 0.255] for s in (1, -1) for t in (1, -1)]
    structure = crystal("P 1", [3.57, 7.1, 10.2, 90, 90, 90], sites)
    assert summary(units_of(structure)) == {"Cl2Co": [1, 1], "H2O": [2, 0]}


# What the result says


def test_molecule_net_and_single_atom_are_told_apart():
    kinds = {unit.formula: (unit.is_molecule, unit.is_net, unit.kind) for unit in units_of(listed("lithium_niobate"))}
    assert kinds == {"Nb6O18": (False, True, "three-dimensional net"), "Li": (False, False, "single atom")}


def test_the_reason_names_the_bonds_and_the_contacts_left_out():
    units = {unit.formula: unit.reason for unit in units_of(listed("calcite"))}
    assert units["CO3"] == (
        "C-O (1.28 Å): bonded (shorter than 1.15 times the sum of the covalent radii). "
        "Ca-O (2.36 Å): not bonded (alkali and alkaline-earth ions are held by charge)."
    )


def test_the_reason_of_a_net_says_so():
    assert (
        "The bonds form an endless layer, which is treated by atomic sites." in units_of(listed("graphite"))[0].reason
    )


def test_a_lonely_atom_has_a_reason_too():
    assert units_of(listed("argon"))[0].reason == "No other atom is within the reach of a bond."


@pytest.mark.parametrize(
    ("counts", "customary_form", "hill_form"),
    [
        ({"S": 1, "O": 4}, "SO4", "O4S"),
        ({"N": 1, "H": 4}, "NH4", "H4N"),
        ({"Pt": 1, "Cl": 6}, "PtCl6", "Cl6Pt"),
        ({"Cl": 1, "O": 4}, "ClO4", "ClO4"),
        ({"H": 2, "O": 1}, "H2O", "H2O"),
        ({"D": 2, "O": 1}, "D2O", "D2O"),
        ({"H": 1, "O": 1}, "OH", "HO"),
        ({"H": 2, "P": 1, "O": 4}, "H2PO4", "H2O4P"),
        ({"C": 6, "H": 6}, "C6H6", "C6H6"),
        ({"C": 1, "O": 3}, "CO3", "CO3"),
        ({"C": 1, "H": 4, "N": 2, "O": 1}, "CH4N2O", "CH4N2O"),
        ({"Fe": 1, "C": 6, "N": 6}, "FeC6N6", "C6FeN6"),
        ({"Mo": 1, "S": 2}, "MoS2", "MoS2"),
    ],
)
def test_formulas_are_written_as_chemists_and_as_hill_do(counts, customary_form, hill_form):
    assert (customary(counts), hill(counts)) == (customary_form, hill_form)


def test_the_name_of_a_unit_is_its_customary_formula():
    assert {unit.name for unit in units_of(listed("stolzite"))} == {"Pb", "WO4"}


def half(element: str, group: str = "") -> Site:
    return Site(element, (Occupant(element, 0.5),), group)


def test_a_half_occupied_molecule_keeps_its_formula():
    structure = Structure(
        np.eye(3) * 10, [[0.5, 0.5, 0.5], [0.615, 0.5, 0.5], [0.385, 0.5, 0.5]], (half("C"), half("O"), half("O"))
    )
    unit = units_of(structure)[0]
    assert (unit.formula, unit.occupancy, unit.disordered) == ("CO2", 0.5, True)


def test_a_molecule_disordered_about_a_centre_is_counted_once():
    """Tetrafluoroborate in two orientations by turns about one point, boron 0.3 Å apart."""
    corners = np.array([(1, 1, 1), (1, -1, -1), (-1, 1, -1), (-1, -1, 1)]) * 1.38 / np.sqrt(3)
    one = np.array([(0, 0, 0), *corners]) + np.array([0.15, 0, 0])
    positions = (np.concatenate([one, -one]) + 6) / 12
    sites = (half("B", "-1"), *[half("F", "-1")] * 4) * 2
    units = units_of(Structure(np.eye(3) * 12, positions, sites))
    total = sum(unit.occupancy for unit in units)
    assert {unit.formula for unit in units} == {"BF4"}
    assert total == pytest.approx(1)


def test_ordered_units_are_said_to_be_ordered():
    assert not any(unit.disordered for unit in units_of(listed("urea")))


def test_a_unit_knows_the_labels_by_which_it_can_be_asked_for():
    assert {unit.labels for unit in units_of(listed("calcite"))} == {("Ca1",), ("C2", "O3", "O3", "O3")}


def test_units_can_be_found_without_a_structure():
    structure = listed("urea")
    units = find_units(bonds_of(structure), len(structure), structure.elements)
    assert [unit.formula for unit in units] == ["CH4N2O", "CH4N2O"]


# The graph


@pytest.mark.parametrize("seed", range(20))
def test_rank_of_integer_vectors(seed):
    """Source: the singular values of numpy."""
    random = np.random.default_rng(seed)
    vectors = random.integers(-3, 4, (5, 3)) @ np.diag(random.integers(0, 2, 3)) @ random.integers(-1, 2, (3, 3))
    assert rank(vectors.tolist()) == np.linalg.matrix_rank(vectors)


def test_an_atom_bonded_to_its_own_images_is_a_net():
    first = np.array([0, 0])
    parts = connected_parts(1, first, first, np.array([[1, 0, 0], [1, 2, 0]]))
    assert parts.dimension.tolist() == [2]


# Files


@pytest.mark.parametrize(
    ("file", "expected"),
    [
        ("aragonite.cif", {"Ca": [4, 0], "CO3": [4, 0]}),
        ("barite.cif", {"Ba": [4, 0], "O4S": [4, 0]}),
        ("benzene.cif", {"C6H6": [4, 0]}),
        ("gypsum.cif", {"Ca": [4, 0], "O4S": [4, 0], "H2O": [8, 0]}),
        ("magnesian_calcite.cif", {"Ca0.9Mg0.1": [6, 0], "CO3": [6, 0]}),
        ("sodium_nitrate.cif", {"Na": [6, 0], "NO3": [6, 0]}),
        ("scheelite.cif", {"Ca": [4, 0], "O4W": [4, 0]}),
        ("silicon.cif", {"Si8": [1, 3]}),
        ("strontium_titanate_77K.cif", {"Sr": [4, 0], "O12Ti4": [1, 3]}),
        ("zircon.vasp", None),
    ],
)
def test_units_of_the_demo_files(file, expected):
    found = summary(units_of(read(DEMO / file)))
    assert found == (expected or {"Zr": [found["Zr"][0], 0], "O4Si": [found["Zr"][0], 0]})


MINERALS = {
    "1000039": {"Al6O18": [8, 0]},  # calcium cyclo-hexaaluminate: rings, by its name
    "1000049": {"O4S": [2, 0]},  # potassium sulfate
    "1010050": {"F7Ta": [4, 0]},  # potassium heptafluorotantalate
    "2003120": {"AsF6": [3, 0], "K": [3, 0]},
    "2019541": {"LuS2": [3, 2], "Na": [3, 0]},  # layers of the alpha-NaFeO2 type
    "2020199": {"AlF6": [6, 0]},  # (H3O, H5O2)3 AlF6: the anion, by its formula
    "2100156": {"H2O": [32, 0], "HO": [8, 0], "Sr": [4, 0]},  # Sr(OH)2 8H2O
    "2103766": {"DO": [16, 0], "Ba": [8, 0]},  # Ba(OD)2
    "2207381": {"H2O2P": [8, 0], "Cd": [4, 0]},  # hypophosphite
    "2310693": {"HO": [18, 0], "O4S": [6, 0], "K": [3, 0], "Al": [9, 0]},  # alunite
    "1008449": {"Be2F7": [8, 0], "CH6N3": [24, 0]},  # guanidinium diberyllium fluoride, by its name
    "2101258": {"CCl4": [16, 0], "Cl2I": [8, 0], "Cl12N4P5": [8, 0]},
    "7013301": {"O9Si3": [4, 1]},  # wollastonite: single chains of period three
    "8103382": {"Al4O16Si4": [1, 3], "Li": [4, 0], "H2O": [4, 0]},  # zeolite ABW
    "9001838": {"O4Si": [4, 0]},  # kyanite: isolated tetrahedra
    "9001907": {"CO3": [8, 0]},  # cordylite
    "9002082": {"Al16Mg8O32": None},
    "9002544": {"O7Si2": [4, 0], "D2O": [4, 0], "DO": [8, 0]},  # lawsonite: Si2O7, OD and D2O
    "9005454": {"O4P": [12, 0]},  # an alluaudite
    "9008098": {"AsI3": [2, 0]},
    "9008564": {"C8": [1, 3]},
    "9012705": {"C2": [1, 2]},  # rhombohedral graphite: one layer in the primitive cell
    "9013162": {"O4Si": [24, 0], "Al": [16, 0], "Mg": [24, 0]},  # pyrope
    "1100929": {"O62P2W18": [2, 0]},  # the Dawson anion
}


@pytest.mark.skipif(not CORPUS.exists(), reason="the corpus of CIF files is not at hand")
@pytest.mark.parametrize("code", MINERALS)
def test_units_of_minerals_and_salts_in_the_corpus(code):
    """What each is, by its chemical name and mineral class (common practice)."""
    found = summary(units_of(read(CORPUS / f"{code}.cif")))
    for formula, expected in MINERALS[code].items():
        if expected is not None:
            assert found.get(formula) == expected
