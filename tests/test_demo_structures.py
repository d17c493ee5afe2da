"""The files of structures_demo, checked by general libraries alone (pymatgen, spglib, gemmi), then read by sitesym.

Space groups are those of the papers cited in each file; bond lengths are those of the trade (International Tables,
volume C, section 9.5, and the papers), quoted from memory and wide enough only for what thermal motion and rounding do.
"""

from pathlib import Path

import gemmi
import numpy as np
import pytest
import spglib
from pymatgen.core import Structure
from pymatgen.io.vasp import Poscar

import sitesym

# The other reader warns of the faults that two files have on purpose and of coordinates such as 0.66667; the older
# interface of spglib, which serves all supported versions here, warns of its successor.
pytestmark = pytest.mark.filterwarnings("ignore::UserWarning", "ignore:Set OLD_ERROR_HANDLING:DeprecationWarning")

FOLDER = Path(__file__).parent.parent / "structures_demo"

# file: (space group, atoms in the cell, bond, shortest and longest of its bond lengths in Å, bonds of one such centre)
EXPECTED = {
    "anatase.cif": (141, 12, ("Ti", "O"), (1.93, 1.99), 6),
    "aragonite.cif": (62, 20, ("C", "O"), (1.27, 1.29), 3),
    "barite.cif": (62, 24, ("S", "O"), (1.45, 1.50), 4),
    "benzene.cif": (61, 48, ("C", "H"), (1.03, 1.09), 1),
    "calcite.cif": (167, 30, ("C", "O"), (1.27, 1.29), 3),
    "dry_ice.cif": (205, 12, ("C", "O"), (1.14, 1.17), 2),
    "gypsum.cif": (15, 48, ("S", "O"), (1.46, 1.49), 4),
    "lanthanum_manganite.cif": (62, 20, ("Mn", "O"), (1.90, 2.19), 6),
    "lithium_niobate.cif": (161, 30, ("Nb", "O"), (1.88, 2.12), 6),
    "magnesian_calcite.cif": (167, 30, ("C", "O"), (1.27, 1.29), 3),
    "molybdenite.vasp": (194, 6, ("Mo", "S"), (2.40, 2.43), 6),
    "portlandite_without_hydrogen.cif": (164, 3, ("Ca", "O"), (2.35, 2.39), 6),
    "pyrope.cif": (230, 160, ("Si", "O"), (1.62, 1.65), 4),
    "quartz.cif": (154, 9, ("Si", "O"), (1.60, 1.62), 4),
    "rutile.cif": (136, 6, ("Ti", "O"), (1.94, 1.99), 6),
    "scheelite.cif": (88, 24, ("W", "O"), (1.77, 1.80), 4),
    "silicon.cif": (227, 8, ("Si", "Si"), (2.35, 2.36), 4),
    "sodium_nitrate.cif": (167, 30, ("N", "O"), (1.23, 1.25), 3),
    "strontium_titanate_300K.cif": (221, 5, ("Ti", "O"), (1.95, 1.96), 6),
    "strontium_titanate_77K.cif": (140, 20, ("Ti", "O"), (1.94, 1.96), 6),
    "urea.cif": (113, 16, ("C", "O"), (1.25, 1.27), 1),
    "zircon.vasp": (141, 24, ("Si", "O"), (1.61, 1.63), 4),
}
FAULTY_FORMULA = "portlandite_without_hydrogen.cif"


def load(name: str) -> Structure:
    if name.endswith(".vasp"):
        return Poscar.from_file(FOLDER / name).structure
    return Structure.from_file(FOLDER / name)


def space_group(structure: Structure, tolerance: float) -> int:
    kinds = {species: number for number, species in enumerate(dict.fromkeys(structure.species_and_occu), 1)}
    numbers = [kinds[species] for species in structure.species_and_occu]
    cell = (structure.lattice.matrix, structure.frac_coords, numbers)
    return spglib.get_symmetry_dataset(cell, symprec=tolerance).number


def test_every_structure_of_the_folder_is_expected_here():
    assert {path.name for path in FOLDER.iterdir() if path.suffix in {".cif", ".vasp"}} == set(EXPECTED)


@pytest.mark.parametrize("name", EXPECTED)
def test_space_group_at_a_hundredth_of_an_angstrom_is_the_published_one(name):
    number, atoms, *_ = EXPECTED[name]
    structure = load(name)
    assert (space_group(structure, 0.01), len(structure)) == (number, atoms)


