"""What a newcomer does wrong is answered in words that can be followed: the file's name, no words of programmers.

Exit codes and wording are the project's own habits (two plain lines; 2 for the command line, 3 for files); facts beside
the single checks.
"""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
from reading_files.texts import ROCK_SALT, cif, codes, counts, message, read_text

from sitesym import cli
from sitesym.bonding import BondRules
from sitesym.bonding.search import find_bonds
from sitesym.errors import NotAStructureError, ReadError, SitesymError, UsageError
from sitesym.reading import read, read_molecule
from sitesym.reading.skeleton import open_carbons
from sitesym.structure import Occupant, Site, Structure

DEMO = Path(__file__).parent.parent / "structures_demo"
CALCITE = str(DEMO / "calcite.cif")
CORPUS = Path(__file__).resolve().parents[2] / "shared" / "corpus" / "cif"
WATER = "3\nwater\nO 0 0 0\nH 0.96 0 0\nH -0.24 0.93 0\n"
BOX = 'Lattice="5 0 0 0 5 0 0 0 5"'


def refused(capsys: pytest.CaptureFixture[str], code: int, *arguments: str) -> str:
    """The two lines that the command prints when it ends with this exit code."""
    assert cli.main(["report", *arguments]) == code
    out, err = capsys.readouterr()
    assert out == ""
    assert len(err.splitlines()) == 2
    assert "`" not in err
    return err


@pytest.mark.parametrize(
    ("name", "content", "words"),
    [
        ("noise", b"\x8f\x00\x01" * 500, "is not recognised"),
        ("passwd", b"root:x:0:0:root:/root:/bin/sh\n", "is not recognised"),
        ("far.xyz", b"2\nw\nO 0 0 0\nH 1e300 0 0\n", "atom 2 (H) exceeds 100,000"),
        ("same.xyz", b"2\nw\nO 0 0 0\nO 0 0 0\n", "Atoms 1 (O) and 2 (O)"),
        ("zero.xyz", b"0\nw\n", "has no atoms"),
        ("a.xyz", f"1\n{BOX}\nO 0 x 0\n".encode(), "'x' stands where a number belongs"),
        ("b.xyz", f"many\n{BOX}\nO 0 0 0\n".encode(), "'many"),
        ("c.xyz", f"1\n{BOX} name=\xe9\nO 0 0 0\n".encode("latin-1"), "no plain text"),
        ("lost.cif", cif(ROCK_SALT, ("", 5, 5, 90, 90, 90), symbol="P 1").encode(), "does not give _cell_length_a"),
        ("lost.cif", cif(ROCK_SALT).encode(), "says nothing of its symmetry"),
        ("flat.vasp", b"x\n1\n1 0 0\n2 0 0\n0 0 1\nNa\n1\nDirect\n0 0 0\n", "have no volume"),
    ],
)
def test_a_faulty_file_is_named_in_plain_words(
    name: str, content: bytes, words: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / name).write_bytes(content)
    told = refused(capsys, 3, str(tmp_path / name))
    assert words in told
    assert told.count(name) == 1
    for foreign in ("--format", "codec", "literal", "whole_cell", "ase.io", "float", "object"):
        assert foreign not in told


@pytest.mark.parametrize("crystal_first", [True, False])
def test_a_crystal_beside_a_molecule(crystal_first: bool, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "water.xyz").write_text(WATER)
    files = [CALCITE, str(tmp_path / "water.xyz")]
    told = refused(capsys, 2, *(files if crystal_first else files[::-1]))
    assert f"{CALCITE} is a crystal" in told
    with pytest.raises(NotAStructureError, match="describes a crystal"):
        read_molecule(CALCITE)


