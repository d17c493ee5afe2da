"""Angle-resolved curves from CSV files: columns by name, decimal commas, plain errors with the line."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from sitesym.errors import ReadError, UsageError
from sitesym.experiment.angle_data import AngleData, read_angle_data


def written(folder: Path, text: str, encoding: str = "utf-8") -> Path:
    path = folder / "curve.csv"
    path.write_text(text, encoding=encoding)
    return path


PLAIN = "angle,parallel,crossed,error\n0,10.5,1,0.5\n45,5,2.25,0.5\n90,0.5,1,0.25\n"


@pytest.mark.parametrize(
    "text",
    [
        PLAIN,
        "# curve of one band\n\nerror,crossed,angle,note,parallel\n0.5,1,0,,10.5\n0.5,2.25,45,x,5\n0.25,1,90,,0.5\n",
        "angle;parallel;crossed;error\n0;10,5;1;0,5\n45;5;2,25;0,5\n90;0,5;1;0,25\n",
        "Angle (deg)\tParallel [counts]\tCrossed\tSigma\n0\t10.5\t1\t0.5\n45\t5,0\t2,25\t0.5\n90\t0.5\t1\t0.25\n",
        "angle parallel crossed error\n 0 10.5 1 .5\n 45 5 2.25 5e-1\n 90 0.5 1 0.25\n",
        "\ufeffθ;∥;⊥;σ\r\n0;10.5;1;0.5\r\n45;5;2.25;0.5;\r\n90;0.5;1;0.25\r\n",
        '"angle","parallel","crossed","error"\n"0","10.5","1","0.5"\n45,5,2.25,0.5\n90,0.5,1,0.25\n',
        "angle,parallel,crossed,parallel_error,crossed error\n0,10.5,1,.5,.5\n45,5,2.25,.5,.5\n90,.5,1,.25,.25\n",
    ],
    ids=["plain", "any order", "decimal comma", "tabs", "blanks", "signs", "quotes", "two errors"],
)
def test_columns_are_found_by_name(tmp_path: Path, text: str) -> None:
    data = read_angle_data(written(tmp_path, text), "Eg")
    assert data.species == "Eg"
    assert data.degrees.tolist() == [0, 45, 90]
    assert data.parallel is not None
    assert data.parallel.tolist() == [10.5, 5, 0.5]
    assert data.crossed is not None
    assert data.crossed.tolist() == [1, 2.25, 1]
    assert data.crossed_error is not None
    assert data.crossed_error.tolist() == [0.5, 0.5, 0.25]
    assert data.has_errors


def test_empty_cells_were_not_measured(tmp_path: Path) -> None:
    data = read_angle_data(written(tmp_path, "angle,parallel,crossed\n0,1,\n10,,2\n"), "Eg")
    assert data.parallel is not None
    assert np.isnan(data.parallel).tolist() == [False, True]
    assert not data.has_errors


def test_species_from_the_file_or_the_caller(tmp_path: Path) -> None:
    path = written(tmp_path, "angle,parallel,species\n0,1,E(TO)\n10,2,\n")
    assert read_angle_data(path).species == "E(TO)"
    assert read_angle_data(path, "E(LO)").species == "E(LO)"


def test_windows_encoding_is_read(tmp_path: Path) -> None:
    data = read_angle_data(written(tmp_path, "angle (°);parallel\n0;1,5\n10;2\n", "cp1252"), "A1g")
    assert data.degrees.tolist() == [0, 10]


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("0,1,2\n10,1,2\n", "names no columns 'angle'"),
        ("angle,intensity\n0,1\n", "names no columns 'angle' and 'parallel' or 'crossed'"),
        ("angle,parallel,par\n0,1,2\n", "two columns for 'parallel'"),
        ("angle,parallel\n0,1\n10,abc\n", "line 3: 'abc' is no number for 'parallel'"),
        ("angle,parallel\n0,1\n,2\n", "line 3: '' is no number for 'angle'"),
        ("# x\nangle,parallel\n0,1\n\n10,inf\n", "line 5: 'inf' is no number"),
        ("angle,parallel\n0,1\n10,1,5\n", "line 3 has 3 fields, its first line 2"),
        ("angle,parallel\n", "no data"),
        ("# nothing\n", "no lines but comments"),
        ("angle,parallel,error\n0,1,0.1\n10,2,0\n", "missing, zero or negative"),
        ("angle,parallel,error\n0,1,0.1\n10,2,\n", "missing, zero or negative"),
        ("angle,parallel,crossed,crossed error\n0,1,2,0.1\n", "one of the two curves only"),
        ("angle,parallel,species\n0,1,Eg\n10,1,A1g\n", "names 2 species"),
    ],
)
def test_faults_are_said_with_the_line(tmp_path: Path, text: str, words: str) -> None:
    with pytest.raises(ReadError, match=words) as found:
        read_angle_data(written(tmp_path, text), "" if "species" in text else "Eg")
    assert "curve.csv" in found.value.problem
    assert found.value.mend


def test_decimal_commas_between_commas_get_advice(tmp_path: Path) -> None:
    with pytest.raises(ReadError) as found:
        read_angle_data(written(tmp_path, "angle,parallel\n0,1,5\n"), "Eg")
    assert "semicolons" in found.value.mend


def test_missing_species_file_and_binary_are_said(tmp_path: Path) -> None:
    with pytest.raises(UsageError, match="does not say to which species"):
        read_angle_data(written(tmp_path, "angle,parallel\n0,1\n"))
    with pytest.raises(ReadError, match="There is no file"):
        read_angle_data(tmp_path / "none.csv", "Eg")
    path = tmp_path / "binary.csv"
    path.write_bytes(b"angle,parallel\n\x00\x01\x02")
    with pytest.raises(ReadError, match="no text file"):
        read_angle_data(path, "Eg")


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        ({"degrees": [0, 10], "parallel": [1, 2, 3]}, "2 angles and 3 values of parallel"),
        ({"degrees": [0, 10]}, "no intensities"),
        ({"degrees": [0, float("nan")], "parallel": [1, 2]}, "no finite number"),
        ({"degrees": [0, 10], "parallel": ["a", 2]}, "not all numbers"),
        ({"degrees": [[0, 10]], "parallel": [1, 2]}, "no single row"),
        ({"degrees": [0, 10], "parallel": [1, float("inf")]}, "infinite"),
        ({"degrees": [0, 10], "parallel": [1, 2], "parallel_error": [1, -1]}, "zero or negative"),
    ],
)
def test_arrays_that_do_not_fit_are_said(arguments: dict, words: str) -> None:
    with pytest.raises(UsageError, match=words):
        AngleData("Eg", **arguments)
