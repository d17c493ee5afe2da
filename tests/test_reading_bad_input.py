"""Bad input: a plain message of two lines and the right class, never a traceback, a hang or a silent wrong answer."""

from __future__ import annotations

import os
import random
import subprocess
import sys
import time
from pathlib import Path

import pytest
from reading_files.texts import CUBIC, ROCK_SALT, cif, codes, read_text

from sitesym.errors import NotAStructureError, ReadError, SitesymError
from sitesym.reading import read

WHOLE = cif(ROCK_SALT, symbol="F m -3 m", extra="_chemical_formula_sum 'Cl Na'")


@pytest.mark.parametrize(
    ("content", "name", "words"),
    [
        (b"", "x.cif", "is empty"),
        (b" \n\n\t", "x.cif", "is empty"),
        (b"\x00" * 100, "x.cif", "is empty"),
        (b"%PDF-1.4\n%\xe2\xe3\xcf\xd3\n1 0 obj", "x.cif", "is a PDF document"),
        (b"PK\x03\x04\x14\x00\x06\x00", "x.cif", "is a ZIP archive"),
        (b"\x89PNG\r\n\x1a\n\x00\x00", "POSCAR", "is a picture"),
        (b"<!DOCTYPE html>\n<html><body>data_x</body></html>", "1000001.cif", "is a web page"),
        (b"Dear all,\nplease find attached\n", "x.cif", "has no data items"),
        (b"Dear all,\nplease find attached\n", "x.txt", "is not recognised"),
        (b"_cell_length_a 5\n_cell_length_b 5\n", "x.cif", "no line that begins with data_"),
        (b"data_x\n_cell_length_a 5\n", "x.cif", "lists no atoms with coordinates"),
        (b"data_x\nloop_\n_a\n_b\n1 2 3\n", "x.cif", "lacks a value or has one too many"),
        (b"data_x\n_a 'b\n", "x.cif", "a quoted text is not closed"),
        (b"data_x\n_a\n;text\n", "x.cif", "a quoted text is not closed"),
        (b"data_x\n_a b c d\n", "x.cif", "line 2 ._a b c d.: this is no valid CIF"),
        (b"no lattice\nhere\n", "POSCAR", "POSCAR, line 3"),
    ],
)
def test_what_is_no_structure_file(tmp_path: Path, content: bytes, name: str, words: str) -> None:
    with pytest.raises(ReadError, match=words) as caught:
        read_text(tmp_path, content, name)
    assert caught.value.mend
    assert len(str(caught.value).splitlines()) == 2


@pytest.mark.parametrize("seed", range(5))
def test_binary_noise(tmp_path: Path, seed: int) -> None:
    noise = random.Random(seed).randbytes(4000)
    for name in ("x.cif", "x", "x.json"):
        with pytest.raises(ReadError):
            read_text(tmp_path, noise, name)


@pytest.mark.parametrize(
    ("cell", "words"),
    [
        (("", 5.64, 5.64, 90, 90, 90), "does not give _cell_length_a"),
        (("?", 5.64, 5.64, 90, 90, 90), "does not give _cell_length_a"),
        ((0, 5.64, 5.64, 90, 90, 90), "is 0, which is no length"),
        ((-5, 5.64, 5.64, 90, 90, 90), "is -5, which is no length"),
        (("nan", 5.64, 5.64, 90, 90, 90), "is 'nan', which is no number"),
        ((1e300, 5.64, 5.64, 90, 90, 90), "no length"),
        ((5.64, 5.64, 5.64, 30, 40, 90), "angles 30, 40, 90 make no cell"),
        ((5.64, 5.64, 5.64, 90, 180, 90), "make no cell"),
        ((5.64, 5.64, 5.64, 0, 90, 90), "make no cell"),
        ((5.64, 5.64, 5.64, 120, 120, 120), "make no cell"),
        ((5.64, 5.64, 5.64, "inf", 90, 90), "is 'inf', which is no number"),
        ((0.564, 0.564, 0.3, 90, 90, 90), "less than any atom"),
    ],
)
def test_cells_that_are_none(tmp_path: Path, cell: tuple[object, ...], words: str) -> None:
    with pytest.raises(ReadError, match=words):
        read_text(tmp_path, cif(ROCK_SALT, cell, symbol="P 1"))


@pytest.mark.parametrize("value", ["abc", "nan", "inf", "-Infinity", "0,5", "1/0", "1e400"])
def test_coordinates_that_are_no_numbers(tmp_path: Path, value: str) -> None:
    with pytest.raises(ReadError, match=r"_atom_site_fract_x of Cl is .*no number"):
        read_text(tmp_path, cif(("Na Na 0 0 0", f"Cl Cl {value} 0.5 0.5"), symbol="P 1"))


@pytest.mark.parametrize("value", ["1e6", "1e300", "-1e17"])
def test_coordinates_beyond_all_bounds(tmp_path: Path, value: str) -> None:
    with pytest.raises(NotAStructureError, match="exceeds 100,000"):
        read_text(tmp_path, cif(("Na Na 0 0 0", f"Cl Cl {value} 0.5 0.5"), symbol="P 1"))


def test_coordinates_in_angstrom_by_mistake_are_asked_about(tmp_path: Path) -> None:
    structure = read_text(tmp_path, cif(("Na Na 0 0 0", "Cl Cl 12.82 2.82 2.82"), symbol="P 1"))
    assert "the numbers are in Å" in structure.questions[-1].message