@pytest.mark.parametrize(
    ("options", "code", "words"),
    [
        (["--output", "{folder}"], 2, "is a folder"),
        (["--output", ""], 2, "name for --output is empty"),
        (["--wavenumbers", "{folder}"], 3, "Name a file of wavenumbers"),
        (["--wavenumbers", ""], 2, "name for --wavenumbers is empty"),
        (["--bond", "C-O", "--no-bond", "O-C"], 2, "--bond and --no-bond both name O-C"),
        (["--setting", "R-3c", "--axes", "input"], 2, "contradict"),
        (["--elements", "Ca"], 2, "'elements' does not apply"),
        (["--bond", "C-C"], 2, "near enough"),
        (["--unit", "CO4"], 2, "labels of the atoms"),
    ],
)
def test_options_that_cannot_be_followed(
    options: list[str], code: int, words: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    told = refused(capsys, code, CALCITE, *(option.format(folder=tmp_path) for option in options))
    assert words in told
    assert "--force" not in told
    assert "cut-off" not in told


def test_an_empty_file_name(capsys: pytest.CaptureFixture[str]) -> None:
    assert "name of the file is empty" in refused(capsys, 3, "")


def test_a_closed_standard_output_is_like_a_pipe_whose_reader_left() -> None:
    for file, code in ((CALCITE, 0), ("absent.cif", 3)):
        command = f"'{sys.executable}' -m sitesym report '{file}' >&-"
        done = subprocess.run(["sh", "-c", command], capture_output=True, check=False, timeout=120)
        assert done.returncode == code
        assert b"Internal" not in done.stderr


@pytest.mark.parametrize("end", [b"\r", b"\r\n"])
def test_line_ends_of_other_systems(end: bytes, tmp_path: Path) -> None:
    """Old Macintosh files end lines by CR alone, others by CR LF (common practice)."""
    text = Path(CALCITE).read_bytes()
    other = read_text(tmp_path, end.join(text.splitlines()) + end)
    assert np.array_equal(other.fractional, read(CALCITE).fractional)


@pytest.mark.parametrize(("formula", "asked"), [("", False), ("Na Cl", True), ("Na Xx", True), ("Na", False)])
def test_a_site_of_no_element(formula: str, asked: bool, tmp_path: Path) -> None:
    """It is named, and the formula is held against what is left."""
    extra = f"_chemical_formula_sum '{formula}'" if formula else ""
    text = cif(("Na Na 0 0 0", "Cl1 Xx 0.5 0.5 0.5"), symbol="F m -3 m", extra=extra)
    structure = read_text(tmp_path, text)
    assert counts(structure) == {"Na": 4}
    told = message(structure, "dummy_atoms")
    assert "Cl1 (Xx)" in told
    assert "every count below lacks" in told
    assert ("composition_mismatch" in codes(structure)) is asked


def test_a_label_of_no_element_is_refused(tmp_path: Path) -> None:
    with pytest.raises(ReadError, match="element of site Zz1 cannot be told"):
        read_text(tmp_path, cif(("Na Na 0 0 0", "Zz1 Zz 0.5 0.5 0.5"), symbol="F m -3 m"))


@pytest.mark.parametrize(
    ("comment", "name"),
    [
        ("$cell vectors", ""),
        ("# from a calculation", ""),
        ("Cell vectors in Å", ""),
        ("generated by a program", ""),
        ("1.0", ""),
        ("CaCO3 calcite", "CaCO3 calcite"),
        ("2H-MoS2", "2H-MoS2"),
        ("NO", "NO"),
    ],
)
def test_comments_that_name_no_compound(comment: str, name: str, tmp_path: Path) -> None:
    text = f"{comment}\n5.64\n0 .5 .5\n.5 0 .5\n.5 .5 0\nNa Cl\n1 1\nDirect\n0 0 0\n.5 .5 .5\n"
    assert read_text(tmp_path, text, "POSCAR").name == name


def pair(one: str, other: str, distance: float, rules: BondRules) -> int:
    """Bonds between two atoms in a wide cell."""
    return len(find_bonds(20 * np.eye(3), [[0, 0, 0], [distance / 20, 0, 0]], [one, other], rules=rules).first)


@pytest.mark.parametrize(
    ("one", "other", "inside", "beyond"), [("O", "H", 1.55, 1.60), ("Ca", "O", 3.2, 3.4), ("Na", "Cl", 3.6, 3.7)]
)
def test_a_bond_that_is_asked_for_wins(one: str, other: str, inside: float, beyond: float) -> None:
    """Radii H 0.31, O 0.66, Na 1.66, Cl 1.02, Ca 1.76 (Cordero and others 2008): 1.35 times the sum, or 0.6 Å more."""
    wanted = BondRules(add=((one, other),))
    assert pair(one, other, inside, BondRules()) == (one == "Ca" or one == "Na")
    assert pair(one, other, inside, wanted) == 1
    with pytest.raises(UsageError, match="near enough"):
        pair(one, other, beyond, wanted)


def ring(elements: str, radius: float, outside: float = 0.0) -> Structure:
    """Six atoms on a circle of this radius (Å) in a wide cell, and six of fluorine farther out if asked for."""
    angles = np.arange(6) * np.pi / 3
    circle = np.stack([np.cos(angles), np.sin(angles), 0 * angles], axis=1)
    points = np.concatenate([radius * circle, (radius + outside) * circle]) if outside else radius * circle
    names = [*elements, *("F" * 6 if outside else "")]
    sites = tuple(Site(f"{name}{i}", (Occupant(name, 1.0),)) for i, name in enumerate(names))
    return Structure(12 * np.eye(3), points / 12, sites)


def test_a_ring_without_hydrogen_is_open_one_with_fluorine_is_not() -> None:
    """C-C 1.39 Å in benzene and hexafluorobenzene, C-F 1.34 Å (from memory)."""
    assert open_carbons(ring("CCCCCC", 1.39)) == 6
    assert open_carbons(ring("CCCCCC", 1.39, outside=1.34)) == 0
    assert open_carbons(ring("CNCNCN", 1.34)) == 0  # three atoms of carbon are too few to judge


@pytest.mark.skipif(not CORPUS.is_dir(), reason="the shared corpus does not lie beside the project")
def test_bare_skeletons_of_the_corpus() -> None:
    """Alarms: 9007872 (its title names C6H7 and C6H16N2, its formula has no H), 7052302, which lists water without
    hydrogen, and four whose formula has H. Graphite, silicon carbide, carbonates, cyanides and the like are quiet.
    """
    alarms = set()
    for path in CORPUS.glob("*.cif"):
        try:
            structure = read(path)
        except SitesymError:
            continue
        if open_carbons(structure):
            alarms.add(path.stem)
            assert codes(structure)[0] == "hydrogen_missing"
    assert alarms == {"1100117", "2000135", "2100852", "7052302", "8000003", "9007872"}
