"""Words and numbers of structure files: values, formulas, elements from labels, space-group symbols."""

from __future__ import annotations

import gemmi
import numpy as np
import pytest

from sitesym.errors import ReadError
from sitesym.reading.cif_cell import lattice_of
from sitesym.reading.cif_symbols import clean_symbol, setting_of_hall, settings_of_number, settings_of_symbol
from sitesym.reading.cif_values import number_of, parse_number
from sitesym.reading.elements import covalent_radius, element_of_type, elements_of_label, is_dummy, symbols
from sitesym.reading.formula import parse_formula
from sitesym.reading.neighbours import near_pairs
from sitesym.reading.text import printable


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("0.123(4)", 0.123),
        ("-.5", -0.5),
        ("+0.25", 0.25),
        ("7.", 7.0),
        ("12.4375(15)", 12.4375),
        ("1/3", 1 / 3),
        ("-2/3", -2 / 3),
        ("2.5E-3", 0.0025),
        ("1.0d0", 1.0),
        ("90.00(2", 90.0),
        ("?", None),
        (".", None),
        ("", None),
        (None, None),
    ],
)
def test_numbers_of_cif(text: str | None, value: float | None) -> None:
    assert parse_number(text) == (value if value is None else pytest.approx(value))


@pytest.mark.parametrize("text", ["abc", "nan", "inf", "-inf", "1,5", "1/0", "0.1 0.2", "1e999", "x", "0x10"])
def test_no_numbers_of_cif(text: str) -> None:
    with pytest.raises(ReadError, match="_atom_site_fract_x of O1"):
        number_of(text, "_atom_site_fract_x of O1")


@pytest.mark.parametrize(
    ("text", "amounts"),
    [
        ("C107 H142 N14 O26", {"C": 107, "H": 142, "N": 14, "O": 26}),
        ("Ca (Al1.94 Fe.06) Si2 O10 D4", {"Ca": 1, "Al": 1.94, "Fe": 0.06, "Si": 2, "O": 10, "D": 4}),
        ("Ca S O4 . 2 H2 O", {"Ca": 1, "S": 1, "O": 6, "H": 4}),
        ("CuSO4·5H2O", {"Cu": 1, "S": 1, "O": 9, "H": 10}),
        ("Fe1/3 I2 Li O6", {"Fe": 1 / 3, "I": 2, "Li": 1, "O": 6}),
        ("C8 H22 B2 N2 S4 , 0.33C H2 Cl2", {"C": 8.33, "H": 22.66, "B": 2, "N": 2, "S": 4, "Cl": 0.66}),
        ("C78 H92 N30 O46 P7,3(H2 O1)", {"C": 78, "H": 98, "N": 30, "O": 49, "P": 7}),
        ("K4[Fe(CN)6]", {"K": 4, "Fe": 1, "C": 6, "N": 6}),
        ("(C2 H4)n", {}),
        ("?", {}),
        ("((((", {}),
        (None, {}),
    ],
)
def test_formulas(text: str | None, amounts: dict[str, float]) -> None:
    assert parse_formula(text) == pytest.approx(amounts)


@pytest.mark.parametrize(
    ("text", "element"),
    [
        ("Fe3+", "Fe"),
        ("O2-", "O"),
        ("O-2", "O"),
        ("D0", "D"),
        ("CU", "Cu"),
        ("o", "O"),
        ("Al+3", "Al"),
        ("H1", "H"),
        ("D", "D"),
        ("Wat", None),
        ("T", None),
        ("M1", None),
    ],
)
def test_element_of_type_symbol(text: str, element: str | None) -> None:
    assert element_of_type(text, ()) == element


@pytest.mark.parametrize(
    ("label", "known", "elements"),
    [
        ("Ca1", (), ("Ca",)),
        ("CA1", ("C", "H", "O"), ("C",)),
        ("CA1", ("Ca", "O"), ("Ca",)),
        ("CA1", ("C", "Ca", "O"), ("Ca", "C")),
        ("C12B", ("C", "H"), ("C",)),
        ("Wat", ("Ca", "O", "H"), ("O",)),
        ("OW1", ("O", "H"), ("O",)),
        ("Ow", (), ("O",)),
        ("W1", ("W", "O"), ("W",)),
        ("W1", ("Ca", "O"), ("O",)),
        ("O-H4", ("O", "Si"), ("O",)),
        ("HO1", ("C", "H", "O"), ("H",)),
        ("HO1", ("Ho", "O"), ("Ho",)),
        ("HO1", (), ("H", "Ho")),
        ("D1", ("D", "O"), ("D",)),
        ("Dw", ("D", "O"), ("D",)),
        ("Dy1", ("Dy", "O"), ("Dy",)),
        ("SiT1", ("Si", "Al", "O"), ("Si",)),
        ("NaK", ("Na", "K"), ("Na",)),
        ("IX", ("I", "Cl"), ("I",)),
        ("Cl(12)", ("C", "Cl"), ("Cl",)),
        ("H'(C6)", ("C", "H"), ("H",)),
        ("T1", ("Si", "O"), ()),
        ("M2", (), ()),
        ("123", (), ()),
    ],
)
def test_elements_of_label(label: str, known: tuple[str, ...], elements: tuple[str, ...]) -> None:
    """The formula decides between readings; without it, letter case; only capitals stay open."""
    assert elements_of_label(label, known) == elements


