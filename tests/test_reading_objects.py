"""Objects of other programs, every format that ASE reads, free molecules, and the recognition of formats."""

from __future__ import annotations

import bz2
import gzip
import io
import lzma
import sys
from pathlib import Path

import numpy as np
import pytest
from reading_files.texts import ROCK_SALT, cif, codes, counts, message, read_text

from sitesym.errors import NotAStructureError, ReadError, UsageError
from sitesym.reading import Molecule, read, read_molecule
from sitesym.structure import Occupant

ase_build = pytest.importorskip("ase.build")
POSCAR = "rock salt\n5.64\n0 .5 .5\n.5 0 .5\n.5 .5 0\nNa Cl\n1 1\nDirect\n0 0 0\n.5 .5 .5\n"
WATER = "3\nwater\nO 0 0 0.119\nH 0 0.763 -0.477\nD 0 -0.763 -0.477\n"


def test_ase_atoms() -> None:
    structure = read(ase_build.bulk("NaCl", "rocksalt", a=5.64, cubic=True))
    assert counts(structure) == {"Na": 4, "Cl": 4}
    assert (structure.format, structure.source) == ("ase.Atoms", "ase.Atoms")


def test_heavier_isotopes_in_ase_atoms() -> None:
    atoms = ase_build.bulk("H", "sc", a=3.0).repeat((3, 1, 1))
    atoms.set_masses([1.008, 2.014, 3.016])
    assert read(atoms).elements == ("H", "D", "T")


def test_ase_atoms_without_repetition_are_no_crystal() -> None:
    molecule = ase_build.molecule("H2O")
    with pytest.raises(NotAStructureError, match="molecule without a unit cell"):
        read(molecule)
    molecule.center(vacuum=4)
    with pytest.raises(NotAStructureError, match="molecule without a unit cell"):
        read(molecule)


def test_ase_layers() -> None:
    """A slab with a whole cell is a crystal of layers, and says so; without a third vector it cannot be read."""
    slab = ase_build.mx2("MoS2", vacuum=8)
    assert "not_periodic_everywhere" in codes(read(slab))
    slab.cell[2] = 0
    with pytest.raises(NotAStructureError, match="2 lattice vectors only"):
        read(slab)


def test_ase_atoms_that_are_not_finite() -> None:
    atoms = ase_build.bulk("Cu")
    atoms.positions[0, 0] = np.nan
    with pytest.raises(NotAStructureError, match="no finite number"):
        read(atoms)


def test_pymatgen_structure() -> None:
    core = pytest.importorskip("pymatgen.core")
    cell = core.Structure.from_spacegroup(
        "Fm-3m", core.Lattice.cubic(5.64), ["Na+", "Cl-"], [[0, 0, 0], [0.5, 0.5, 0.5]]
    )
    structure = read(cell)
    assert counts(structure) == {"Na": 4, "Cl": 4}
    assert structure.lattice == pytest.approx(5.64 * np.eye(3))


def test_pymatgen_partial_occupancy_deuterium_and_dummies() -> None:
    core = pytest.importorskip("pymatgen.core")
    species = [{"Ca2+": 0.75, "Mg2+": 0.25}, {"D": 0.5}, {"X": 1.0}]
    cell = core.Structure(core.Lattice.cubic(4), species, [[0, 0, 0], [0.5, 0.5, 0.5], [0.5, 0, 0]])
    structure = read(cell)
    assert [site.occupants for site in structure.sites] == [
        (Occupant("Ca", 0.75), Occupant("Mg", 0.25)),
        (Occupant("D", 0.5),),
    ]
    assert {"dummy_atoms", "deuterium", "mixed_occupancy", "partial_occupancy"} == set(codes(structure))


def test_pymatgen_molecule_is_no_crystal() -> None:
    core = pytest.importorskip("pymatgen.core")
    with pytest.raises(NotAStructureError, match="no unit cell"):
        read(core.Molecule(["H", "H"], [[0, 0, 0], [0, 0, 0.74]]))


@pytest.mark.parametrize("thing", [42, None, ["a"], b"data_"])
def test_other_objects(thing: object) -> None:
    with pytest.raises(UsageError, match="cannot be read from an object of the type"):
        read(thing)


