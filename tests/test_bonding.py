"""Contacts, the tables of the elements, the rule for bonds and the user's word."""

import time

import ase.data
import numpy as np
import pytest
from ase import Atoms
from ase.neighborlist import neighbor_list
from literature import reference
from pymatgen.core.bond_valence import BV_PARAMS
from unit_crystals import in_a_box, listed

from sitesym.bonding import BondRules, Verdict, find_bonds, parse_pair
from sitesym.bonding.chemistry import Kind, anions, covalent_radii, kind_of, oxide_parameters
from sitesym.bonding.contacts import find_contacts
from sitesym.errors import UsageError
from sitesym.units import bonds_of, units_of


def formulas(structure, rules=None):
    """Formula -> number of units."""
    found: dict[str, int] = {}
    for unit in units_of(structure, rules):
        found[unit.formula] = found.get(unit.formula, 0) + 1
    return found


def test_covalent_radii_are_those_of_the_general_library():
    """Source: ase.data, which quotes the same paper (Cordero and others 2008)."""
    expected = dict(zip(ase.data.chemical_symbols[1:97], ase.data.covalent_radii[1:97], strict=True))
    assert {name: radius for name, radius in covalent_radii().items() if name not in "DT"} == pytest.approx(expected)


def test_deuterium_and_tritium_have_the_radius_of_hydrogen():
    assert covalent_radii()["D"] == covalent_radii()["T"] == covalent_radii()["H"]


def independent_parameter(one: str, other: str) -> float:
    """Bond-valence parameter in Å from the sizes and electronegativities of O'Keeffe and Brese 1991, J. Am. Chem. Soc.
    113, 3226, equation 3; the numbers are pymatgen's.
    """
    a, b = ({str(key): value for key, value in BV_PARAMS.items()}[name] for name in (one, other))
    product, difference = a["r"] * b["r"], np.sqrt(a["c"]) - np.sqrt(b["c"])
    return a["r"] + b["r"] - product * difference**2 / (a["c"] * a["r"] + b["c"] * b["r"])


# For these the sizes of the formula, one for all anions and states of oxidation, miss the tabulated oxides by 0.1 Å to
# 0.2 Å.
POOR = {"Cu", "Ag", "Pd"}


@pytest.mark.parametrize("element", sorted(set(oxide_parameters()) & {str(key) for key in BV_PARAMS} - POOR))
def test_oxide_parameter_agrees_with_the_independent_formula(element):
    assert oxide_parameters()[element] == pytest.approx(independent_parameter(element, "O"), abs=0.10)


@pytest.mark.parametrize("anion", ["F", "Cl", "Br", "I"])
def test_offset_of_an_anion_agrees_with_the_independent_formula(anion):
    metals = ["Al", "Ti", "Cr", "Fe", "Ni", "Zn", "Zr", "Cd", "Sn", "Pb", "La", "Hf"]
    offsets = [independent_parameter(metal, anion) - independent_parameter(metal, "O") for metal in metals]
    assert anions()[anion].offset == pytest.approx(np.mean(offsets), abs=0.07)


@pytest.mark.parametrize(
    ("name", "element", "valence"),
    [
        ("corundum", "Al", 3), ("rutile", "Ti", 4), ("quartz", "Si", 4), ("calcite", "C", 4), ("stolzite", "W", 6),
        ("xenotime", "P", 5), ("xenotime", "Y", 3), ("zircon", "Zr", 4), ("forsterite", "Si", 4), ("zincite", "Zn", 2),
        ("siderite", "Fe", 2), ("rhodochrosite", "Mn", 2), ("lithium_niobate", "Nb", 5), ("anglesite", "S", 6),
        ("anglesite", "Pb", 2), ("beryl", "Be", 2), ("potassium_dihydrogen_phosphate", "P", 5), ("elpasolite", "Al", 3),
        ("potassium_hexachloroplatinate", "Pt", 4), ("yttrium_aluminium_garnet", "Y", 3), ("barium_titanate", "Ti", 4),
    ],
)  # fmt: skip
def test_valence_sums_come_out_as_the_known_valences(name, element, valence):
    """The valence sum rule (Brown and Altermatt 1985): within 10 %, on measured structures."""
    structure = listed(name)
    atoms = Atoms(structure.elements, cell=structure.lattice, scaled_positions=structure.fractional, pbc=True)
    centre = structure.elements.index(element)
    i, j, distance = neighbor_list("ijd", atoms, 3.5)
    others = [(structure.elements[b], d) for a, b, d in zip(i, j, distance, strict=True) if a == centre]
    total = sum(
        np.exp((oxide_parameters()[element] + anions()[other].offset - d) / 0.37)
        for other, d in others
        if other in anions()
    )
    assert total == pytest.approx(valence, rel=0.10)


