"""CIF: which operations are applied when the file lists them, names them, contradicts itself or says nothing."""

from __future__ import annotations

from pathlib import Path

import gemmi
import numpy as np
import pytest
from reading_files.texts import ROCK_SALT, cif, codes, counts, distances, message, read_text

from sitesym.errors import NotAStructureError, ReadError
from sitesym.reading.cif_document import parse
from sitesym.reading.cif_operations import complete, listed_operations
from sitesym.reading.cif_symbols import as_operations, operations_of

DIAMOND = (3.567, 3.567, 3.567, 90, 90, 90)
BOND = 3.567 * np.sqrt(3) / 4
MONOCLINIC = (7.0, 8.0, 9.0, 90, 105, 90)


def xyz(name: str) -> tuple[str, ...]:
    """The operations of a tabulated setting, as a file lists them."""
    return tuple(operation.triplet() for operation in gemmi.SpaceGroup(name).operations())


def operations_in(*texts: str) -> int:
    """Number of operations after completion."""
    listed = listed_operations(parse(cif(("O O 0 0 0",), operations=texts), "test")[0])
    assert listed is not None
    return len(complete(listed))


@pytest.mark.parametrize(
    ("texts", "order"),
    [
        (("x,y,z",), 1),
        (("X, Y, Z", "-X, -Y, -Z"), 2),
        (("1 x,y,z", "2 -x,y+1/2,-z+.5"), 2),
        (("'x,y,z'", "1/2-x, -y, 1/2+z"), 2),
        (("-x,-y,-z",), 2),
        (("x,y,z", "x+0.3333,y+0.6667,z+0.6667"), 3),
        (("x,y,z", "-y,x-y,z"), 3),
        (("x,y,z", "x,y,z", "-x,-y,-z"), 2),
        (xyz("F d -3 m:1"), 192),
        (xyz("P 21 21 21")[:3], 4),
    ],
)
def test_operations_in_many_spellings(texts: tuple[str, ...], order: int) -> None:
    assert operations_in(*texts) == order


@pytest.mark.parametrize("text", ["x,y", "x,y,-z+1/5", "2x,y,z", "x,x,z", "hello", "x,y,z*"])
def test_operations_that_cannot_be_understood(text: str) -> None:
    with pytest.raises(ReadError, match="cannot be understood"):
        operations_in("x,y,z", text)


def test_operations_that_make_no_finite_group() -> None:
    """A shear has infinite order."""
    with pytest.raises(ReadError, match="make no space group"):
        operations_in("x,y,z", "x+y,y,z")