@pytest.mark.parametrize("name", EXPECTED)
def test_bond_lengths_and_coordination_are_those_of_the_trade(name):
    _, _, (centre, ligand), (low, high), count = EXPECTED[name]
    structure = load(name)
    for site in structure:
        if centre in {element.symbol for element in site.species}:
            near = structure.get_neighbors(site, high)
            lengths = [other.nn_distance for other in near if ligand in {element.symbol for element in other.species}]
            assert len(lengths) == count
            assert min(lengths) >= low


@pytest.mark.parametrize("name", EXPECTED)
def test_no_two_atoms_are_closer_than_any_bond(name):
    distances = load(name).distance_matrix
    assert distances[~np.eye(len(distances), dtype=bool)].min() > 0.93  # the shortest bond here is O-H of gypsum


@pytest.mark.parametrize("name", [name for name in EXPECTED if name.endswith(".cif")])
def test_stated_formula_symbol_hall_symbol_and_operations_agree(name):
    block = gemmi.cif.read(str(FOLDER / name)).sole_block()
    by_symbol = gemmi.find_spacegroup_by_name(gemmi.cif.as_string(block.find_value("_space_group_name_H-M_alt")))
    operations = [gemmi.Op(row.str(0)) for row in block.find(["_space_group_symop_operation_xyz"])]
    assert gemmi.find_spacegroup_by_ops(gemmi.GroupOps(operations)) == by_symbol
    assert gemmi.cif.as_string(block.find_value("_space_group_name_Hall")) == by_symbol.hall
    assert int(block.find_value("_space_group_IT_number")) == by_symbol.number == EXPECTED[name][0]
    formula = gemmi.cif.as_string(block.find_value("_chemical_formula_sum"))
    units = int(block.find_value("_cell_formula_units_Z"))
    stated = {element: amount * units for element, amount in amounts(formula).items()}
    found = {element: float(amount) for element, amount in load(name).composition.as_dict().items()}
    if name == FAULTY_FORMULA:
        assert stated.pop("H") == 2.0
    assert found == pytest.approx(stated)


def amounts(formula: str) -> dict[str, float]:
    """`C Ca0.9 O3` -> {"C": 1, "Ca": 0.9, "O": 3}."""
    parts = [(part.rstrip("0123456789."), part) for part in formula.split()]
    return {element: float(part[len(element) :] or 1) for element, part in parts}


@pytest.mark.parametrize("name", EXPECTED)
def test_the_source_of_the_values_stands_at_the_top(name):
    first_lines = (FOLDER / name).read_text(encoding="ascii").split("data_")[0]
    assert "memory" in first_lines
    assert "ritten for this project" in first_lines


def test_cold_strontium_titanate_turns_cubic_within_the_scanned_tolerances():
    """At 77 K the octahedra are turned by 1.4 degrees (Unoki and Sakudo 1967), which moves oxygen by 0.05 Å."""
    structure = load("strontium_titanate_77K.cif")
    assert [space_group(structure, tolerance) for tolerance in (0.001, 0.03, 0.1)] == [140, 140, 221]


@pytest.mark.parametrize("name", EXPECTED)
def test_sitesym_reads_it_without_a_warning_and_finds_the_same_space_group(name):
    structure = sitesym.read(str(FOLDER / name))
    taught = {"magnesian_calcite.cif": {"mixed_occupancy"}, FAULTY_FORMULA: {"hydrogen_missing"}}
    assert len(structure) == EXPECTED[name][1]
    assert sitesym.analyse(structure, tolerance=0.01, scan=False).symmetry.setting.number == EXPECTED[name][0]
    assert {question.code for question in structure.questions} == taught.get(name, set())


def test_the_cautions_that_the_folder_teaches_are_given():
    """Common practice: an average structure, missing hydrogen and a nearby supergroup are said beside the counts."""

    def cautions(name):
        return {caution.code for caution in sitesym.analyse(sitesym.read(str(FOLDER / name))).cautions}

    assert "average_structure" in cautions("magnesian_calcite.cif")
    assert "hydrogen_missing" in cautions("portlandite_without_hydrogen.cif")
    assert "near_supergroup" in cautions("strontium_titanate_77K.cif")
    assert cautions("calcite.cif") == set()