@pytest.mark.parametrize(
    ("content", "kind"),
    [
        ({"Ca": 0.9, "Mg": 0.1}, Kind.IONIC),
        ({"Ca": 0.97, "Mn": 0.03}, Kind.IONIC),
        ({"Mg": 0.25, "Nb": 0.5, "Ti": 0.25}, Kind.METAL),
        ({"Al": 0.25, "Si": 0.75}, Kind.METAL),
        ({"O": 0.5, "F": 0.5}, Kind.NONMETAL),
        ({"H": 0.5, "D": 0.5}, Kind.HYDROGEN),
        ({"Be": 1.0}, Kind.METAL),
        ({"Q": 1.0}, Kind.UNKNOWN),
    ],
)
def test_kind_of_a_site_follows_the_greater_part(content, kind):
    assert kind_of(content) is kind


@pytest.mark.parametrize("seed", range(12))
def test_contacts_are_those_of_the_general_library(seed):
    """Source: ase.neighborlist, on random triclinic cells, small and large, flat and thin, atoms outside the cell."""
    random = np.random.default_rng(seed)
    lattice = np.diag(random.uniform(1.5, 14, 3)) + random.uniform(-1.2, 1.2, (3, 3))
    n = int(random.integers(1, 60))
    fractional, kind = random.uniform(-2, 3, (n, 3)), random.integers(0, 2, n)
    reach = np.array([[1.1, 2.3], [2.3, 3.1]])
    found = find_contacts(lattice, fractional, kind, reach)
    atoms = Atoms("H" * n, cell=lattice, scaled_positions=fractional, pbc=True)
    i, j, shift, distance = neighbor_list("ijSd", atoms, 3.1)
    keep = distance < reach[kind[i], kind[j]]
    expected = {(a, b, *s) for a, b, s in zip(i[keep].tolist(), j[keep].tolist(), shift[keep].tolist(), strict=True)}
    once = {
        (a, b, *s) for a, b, s in zip(found.first.tolist(), found.second.tolist(), found.shift.tolist(), strict=True)
    }
    back = {(b, a, -x, -y, -z) for a, b, x, y, z in once}
    assert not once & back
    assert once | back == expected
    assert len(once) == len(found)
    steps = (fractional[found.second] + found.shift - fractional[found.first]) @ lattice
    assert found.distance == pytest.approx(np.linalg.norm(steps, axis=1))


def water(x: float, turned: bool = False):
    """Oxygen at x, hydrogens toward +x or -x."""
    sign = -1 if turned else 1
    return [(x, 0, 0), (x + sign * 0.96, 0, 0), (x - sign * 0.24, 0.93, 0)]


def test_a_hydrogen_bond_is_no_bond():
    """Water dimer, O...H 1.3 Å short of the strongest known bonds of its kind."""
    structure = in_a_box(["O", "H", "H"] * 2, [*water(3.0), *water(3.0 + 0.96 + 1.25)])
    assert formulas(structure) == {"H2O": 2}


def test_a_bridging_hydrogen_atom_of_diborane_has_two_bonds():
    """Bartell and Carroll 1965, J. Chem. Phys. 42, 1135 (from memory): B-B 1.775, B-H 1.196 and 1.339 Å."""
    height = np.sqrt(1.339**2 - 0.8875**2)
    terminal = [(s * (0.8875 + 0.594), t * 1.038, 0) for s in (1, -1) for t in (1, -1)]
    positions = [(0.8875, 0, 0), (-0.8875, 0, 0), (0, 0, height), (0, 0, -height), *terminal]
    structure = in_a_box(["B", "B"] + ["H"] * 6, np.array(positions) + 10)
    bonds = bonds_of(structure)
    of_hydrogen = np.bincount(np.concatenate([bonds.first, bonds.second]), minlength=8)[2:]
    assert of_hydrogen.tolist() == [2, 2, 1, 1, 1, 1]


def test_hydrogen_atoms_too_near_each_other_are_not_bonded():
    """Two half-occupied hydrogen sites of a methyl group lie 0.6 to 1 Å apart."""
    structure = in_a_box(["C", "H", "H"], np.array([(0, 0, 0), (1.0, 0, 0), (0.8, 0.6, 0)]) + 5)
    bonds = bonds_of(structure)
    assert sorted(zip(bonds.first.tolist(), bonds.second.tolist(), strict=True)) == [(0, 1), (0, 2)]