def test_marks_that_are_no_atoms() -> None:
    assert is_dummy("", "Cg1")
    assert is_dummy("", "Vac1")
    assert is_dummy("X", "anything")
    assert not is_dummy("C", "Cg1")
    assert not is_dummy("", "Cs1")
    assert not is_dummy("V", "V1")


def test_symbols_and_radii() -> None:
    """Radii of Cordero and others 2008, Table 2: H 0.31, C 0.76 (sp3; gemmi holds the 0.73 of sp2), Cs 2.44 Å."""
    assert {"H", "D", "T", "Og"} < set(symbols())
    assert covalent_radius("D") == pytest.approx(0.31)
    assert covalent_radius("Cs") == pytest.approx(2.44)
    assert covalent_radius("A") is None


@pytest.mark.parametrize(
    ("text", "settings"),
    [
        ("P 21 21 21", ["P 21 21 21"]),
        ("P212121", ["P 21 21 21"]),
        ("P2(1)/n", ["P 1 21/n 1"]),
        ("P 2~1~/c", ["P 1 21/c 1"]),
        ("P2_1/c", ["P 1 21/c 1"]),
        ("P 6<sub>3</sub>/m m c", ["P 63/m m c"]),
        ("Pmn2(1)", ["P m n 21"]),
        ("F d 3 m", ["F d -3 m:1", "F d -3 m:2"]),
        ("F d -3 m :2", ["F d -3 m:2"]),
        ("F d -3 m S", ["F d -3 m:1"]),
        ("I41/amdZ", ["I 41/a m d:2"]),
        ("P 4/n n c (origin choice 2)", ["P 4/n n c:2"]),
        ("R -3 c", ["R -3 c:H", "R -3 c:R"]),
        ("R3cH", ["R 3 c:H"]),
        ("R -3 m r", ["R -3 m:R"]),
        ("P 21/n 21/m 21/a", ["P n m a"]),
        ("F 4/m -3 2/m", ["F m -3 m"]),
        ("P 63/m 2/m 2/c", ["P 63/m m c"]),
        ("P -3 2/m 1", ["P -3 m 1"]),
        ("FM-3M", ["F m -3 m"]),
        ("C m c e", ["C m c a"]),
        ("P1\u0304", ["P -1"]),
        ("X c", []),
        ("?", []),
        ("", []),
    ],
)
def test_hermann_mauguin_symbols(text: str, settings: list[str]) -> None:
    assert [setting.xhm() for setting in settings_of_symbol(clean_symbol(text))] == settings


def test_every_tabulated_symbol_is_found_again() -> None:
    """Each extended symbol of gemmi's table leads to its own setting, each Hall symbol to its group."""
    for group in gemmi.spacegroup_table():
        assert group.xhm() in [setting.xhm() for setting in settings_of_symbol(group.xhm())]
        found = setting_of_hall(group.hall)
        assert found is not None
        assert found.number == group.number


@pytest.mark.parametrize("text", ["P n m a", "Xc", "", "?", "garbage", "P 21 21 21"])
def test_texts_that_are_no_hall_symbols(text: str) -> None:
    assert setting_of_hall(text) is None


def test_reference_setting_comes_first() -> None:
    assert settings_of_number(14)[0].xhm() == "P 1 21/c 1"
    assert settings_of_number(166)[0].xhm() == "R -3 m:H"


def test_lattice_has_the_given_metric() -> None:
    """Lengths and angles are recovered, against gemmi's own cell."""
    lattice = lattice_of([4.0, 5.5, 7.25], [80.0, 95.5, 103.0])
    assert np.linalg.norm(lattice, axis=1) == pytest.approx([4.0, 5.5, 7.25])
    assert np.linalg.det(lattice) == pytest.approx(gemmi.UnitCell(4.0, 5.5, 7.25, 80.0, 95.5, 103.0).volume)
    assert lattice_of([3.0, 3.0, 3.0], [90.0] * 3) == pytest.approx(3 * np.eye(3))


@pytest.mark.parametrize(("points", "skew"), [(1, 0.3), (4, 1.4), (60, -0.6), (200, 0.1)])
def test_near_pairs_agree_with_a_general_library(points: int, skew: float) -> None:
    """Pairs and distances are those of ASE's neighbour list, in flat, skewed and small cells."""
    from ase import Atoms
    from ase.neighborlist import neighbor_list

    edge = 2.0 * points ** (1 / 3)
    lattice = np.array([[edge, 0, 0], [skew * edge, 0.8 * edge, 0], [0.2, 0.5, 1.3 * edge]])
    fractional = np.random.default_rng(points).random((points, 3)) * 3 - 1
    for cutoff in (0.5, 2.5, 4.0):
        pairs = near_pairs(lattice, fractional, cutoff)
        crystal = Atoms("H" * points, cell=lattice, scaled_positions=fractional, pbc=True)
        theirs = neighbor_list("d", crystal, cutoff)
        assert np.sort(np.repeat(pairs.distances, 2)) == pytest.approx(np.sort(theirs))


def test_printable_drops_control_characters_only() -> None:
    assert printable("a\x1b[31m\tb\u202e\n<script>é") == "a [31m b <script>é"
    assert printable("x" * 300) == "x" * 199 + "…"
