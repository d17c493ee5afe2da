"""POSCAR and CONTCAR: both generations, all kinds of scale and coordinates, names of elements, faults."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from reading_files.texts import codes, counts, message, read_text

from sitesym.errors import NotAStructureError, ReadError, UsageError

HEAD = "rutile\n1.0\n 4.594 0 0\n 0 4.594 0\n 0 0 2.959\n"
TITANIUM = [[0, 0, 0], [0.5, 0.5, 0.5]]
OXYGEN = [[0.305, 0.305, 0], [0.695, 0.695, 0], [0.195, 0.805, 0.5], [0.805, 0.195, 0.5]]
ROWS = TITANIUM + OXYGEN
ATOMS = "".join(f"{x} {y} {z}\n" for x, y, z in ROWS)
EDGES = np.diag([4.594, 4.594, 2.959])


def test_fifth_generation(tmp_path: Path) -> None:
    structure = read_text(tmp_path, HEAD + "Ti O\n2 4\nDirect\n" + ATOMS, "CONTCAR")
    assert (counts(structure), structure.format, structure.name) == ({"Ti": 2, "O": 4}, "POSCAR", "rutile")
    assert structure.fractional == pytest.approx(np.array(ROWS))
    assert structure.lattice == pytest.approx(EDGES)
    assert [site.label for site in structure.sites] == ["Ti1", "Ti2", "O1", "O2", "O3", "O4"]
    assert codes(structure) == []


def test_fourth_generation_calls_the_elements_by_order(tmp_path: Path) -> None:
    structure = read_text(tmp_path, HEAD + "2 4\nDirect\n" + ATOMS, "structure")
    assert structure.elements == ("A", "A", "B", "B", "B", "B")
    assert "its 2 kinds of atoms are called A, B" in message(structure, "elements_unnamed")


def test_fourth_generation_with_elements_given(tmp_path: Path) -> None:
    structure = read_text(tmp_path, HEAD + "2 4\nDirect\n" + ATOMS, "POSCAR", elements=("Ti", "O"))
    assert counts(structure) == {"Ti": 2, "O": 4}
    assert codes(structure) == []


@pytest.mark.parametrize(
    ("elements", "words"),
    [(("Ti",), "1 element for 2 kinds"), (("Ti", "Xy"), "Xy is no chemical symbol"), (("Ti", "O", "H"), "3 elements")],
)
def test_elements_that_do_not_fit(tmp_path: Path, elements: tuple[str, ...], words: str) -> None:
    with pytest.raises(UsageError, match=words):
        read_text(tmp_path, HEAD + "2 4\nDirect\n" + ATOMS, "POSCAR", elements=elements)


def test_elements_against_those_of_the_file(tmp_path: Path) -> None:
    text = HEAD + "Ti O\n2 4\nDirect\n" + ATOMS
    with pytest.raises(UsageError, match="names its elements Ti, O, not Sn, O"):
        read_text(tmp_path, text, "POSCAR", elements=("Sn", "O"))
    assert counts(read_text(tmp_path, text, "POSCAR", elements=["Ti", "O"])) == {"Ti": 2, "O": 4}


def test_elements_from_comments_behind_the_atoms(tmp_path: Path) -> None:
    names = ["# Ti1", "# Ti2", "# O1", "# O2", "# O3", "# O4"]
    rows = "".join(f"{x} {y} {z} {name}\n" for (x, y, z), name in zip(ROWS, names, strict=True))
    structure = read_text(tmp_path, HEAD + "2 4\nDirect\n" + rows)
    assert counts(structure) == {"Ti": 2, "O": 4}
    assert "Ti, O were taken from the comments" in message(structure, "elements_from_comment")


@pytest.mark.parametrize(
    "names", [["# 11", "# 12"], ["# Ti", "# O"], ["# Ti1", "#"], ["site a", "site b"], ["# Qq1", "# Qq2"]]
)
def test_comments_that_name_no_elements(tmp_path: Path, names: list[str]) -> None:
    """Wyckoff letters, numbers, or names that change within one run of atoms are not taken for elements."""
    rows = "".join(f"{x} {y} {z} {name}\n" for (x, y, z), name in zip(TITANIUM, names, strict=True))
    assert "elements_unnamed" in codes(read_text(tmp_path, HEAD + "2\nDirect\n" + rows))


def test_elements_from_the_first_line(tmp_path: Path) -> None:
    """Common practice with files of the fourth generation; a symbol twice would be no safe name."""
    text = HEAD + "2 4\nDirect\n" + ATOMS
    assert counts(read_text(tmp_path, text.replace("rutile", "Ti O"))) == {"Ti": 2, "O": 4}
    assert "elements_unnamed" in codes(read_text(tmp_path, text.replace("rutile", "H H")))


def test_many_unnamed_kinds(tmp_path: Path) -> None:
    rows = "".join(f"{i / 30:.4f} 0.1 0.2\n" for i in range(28))
    structure = read_text(tmp_path, "t\n1\n60 0 0\n0 9 0\n0 0 9\n" + "1 " * 28 + "\nDirect\n" + rows)
    assert structure.elements[24:28] == ("Y", "Z", "AA", "AB")


def test_potentials_behind_the_names_and_repeated_elements(tmp_path: Path) -> None:
    text = HEAD + "Ti_pv O/1a2b3c4d Ti.x\n1 4 1\nDirect\n" + ATOMS
    assert counts(read_text(tmp_path, text)) == {"Ti": 2, "O": 4}


def test_selective_dynamics_and_velocities(tmp_path: Path) -> None:
    rows = "".join(f"{x} {y} {z} T F T\n" for x, y, z in ROWS)
    text = HEAD + "Ti O\n2 4\nSelective dynamics\nDirect\n" + rows + "\n" + "0.1 0.2 0.3\n" * 6
    assert read_text(tmp_path, text).fractional == pytest.approx(np.array(ROWS))


@pytest.mark.parametrize("word", ["Cartesian", "cart", "K"])
def test_cartesian_coordinates(tmp_path: Path, word: str) -> None:
    rows = "".join("{} {} {}\n".format(*row) for row in np.array(ROWS) @ EDGES)
    assert read_text(tmp_path, HEAD + f"Ti O\n2 4\n{word}\n" + rows).fractional == pytest.approx(np.array(ROWS))


SCALES = [
    ("2.0", 2 * EDGES),
    ("-62.449", EDGES),
    ("1.0 2.0 3.0", EDGES * [1.0, 2.0, 3.0]),
    ("1.0d0", EDGES),
    ("2.0 ! scale", 2 * EDGES),
]


@pytest.mark.parametrize(("scale", "lattice"), SCALES)
@pytest.mark.parametrize("mode", ["Direct", "Cartesian"])
def test_scale_factors(tmp_path: Path, scale: str, lattice: np.ndarray, mode: str) -> None:
    """One factor, a negative one that stands for the volume, three for x, y, z; Cartesian coordinates scale along."""
    rows = np.array(ROWS) @ EDGES if mode == "Cartesian" else np.array(ROWS)
    text = HEAD.replace("\n1.0\n", f"\n{scale}\n") + f"Ti O\n2 4\n{mode}\n"
    structure = read_text(tmp_path, text + "".join("{} {} {}\n".format(*row) for row in rows))
    assert structure.lattice == pytest.approx(lattice, abs=1e-4)
    assert structure.fractional == pytest.approx(np.array(ROWS))


@pytest.mark.parametrize("scale", ["1.5", "-70", "1.1 1.2 1.3"])
@pytest.mark.parametrize("mode", ["Direct", "Cartesian"])
def test_against_a_general_library(tmp_path: Path, scale: str, mode: str) -> None:
    """A skewed cell with selective dynamics comes out as in ASE."""
    from ase.io import read as read_with_ase

    rng = np.random.default_rng(7)
    rows = "".join("{:.6f} {:.6f} {:.6f} T T F\n".format(*row) for row in 4 * rng.random((5, 3)))
    text = f"t\n{scale}\n4 0.3 0\n-1.5 5 0.2\n0.4 0.1 6\nSi O\n2 3\nSelective dynamics\n{mode}\n{rows}"
    structure = read_text(tmp_path, text, "POSCAR")
    theirs = read_with_ase(tmp_path / "POSCAR", format="vasp")
    assert structure.lattice == pytest.approx(theirs.cell[:])
    assert structure.fractional @ structure.lattice == pytest.approx(theirs.positions)
    assert list(structure.elements) == theirs.get_chemical_symbols()


def test_left_handed_cell_is_kept(tmp_path: Path) -> None:
    text = "t\n1\n0 4.6 0\n4.6 0 0\n0 0 2.96\nTi\n2\nDirect\n0 0 0\n.5 .5 .5\n"
    structure = read_text(tmp_path, text)
    assert np.linalg.det(structure.lattice) < 0
    assert "left_handed" in codes(structure)


def test_sequence_of_structures_is_said(tmp_path: Path) -> None:
    step = "Direct configuration=     1\n" + ATOMS
    assert "several_frames" in codes(read_text(tmp_path, HEAD + "Ti O\n2 4\n" + step + step.replace("1\n", "2\n", 1)))


def test_atom_listed_twice_counts_once(tmp_path: Path) -> None:
    """0 and 1 are the same place; a beginner's fault."""
    structure = read_text(tmp_path, HEAD + "Ti O\n3 4\nDirect\n1 0 0\n" + ATOMS)
    assert counts(structure) == {"Ti": 2, "O": 4}
    assert message(structure, "duplicates_merged").startswith("1 of the 7 listed atoms repeats")