def test_unnamed_elements_have_no_bonds():
    """A POSCAR without symbols calls its elements A, B, C: carbon and boron must not be read into that."""
    bonds = find_bonds(np.eye(3) * 3, [[0, 0, 0], [0.5, 0, 0], [0, 0.5, 0]], ["A", "B", "C"])
    assert len(bonds) == 0


CHLORATE = [(0, 0, 0), (0.83, 0.83, 0.83), (-0.83, -0.83, 0.83), (-0.83, 0.83, -0.83), (0.83, -0.83, -0.83)]


def test_alternatives_are_not_bonded_but_both_are_bonded_to_the_common_part():
    """A perchlorate ion in two orientations."""
    turned = [(-x, y, z) for x, y, z in CHLORATE[1:]]
    elements = ["Cl"] + ["O"] * 8
    share = [{"Cl": 1.0}] + [{"O": 0.5}] * 8
    bonds = find_bonds(
        np.eye(3) * 12, (np.array(CHLORATE + turned) + 6) / 12, elements, groups=[""] + ["1"] * 4 + ["2"] * 4,
        contents=share,
    )  # fmt: skip
    assert len(bonds) == 8
    assert set(bonds.first.tolist()) == {0}
    without_groups = find_bonds(np.eye(3) * 12, (np.array(CHLORATE + turned) + 6) / 12, elements, contents=share)
    assert len(without_groups) == 8


@pytest.mark.parametrize(("one", "other", "bonds"), [("1", "2", 0), ("1", "1", 1), ("A1", "B2", 1), ("A1", "A2", 0)])
def test_groups_exclude_each_other_within_one_assembly(one, other, bonds):
    """CIF core dictionary: alternatives belong to one disorder assembly."""
    positions = (np.array([(0, 0, 0), (1.5, 0, 0)]) + 5) / 10
    found = find_bonds(np.eye(3) * 10, positions, ["C", "C"], groups=[one, other], contents=[{"C": 0.5}] * 2)
    assert len(found) == bonds


def verdicts(structure, one: str, other: str):
    """Names of the verdicts on all contacts of two elements."""
    bonds = bonds_of(structure)
    names = structure.elements
    taken = zip(bonds.first, bonds.second, bonds.verdict, strict=True)
    left = zip(bonds.refused.first, bonds.refused.second, bonds.refusal, strict=True)
    return {Verdict(v).name for i, j, v in [*taken, *left] if {names[i], names[j]} == {one, other}}


@pytest.mark.parametrize(
    ("name", "one", "other", "verdict"),
    [
        ("calcite", "Ca", "O", "IONIC"),
        ("calcite", "C", "O", "COVALENT"),
        ("siderite", "Fe", "O", "STRONGER"),
        ("stolzite", "Pb", "O", "STRONGER"),
        ("stolzite", "W", "O", "POLAR"),
        ("zircon", "Zr", "Si", "FAR_SIDE"),
        ("rutile", "Ti", "Ti", "FAR_SIDE"),
        ("potassium_hexachloroplatinate", "K", "Cl", "IONIC"),
        ("potassium_hexachloroplatinate", "Pt", "Cl", "POLAR"),
        ("calomel", "Hg", "Hg", "METALLIC"),
        ("prussian_blue_frame", "Fe", "C", "COORDINATION"),
        ("molybdenite", "Mo", "S", "POLAR"),
        ("dihydrogen_phosphate_centred", "O", "H", "ENDLESS"),
        ("potassium_hydrogen_difluoride", "F", "H", "HYDROGEN"),
        ("rock_salt", "Na", "Cl", "IONIC_LATTICE"),
    ],
)
def test_the_verdict_names_the_reason(name, one, other, verdict):
    assert verdicts(listed(name), one, other) == {verdict}


def test_every_entry_of_the_list_of_kinds_is_an_element():
    for word in ("hydrogen", "nonmetal", "metalloid", "ionic", "organometallic"):
        from sitesym.bonding.chemistry import listed as table

        assert table(word) <= set(covalent_radii()) | {"Rn"}


# The user's word


def test_a_pair_can_be_added():
    assert formulas(listed("calcite"), BondRules(add=(("Ca", "O"),))) == {"C6Ca6O18": 1}


def test_an_added_pair_may_be_longer_than_the_cut_off():
    """Silver and chlorine 3.10 Å apart: 1.26 times the sum of radii, beyond 1.15 but within 1.35."""
    structure = in_a_box(["C", "O", "Ag", "Cl"], np.array([(0, 0, 0), (1.13, 0, 0), (6, 0, 0), (9.1, 0, 0)]))
    assert formulas(structure) == {"CO": 1, "Ag": 1, "Cl": 1}
    assert formulas(structure, BondRules(add=(("Ag", "Cl"),))) == {"CO": 1, "AgCl": 1}