@pytest.mark.parametrize("value", ["-0.5", "x", "nan"])
def test_occupancies_that_are_none(tmp_path: Path, value: str) -> None:
    columns = "label type_symbol fract_x fract_y fract_z occupancy"
    with pytest.raises(ReadError, match="ccupancy of Na"):
        read_text(tmp_path, cif((f"Na Na 0 0 0 {value}",), symbol="P 1", columns=columns))


def test_columns_of_unequal_length(tmp_path: Path) -> None:
    text = cif(ROCK_SALT, symbol="P 1") + "loop_\n_atom_site_occupancy\n1.0\n"
    with pytest.raises(ReadError, match="1 values for 2 atoms"):
        read_text(tmp_path, text)


def test_every_truncation_of_a_cif_is_handled(tmp_path: Path) -> None:
    """Cut after each character: an error, or the loss of an atom is said; never part of the atoms in silence."""
    for length in range(len(WHOLE) - len(" 0.5 0.5 0.5\n")):
        try:
            structure = read_text(tmp_path, WHOLE[:length])
        except ReadError:
            continue
        assert "composition_mismatch" in codes(structure), WHOLE[:length]


def test_folders_missing_files_and_odd_paths(tmp_path: Path) -> None:
    with pytest.raises(ReadError, match="is a folder"):
        read(tmp_path)
    with pytest.raises(ReadError, match="There is no file"):
        read(tmp_path / "nothing.cif")
    (tmp_path / "x.cif").write_text(WHOLE)
    with pytest.raises(ReadError, match="is a folder, or lies in a file"):
        read(tmp_path / "x.cif" / "y.cif")
    for path in ("", "a\x00b", "x" * 5000):
        with pytest.raises(ReadError):
            read(path)


def test_a_name_with_control_characters_is_printed_safely(tmp_path: Path) -> None:
    with pytest.raises(ReadError) as caught:
        read(tmp_path / "a\x1b[31mb\nc.cif")
    assert "\x1b" not in str(caught.value)
    assert len(str(caught.value).splitlines()) == 2


def test_no_permission(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """The operating system's refusal is passed on in words (simulated, since the superuser may read everything)."""

    def refuse(*arguments: object, **options: object) -> None:
        raise PermissionError(13, "Permission denied")

    (tmp_path / "x.cif").write_text(WHOLE)
    monkeypatch.setattr(Path, "open", refuse)
    with pytest.raises(ReadError, match="may not be read"):
        read(tmp_path / "x.cif")


@pytest.mark.skipif(not os.path.exists("/dev/zero"), reason="this system has no endless device to read")
def test_endless_input_is_stopped() -> None:
    with pytest.raises(ReadError, match="is larger than 100 MB"):
        read("/dev/zero")


def test_very_long_files_do_not_hang(tmp_path: Path) -> None:
    """100,000 atoms are refused, 100,000 lines of reflections are skipped, 10,000 atoms are read."""
    started = time.perf_counter()
    atoms = [f"O{i} O {i % 97 / 97:.4f} {i % 89 / 89:.4f} {i % 83 / 83:.4f}" for i in range(100_000)]
    with pytest.raises(ReadError, match="holds 100,000 atoms or more; 20,000 is the most"):
        read_text(tmp_path, cif(atoms, (200, 200, 200, 90, 90, 90), symbol="P 1"))
    with pytest.raises(ReadError, match="20,000 is the most"):
        read_text(tmp_path, cif(atoms[:2000], (200, 200, 200, 90, 90, 90), symbol="F m -3 m"))
    assert len(read_text(tmp_path, cif(atoms[:10_000], (200, 200, 200, 90, 90, 90), symbol="P 1"))) == 10_000
    reflections = "loop_\n_refln_index_h\n_refln_F_squared_calc\n" + "1 2\n" * 100_000
    assert len(read_text(tmp_path, WHOLE + reflections)) == 8
    assert time.perf_counter() - started < 20


def test_random_damage_never_crashes(tmp_path: Path) -> None:
    """300 damaged copies of a CIF give a structure or a SitesymError."""
    rng = random.Random(5)
    words = [
        "nan",
        "inf",
        "-1e300",
        "?",
        ".",
        "'",
        '"',
        ";",
        "loop_",
        "data_y",
        "",
        "99999999",
        "x,y",
        "-x,-y,z",
        "1/0",
    ]
    text = cif(ROCK_SALT, CUBIC, operations=("x,y,z", "-x,-y,-z", "-x,y,z+1/2"), hall="-P 2yn")
    outcomes = {True: 0, False: 0}
    for _ in range(300):
        tokens = text.split(" ")
        for _ in range(rng.randrange(1, 3)):
            tokens[rng.randrange(len(tokens))] = rng.choice(words)
        try:
            outcomes[len(read_text(tmp_path, " ".join(tokens))) > 0] += 1
        except SitesymError:
            outcomes[False] += 1
    assert min(outcomes.values()) > 10


def test_importing_the_readers_loads_no_heavy_library() -> None:
    heavy = ("ase", "pymatgen", "scipy", "gemmi", "spglib")
    code = f"import sys, sitesym.reading; print([name for name in {heavy} if name in sys.modules])"
    assert subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout == "[]\n"


def test_reading_a_cif_or_poscar_loads_neither_ase_nor_pymatgen(tmp_path: Path) -> None:
    (tmp_path / "x.cif").write_text(WHOLE)
    code = (
        "import sys; from sitesym.reading import read; read(sys.argv[1]);"
        "print('ase' in sys.modules, 'pymatgen' in sys.modules)"
    )
    command = [sys.executable, "-c", code, str(tmp_path / "x.cif")]
    assert subprocess.run(command, capture_output=True, text=True, check=True).stdout == "False False\n"