def test_unlike_atoms_on_one_point(tmp_path: Path) -> None:
    with pytest.raises(NotAStructureError, match="lie on one point"):
        read_text(tmp_path, HEAD + "Ti O\n1 1\nDirect\n0 0 0\n1 1 0\n")


@pytest.mark.parametrize(
    ("text", "error", "words"),
    [
        (HEAD + "Ti O\n2 4\nDirect\n" + ATOMS[:60], ReadError, "announces 6 atoms and lists"),
        (HEAD + "Ti O\n2 4\nDirect\n" + ATOMS.replace("0.305", "abc", 1), ReadError, r"line 11 \(abc"),
        (HEAD + "Ti O\n2 4\nDirect\n" + ATOMS.replace("0.305", "nan", 1), ReadError, "is no coordinate"),
        (HEAD + "Ti O\n2 4\nDirect\n" + ATOMS.replace("0.305", "inf", 1), ReadError, "is no coordinate"),
        (HEAD + "Ti O\n2 4\nDirect\n" + ATOMS.replace("0.305", "1e30", 1), NotAStructureError, "exceeds"),
        (HEAD + "Ti O\n2\nDirect\n" + ATOMS, ReadError, "2 names for 1 count"),
        (HEAD + "Ti Qq\n2 4\nDirect\n" + ATOMS, ReadError, "Qq is no element"),
        (HEAD + "Ti O\n2 4\n" + ATOMS, ReadError, "neither Direct nor Cartesian"),
        (HEAD.replace("1.0", "0") + "Ti O\n2 4\nDirect\n" + ATOMS, ReadError, "no scale factor"),
        (HEAD.replace("1.0", "1 -1 1") + "Ti O\n2 4\nDirect\n" + ATOMS, ReadError, "none may be negative"),
        (HEAD.replace("0 0 2.959", "0 4.594 0") + "Ti O\n2 4\nDirect\n" + ATOMS, NotAStructureError, "no volume"),
        (HEAD.replace("0 0 2.959", "0 nan 0") + "Ti O\n2 4\nDirect\n" + ATOMS, ReadError, "no lattice vector"),
        (HEAD + "Ti O\n2 400000000\nDirect\n" + ATOMS, ReadError, "400,000,002 atoms"),
        (HEAD.replace("4.594", "0.04594") + "Ti O\n2 4\nDirect\n" + ATOMS, NotAStructureError, "less than any atom"),
    ],
)
def test_faults_are_named_with_their_line(tmp_path: Path, text: str, error: type[Exception], words: str) -> None:
    with pytest.raises(error, match=words):
        read_text(tmp_path, text, "POSCAR")


def test_block_does_not_apply(tmp_path: Path) -> None:
    with pytest.raises(UsageError, match="does not apply to a POSCAR"):
        read_text(tmp_path, HEAD + "Ti O\n2 4\nDirect\n" + ATOMS, "POSCAR", block="1")