def test_a_pair_can_be_forbidden_and_that_wins():
    rules = BondRules(add=(("Pt", "Cl"),), forbid=(("Pt", "Cl"),))
    assert formulas(listed("potassium_hexachloroplatinate"), rules) == {"K": 8, "Pt": 4, "Cl": 24}


def test_pairs_may_be_labels():
    structure = listed("benitoite")
    rules = BondRules(forbid=(("Si3", "O5"),))
    assert formulas(structure, rules) == {"Ba": 2, "Ti": 2, "O3Si3": 2, "O": 12}


@pytest.mark.parametrize(
    ("name", "text", "expected"),
    [
        ("zincite", "ZnO4", None),
        ("sodalite", "SiO4", {"O4Si": 6, "Al": 6, "Na": 8, "Cl": 2}),
        ("quartz", "SiO4", None),
        ("bismuth_telluride", "Bi2Te3", None),
        ("calcite", "CO3", {"CO3": 6, "Ca": 6}),
        ("lithium_niobate", "NbO3", {"NbO3": 6, "Li": 6}),
        ("berlinite", "PO4", {"O4P": 3, "Al": 3}),
        ("calcite", "C2,O3", {"CO3": 6, "Ca": 6}),
        ("diaspore", "O3,H4", {"HO": 4}),
    ],
)
def test_units_can_be_asked_for(name, text, expected):
    """None: neighbouring units share atoms, or there is no such group; then an error of two lines says so."""
    structure = listed(name)
    if expected is None:
        with pytest.raises(UsageError, match=r"share atoms|no group of atoms"):
            units_of(structure, BondRules(units=(text,)))
        return
    assert expected.items() <= formulas(structure, BondRules(units=(text,))).items()


@pytest.mark.parametrize(
    "rules",
    [
        BondRules(add=(("Xx", "O"),)),
        BondRules(forbid=(("Ca", "Ca99"),)),
        BondRules(units=("Ca,Nowhere",)),
        BondRules(units=("SO4",)),
        BondRules(units=("nonsense!",)),
        BondRules(add=(("C", "C"),)),
    ],
)
def test_what_is_not_there_is_an_error_that_names_it(rules):
    with pytest.raises(UsageError) as caught:
        units_of(listed("calcite"), rules)
    assert caught.value.mend


def test_a_cut_off_out_of_reason_is_refused():
    with pytest.raises(UsageError, match="cut-off"):
        BondRules(scale=7)


@pytest.mark.parametrize("text", ["Ca", "Ca-", "Ca-O-C", ""])
def test_what_is_no_pair_is_refused(text):
    with pytest.raises(UsageError, match="pair"):
        parse_pair(text)


def test_a_pair_is_parsed():
    assert parse_pair("Cu1 - O3") == ("Cu1", "O3")


@pytest.mark.parametrize(
    "arguments",
    [
        {"elements": ["C"]},
        {"labels": ["C1"]},
        {"fractional": [[0, 0, np.nan], [0, 0, 0.5]]},
        {"lattice": np.zeros((3, 3))},
    ],
)
def test_arguments_that_do_not_fit_are_refused(arguments):
    given = {"lattice": np.eye(3) * 5, "fractional": [[0, 0, 0], [0, 0, 0.5]], "elements": ["C", "O"]} | arguments
    lattice, fractional, elements = (given.pop(key) for key in ("lattice", "fractional", "elements"))
    with pytest.raises(UsageError):
        find_bonds(lattice, fractional, elements, **given)


def test_reference_structures_are_quoted_with_their_source():
    assert all(entry["source"] for entry in reference("unit_structures.toml").values())


@pytest.mark.parametrize(("name", "times"), [("urea", (4, 4, 2)), ("spinel", (3, 3, 1)), ("forsterite", (3, 2, 3))])
def test_five_hundred_atoms_take_less_than_fifteen_milliseconds(name, times):
    """Processor time, the best of nine."""
    one = listed(name)
    shifts = np.array(list(np.ndindex(*times)))
    fractional = ((one.fractional[None] + shifts[:, None]) / times).reshape(-1, 3)
    lattice = one.lattice * np.array(times)[:, None]
    big = type(one)(lattice, fractional, one.sites * len(shifts))
    assert len(big) >= 490
    best = min(_seconds(big) for _ in range(9))
    assert best < 0.015


def _seconds(structure) -> float:
    start = time.process_time()
    units_of(structure)
    return time.process_time() - start