def test_arguments_that_mean_nothing_are_refused(tmp_path: Path) -> None:
    with pytest.raises(UsageError, match="'block' does not apply"):
        read(ase_build.bulk("Cu"), block="1")
    with pytest.raises(UsageError, match="'elements' does not apply"):
        read_text(tmp_path, cif(ROCK_SALT, symbol="P 1"), elements=("Na", "Cl"))


@pytest.mark.parametrize("name", ["structure.txt", "structure", "POSCAR", "a b – é (1).cif", "x.xyz"])
def test_cif_is_known_by_its_content(tmp_path: Path, name: str) -> None:
    structure = read_text(tmp_path, cif(ROCK_SALT, symbol="F m -3 m"), name)
    assert (len(structure), structure.format) == (8, "CIF")
    assert structure.source == str(tmp_path / name)


@pytest.mark.parametrize("name", ["cubic__POSCAR-195", "x.cif", "x.txt", "CONTCAR", "x.vasp", "x.xyz"])
def test_poscar_is_known_by_its_content(tmp_path: Path, name: str) -> None:
    assert read_text(tmp_path, POSCAR, name).format == "POSCAR"


def test_format_can_be_named(tmp_path: Path) -> None:
    assert read_text(tmp_path, POSCAR, "x", format="VASP").format == "POSCAR"
    with pytest.raises(ReadError, match="no CIF"):
        read_text(tmp_path, POSCAR, "x", format="cif")
    with pytest.raises(UsageError, match="'nonsense' is no format"):
        read_text(tmp_path, POSCAR, "x", format="nonsense")


@pytest.mark.parametrize("stream", [io.StringIO(POSCAR), io.BytesIO(POSCAR.encode())])
def test_standard_input(stream: io.IOBase) -> None:
    structure = read("-", standard_input=stream)  # type: ignore[arg-type]
    assert (len(structure), structure.source) == (2, "standard input")


def test_standard_input_of_the_process(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(cif(ROCK_SALT, symbol="F m -3 m").encode())))
    assert len(read("-")) == 8


@pytest.mark.parametrize("pack", [gzip.compress, bz2.compress, lzma.compress])
def test_compressed_files(tmp_path: Path, pack: object) -> None:
    assert len(read_text(tmp_path, pack(cif(ROCK_SALT, symbol="P 1").encode()), "x.cif.gz")) == 2  # type: ignore[operator]
    with pytest.raises(ReadError, match="damaged"):
        read_text(tmp_path, pack(cif(ROCK_SALT, symbol="P 1").encode())[:40], "x.cif.gz")  # type: ignore[operator]


@pytest.mark.filterwarnings("ignore::FutureWarning")
@pytest.mark.parametrize("name", ["x.xsf", "x.json", "x.traj", "x.cfg", "geometry.in", "x.gen", "x.res", "x.extxyz"])
def test_formats_that_ase_writes(tmp_path: Path, name: str) -> None:
    """A skewed cell comes back from eight formats, text and binary, with its atoms in place."""
    from ase import Atoms
    from ase.io import write

    cell = [[4, 0, 0], [-1.5, 5, 0], [0.4, 0.1, 6]]
    atoms = Atoms("SiO2", cell=cell, scaled_positions=[[0.1, 0.2, 0.3], [0.5, 0.5, 0.6], [0.8, 0.1, 0.9]], pbc=True)
    write(tmp_path / name, atoms)
    structure = read(tmp_path / name)
    expected = atoms.get_all_distances(mic=True)
    difference = structure.fractional[:, None] - structure.fractional[None]
    found = np.linalg.norm((difference - np.round(difference)) @ structure.lattice, axis=2)
    assert sorted(structure.elements) == ["O", "O", "Si"]
    assert np.sort(found.ravel()) == pytest.approx(np.sort(expected.ravel()), abs=1e-3)


def test_last_step_of_a_calculation_is_taken_and_said(tmp_path: Path) -> None:
    from ase.io import write

    steps = [ase_build.bulk("Cu", a=a) for a in (3.5, 3.6, 3.7)]
    write(tmp_path / "relax.traj", steps)
    structure = read(tmp_path / "relax.traj")
    assert structure.volume == pytest.approx(3.7**3 / 4)
    assert "holds 3 structures" in message(structure, "several_frames")
    assert read(tmp_path / "relax.traj", block="1").volume == pytest.approx(3.5**3 / 4)
    with pytest.raises(UsageError, match="no structure '4'"):
        read(tmp_path / "relax.traj", block=4)