def test_every_tabulated_group_is_closed_and_generated_by_half_its_operations() -> None:
    """All 564 settings of gemmi's table are groups; leaving out operations and completing gives a subgroup or all."""
    for group in gemmi.spacegroup_table():
        operations = operations_of(group)
        assert complete(operations).keys == operations.keys
        half = as_operations(list(group.operations())[: len(operations) // 2 + 1])
        assert complete(half).keys == operations.keys


def test_aragonite_in_its_old_setting(tmp_path: Path) -> None:
    """Pmcn from operations, symbol, Hall symbol; against the expansion by gemmi's own group operations."""
    cell = (4.961, 7.967, 5.741, 90, 90, 90)
    for options in ({"operations": xyz("P m c n")}, {"symbol": "Pmcn"}, {"hall": "-P 2n 2a"}):
        atoms = (
            "Ca Ca 0.25 0.4150 0.7597",
            "C C 0.25 0.7622 0.9138",
            "O1 O 0.25 0.9225 0.9038",
            "O2 O 0.4736 0.6810 0.9138",
        )
        structure = read_text(tmp_path, cif(atoms, cell, **options))
        assert counts(structure) == {"Ca": 4, "C": 4, "O": 12}
        assert structure.declared.number == 62
        expected = {
            tuple(np.round(np.mod(operation.apply_to_xyz([0.4736, 0.6810, 0.9138]), 1), 6))
            for operation in gemmi.SpaceGroup("P m c n").operations()
        }
        found = {
            tuple(np.round(np.mod(point, 1), 6))
            for point, site in zip(structure.fractional, structure.sites, strict=True)
            if site.label == "O2"
        }
        assert found == expected


def test_declared_symmetry_is_cleaned(tmp_path: Path) -> None:
    structure = read_text(tmp_path, cif(("O O 0.1 0.2 0.3",), MONOCLINIC, symbol="P2(1)/n"))
    assert (structure.declared.number, structure.declared.hermann_mauguin) == (14, "P21/n")
    assert structure.declared.hall == "-P 2yn"


def test_no_symmetry_is_an_error_with_the_mend(tmp_path: Path) -> None:
    for symbol in ("", "?", "X 4 b m"):
        with pytest.raises(NotAStructureError, match="lists no operations") as caught:
            read_text(tmp_path, cif(ROCK_SALT, symbol=symbol))
        assert "--whole-cell" in caught.value.mend
    structure = read_text(tmp_path, cif(ROCK_SALT), whole_cell=True)
    assert len(structure) == 2
    assert codes(structure) == ["whole_cell"]


def test_whole_cell_option_does_not_override_symmetry(tmp_path: Path) -> None:
    structure = read_text(tmp_path, cif(ROCK_SALT, symbol="F m -3 m"), whole_cell=True)
    assert len(structure) == 8
    assert "whole_cell_ignored" in codes(structure)


def test_number_alone(tmp_path: Path) -> None:
    structure = read_text(tmp_path, cif(ROCK_SALT, number="225"))
    assert len(structure) == 8
    assert "from its space-group number" in message(structure, "symmetry_from_symbol")


@pytest.mark.parametrize(("position", "choice"), [("0 0 0", "1"), ("0.125 0.125 0.125", "2")])
@pytest.mark.parametrize("extra", ["", "_chemical_formula_sum C\n_cell_formula_units_Z 8"])
def test_origin_of_diamond_is_found(tmp_path: Path, position: str, choice: str, extra: str) -> None:
    """Eight atoms with four neighbours at 1.545 Å, whichever origin the coordinates refer to, with and without Z."""
    structure = read_text(tmp_path, cif((f"C C {position}",), DIAMOND, symbol="F d -3 m", extra=extra))
    assert counts(structure) == {"C": 8}
    assert distances(structure, 0)[:4] == pytest.approx([BOND] * 4)
    assert f"F d -3 m:{choice}" in message(structure, "symmetry_from_symbol")
    assert "only this choice gives a sensible content" in message(structure, "symmetry_from_symbol")


@pytest.mark.parametrize(("position", "found"), [("0.26 0.26 0.26", "2"), ("0.385 0.385 0.385", "1")])
def test_origin_of_spinel_is_found(tmp_path: Path, position: str, found: str) -> None:
    """MgAl2O4 (a 8.08 Å, from memory): Mg and Al on the places of either origin choice."""
    places = {"1": ("0 0 0", "0.625 0.625 0.625"), "2": ("0.125 0.125 0.125", "0.5 0.5 0.5")}[found]
    atoms = (f"Mg Mg {places[0]}", f"Al Al {places[1]}", f"O O {position}")
    structure = read_text(
        tmp_path,
        cif(atoms, (8.08, 8.08, 8.08, 90, 90, 90), symbol="F d 3 m", extra="_chemical_formula_sum 'Al2 Mg O4'"),
    )
    assert counts(structure) == {"Mg": 8, "Al": 16, "O": 32}
    assert f"F d -3 m:{found}" in message(structure, "symmetry_from_symbol")


def test_undecided_origin_is_said(tmp_path: Path) -> None:
    """One atom on a general position of P n n n looks equally sensible from both origins."""
    structure = read_text(tmp_path, cif(("O O 0.11 0.17 0.23",), (9, 10, 11, 90, 90, 90), symbol="P n n n"))
    assert "nothing tells which" in message(structure, "symmetry_from_symbol")


CALCITE_HEXAGONAL = ("Ca Ca 0 0 0", "C C 0 0 0.25", "O O 0.2568 0 0.25")
CALCITE_RHOMBOHEDRAL = ("Ca Ca 0 0 0", "C C 0.25 0.25 0.25", "O O 0.5068 0.9932 0.25")
HEXAGONAL_CELL = (4.99, 4.99, 17.06, 90, 90, 120)
RHOMBOHEDRAL_CELL = (6.375, 6.375, 6.375, 46.08, 46.08, 46.08)


@pytest.mark.parametrize(
    "given", [{"symbol": "R -3 c"}, {"number": "167"}, {"operations": xyz("R -3 c:H")}, {"operations": xyz("R -3 c:R")}]
)
@pytest.mark.parametrize(
    ("atoms", "cell", "formulas"),
    [(CALCITE_HEXAGONAL, HEXAGONAL_CELL, 6), (CALCITE_RHOMBOHEDRAL, RHOMBOHEDRAL_CELL, 2)],
)
def test_rhombohedral_axes_are_recognised_by_the_cell(
    tmp_path: Path, atoms: tuple[str, ...], cell: tuple[float, ...], formulas: int, given: dict[str, str]
) -> None:
    """Calcite: carbon has three oxygens at 1.28 Å, in either axes, even where the operations are for the other ones."""
    structure = read_text(tmp_path, cif(atoms, cell, **given))  # type: ignore[arg-type]
    assert counts(structure) == {"Ca": formulas, "C": formulas, "O": 3 * formulas}
    carbon = next(index for index, site in enumerate(structure.sites) if site.label == "C")
    assert distances(structure, carbon)[:3] == pytest.approx([1.28] * 3, abs=0.01)
    assert structure.declared.number == 167
    clash = "operations" in given and len(given["operations"]) != (36 if formulas == 6 else 12)
    assert ("symmetry_clash" in codes(structure)) == clash


def test_unique_axis_is_recognised_by_the_cell(tmp_path: Path) -> None:
    """P 21/c with the oblique angle between a and b: unique axis c is meant."""
    structure = read_text(tmp_path, cif(("O O 0.1 0.2 0.3",), (7, 8, 9, 90, 90, 105), symbol="P 21/c"))
    assert len(structure) == 4
    assert "another setting of the same group" in message(structure, "symmetry_clash")


def test_incomplete_list_is_completed_and_said(tmp_path: Path) -> None:
    structure = read_text(tmp_path, cif(("O O 0.1 0.2 0.3",), operations=xyz("P 21 21 21")[:3]))
    assert len(structure) == 4
    assert message(structure, "symmetry_not_closed") == (
        "The file lists 3 operations, which form no group; completed they are 4, and these were used."
    )
    assert structure.declared.number == 19


def test_misprinted_operation_gives_way_to_the_symbol(tmp_path: Path) -> None:
    """P 21/n with a sign lost: the list is no group, and a twofold axis along a does not fit the oblique cell."""
    wrong = ("x,y,z", "x,-y,-z", "-x+1/2,y+1/2,-z+1/2", "x+1/2,-y+1/2,z+1/2")
    atoms = ("O O 0.1 0.2 0.3", "C C 0.2 0.2 0.35")
    structure = read_text(tmp_path, cif(atoms, MONOCLINIC, symbol="P 1 21/n 1", operations=wrong))
    right = read_text(tmp_path, cif(atoms, MONOCLINIC, symbol="P 1 21/n 1"))
    assert structure.fractional == pytest.approx(right.fractional)
    assert "P 1 21/n 1 (number 14), which the file names, was used instead" in message(structure, "symmetry_not_closed")


def test_operations_that_make_no_group_give_way_to_the_symbol(tmp_path: Path) -> None:
    structure = read_text(tmp_path, cif(("O O 0.1 0.2 0.3",), symbol="P -1", operations=("x,y,z", "x+y,y,z")))
    assert len(structure) == 2
    assert "symmetry_not_closed" in codes(structure)


def test_identity_alone_gives_way_to_the_symbol(tmp_path: Path) -> None:
    """A list with x,y,z only beside P 21/c: the asymmetric unit is expanded, and a whole cell comes out the same."""
    one = read_text(tmp_path, cif(("O O 0.1 0.2 0.3",), MONOCLINIC, symbol="P 21/c", operations=("x,y,z",)))
    images = [gemmi.Op(text).apply_to_xyz([0.1, 0.2, 0.3]) for text in xyz("P 1 21/c 1")]
    atoms = [f"O{i} O {x:.4f} {y:.4f} {z:.4f}" for i, (x, y, z) in enumerate(images)]
    four = read_text(tmp_path, cif(atoms, MONOCLINIC, symbol="P 21/c", operations=("x,y,z",)))
    assert len(one) == len(four) == 4
    assert "symmetry_clash" in codes(one)


def test_clash_of_operations_and_symbol_is_said(tmp_path: Path) -> None:
    """Nickel arsenide with the operations of P63mc under P63/mmc: the operations come first."""
    atoms = ("Mn Mn 0 0 0", "Te Te 0.3333 0.6667 0.25")
    cell = (4.143, 4.143, 6.703, 90, 90, 120)
    structure = read_text(tmp_path, cif(atoms, cell, symbol="P 63/m m c", operations=xyz("P 63 m c")))
    assert counts(structure) == {"Mn": 2, "Te": 2}
    assert message(structure, "symmetry_clash") == (
        "The operations in the file are those of P 63 m c (number 186), its Hermann-Mauguin symbol 'P 63/m m c' means "
        "P 63/m m c (number 194); the operations were used."
    )
    assert structure.declared.number == 186


def test_clash_among_the_names_is_said(tmp_path: Path) -> None:
    text = cif(("O O 0.1 0.2 0.3",), MONOCLINIC, hall="-P 2yn", symbol="P 1 21/m 1", operations=xyz("P 1 21/n 1"))
    assert "P 1 21/m 1 (number 11)" in message(read_text(tmp_path, text), "symmetry_clash")


def test_shifted_origin_is_used_as_it_stands(tmp_path: Path) -> None:
    """P -1 with the inversion at a quarter matches no table; its two atoms are where it says."""
    text = cif(("O O 0.1 0.2 0.3",), symbol="P -1", operations=("x,y,z", "1/2-x,1/2-y,1/2-z"))
    structure = read_text(tmp_path, text)
    assert structure.fractional[1] == pytest.approx([0.4, 0.3, 0.2])
    assert codes(structure) == ["setting_unlisted"]
    assert structure.declared.number == 2


def test_cell_that_does_not_fit_its_group_is_said(tmp_path: Path) -> None:
    structure = read_text(tmp_path, cif(ROCK_SALT, (5.64, 5.64, 6.9, 90, 90, 90), symbol="F m -3 m"))
    assert "cell_clash" in codes(structure)
    nearly = read_text(tmp_path, cif(ROCK_SALT, (5.64, 5.641, 5.638, 90, 90.02, 90), symbol="F m -3 m"))
    assert "cell_clash" not in codes(nearly)


def test_hall_symbol_comes_before_the_hermann_mauguin_symbol(tmp_path: Path) -> None:
    """The Hall symbol tells the origin that F d -3 m leaves open."""
    text = cif(("C C 0.125 0.125 0.125",), DIAMOND, symbol="F d -3 m", hall="-F 4vw 2vw 3")
    assert counts(read_text(tmp_path, text)) == {"C": 8}