RES = "TITL test\nCELL 0.71073 5 6 7 90 100 90\nLATT {}\n{}SFAC O\nUNIT 4\nO 1 0.1 0.2 0.3 11.0\nEND\n"
PDB = "CRYST1   10.000   11.000   12.000  90.00  90.00  90.00 {:<11}   4\n"
PDB += "ATOM      1  O   HOH A   1       1.000   2.000   3.000  1.00  0.00           O\nEND\n"


@pytest.mark.parametrize(
    ("name", "text", "whole"),
    [
        ("x.res", RES.format("-1", ""), True),
        ("x.res", RES.format("1", "SYMM -x, 0.5+y, 0.5-z\n"), False),
        ("x.res", RES.format("1", ""), False),
        ("x.pdb", PDB.format("P 1"), True),
        ("x.pdb", PDB.format("P 21 21 21"), False),
    ],
)
def test_asymmetric_units_are_not_taken_for_the_cell(tmp_path: Path, name: str, text: str, whole: bool) -> None:
    """ASE reads these files without applying their symmetry, so they are refused unless somebody vouches."""
    if whole:
        assert len(read_text(tmp_path, text, name)) == 1
        return
    with pytest.raises(NotAStructureError, match="asymmetric unit only"):
        read_text(tmp_path, text, name)
    assert len(read_text(tmp_path, text, name, whole_cell=True)) == 1


def test_xyz_without_a_cell_is_a_molecule(tmp_path: Path) -> None:
    with pytest.raises(NotAStructureError, match="is a molecule without a unit cell"):
        read_text(tmp_path, WATER, "water.xyz")


def test_molecule_from_xyz(tmp_path: Path) -> None:
    """Symbols in any case, atomic numbers and deuterium."""
    (tmp_path / "water.xyz").write_text(WATER.replace("O 0", "8 0").replace("H 0", "h 0"))
    molecule = read_molecule(tmp_path / "water.xyz")
    assert (molecule.elements, molecule.name) == (("O", "H", "D"), "water")
    assert molecule.positions[1] == pytest.approx([0, 0.763, -0.477])
    assert isinstance(read_molecule("-", standard_input=io.StringIO(WATER)), Molecule)


@pytest.mark.parametrize("name", ["m.json", "coord", "m.xsf", "m.gen", "m.com", "m.pdb"])
def test_molecule_from_formats_that_ase_reads(tmp_path: Path, name: str) -> None:
    from ase.io import write

    atoms = ase_build.molecule("CH3OH")
    write(tmp_path / name, atoms)
    molecule = read_molecule(tmp_path / name)
    assert list(molecule.elements) == atoms.get_chemical_symbols()
    found = np.linalg.norm(molecule.positions[:, None] - molecule.positions[None], axis=2)
    assert found == pytest.approx(atoms.get_all_distances(), abs=2e-3)


def test_molecule_from_ase_atoms() -> None:
    assert read_molecule(ase_build.molecule("CO2")).elements == ("C", "O", "O")
    with pytest.raises(NotAStructureError, match="describes a crystal"):
        read_molecule(ase_build.bulk("Cu"))
    with pytest.raises(UsageError, match="cannot be read from int"):
        read_molecule(3)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("3\nwater\nO 0 0 0\nH 0 0 1\n", "announces 3 atoms and lists 2"),
        ("2\nx\nO 0 0 0\nQq 0 0 1\n", "line 4 .Qq 0 0 1. is no atom"),
        ("2\nx\nO 0 0 0\nH 0 nan 1\n", "is no atom"),
        ("0\nx\nO 0 0 0\n", "no atoms"),
    ],
)
def test_faulty_xyz(tmp_path: Path, text: str, words: str) -> None:
    (tmp_path / "m.xyz").write_text(text)
    with pytest.raises(ReadError, match=words):
        read_molecule(tmp_path / "m.xyz")


def test_molecules_are_checked() -> None:
    with pytest.raises(NotAStructureError, match="'Qq' is no chemical symbol"):
        Molecule(("Qq",), np.zeros((1, 3)))
    with pytest.raises(NotAStructureError, match="finite"):
        Molecule(("H",), np.full((1, 3), np.nan))
    with pytest.raises(ValueError, match="read-only"):
        Molecule(("H",), np.zeros((1, 3))).positions[0, 0] = 1.0
