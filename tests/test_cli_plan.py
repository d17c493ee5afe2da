"""The command `plan`: options, exit codes, two-line errors, formats, and a quick start."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

import sitesym
from sitesym import cli

DEMO = Path(__file__).parent.parent / "structures_demo"
CALCITE, NIOBATE = str(DEMO / "calcite.cif"), str(DEMO / "lithium_niobate.cif")
SILICON, FLAKE = str(DEMO / "silicon.cif"), str(DEMO / "molybdenite.vasp")


def printed(capsys: pytest.CaptureFixture[str], *arguments: str) -> str:
    """What the command prints when it succeeds."""
    code = cli.main(["plan", *arguments])
    out, err = capsys.readouterr()
    assert (code, err) == (0, "")
    return out


def document(capsys: pytest.CaptureFixture[str], *arguments: str) -> dict:
    return json.loads(printed(capsys, *arguments, "--format", "json"))


def notations(found: dict) -> list[str]:
    return [found["geometries"][k]["notation"] for k in found["least_plan"]["measurements"]]


# Common practice: silicon (001) shows its line in z(xy)z̄ and in z(x′x′)z̄ with x′ along [110], not in z(xx)z̄.
def test_silicon_by_named_geometries(capsys: pytest.CaptureFixture[str]) -> None:
    wanted = ["z(xy)-z", "z(xx)-z", "[001]([110][110])[00-1]", "z(x+45 x+45)-z"]
    options = [part for one in wanted for part in ("--geometry", one)]
    found = document(capsys, SILICON, *options)
    allowed = [geometry["species"][0]["allowed"] for geometry in found["geometries"]]
    assert allowed == [True, False, True, True]
    assert [geometry["species"][0]["label"] for geometry in found["geometries"]] == ["T2g"] * 4


def test_faces_are_assumed_and_that_is_said(capsys: pytest.CaptureFixture[str]) -> None:
    assert "assumed, because none was named" in " ".join(printed(capsys, CALCITE).split())
    assert "assumed" not in printed(capsys, CALCITE, "--face", "001").split("Cautions")[0]
    assert document(capsys, CALCITE)["sample"]["assumed"] is True


def test_faces_mounts_and_analyser_reach_the_plan(capsys: pytest.CaptureFixture[str]) -> None:
    found = document(capsys, NIOBATE, "--face", "001", "--face", "10-10", "--right-angle", "--forward")
    assert {one["mount"] for one in found["geometries"]} == {"right-angle", "forward"}
    assert found["sample"]["faces"] == ["001", "10-10"]
    found = document(capsys, NIOBATE, "--face", "001", "--no-analyser")
    assert all(one["notation"].endswith("*)-z") for one in found["geometries"])


@pytest.mark.parametrize("option", ["--edge", "--up"])
def test_edge_turns_the_angles(option: str, capsys: pytest.CaptureFixture[str]) -> None:
    """In a hexagonal cell [110] and a enclose 60° (geometry): x lies 120° on from it, counted anticlockwise."""
    found = document(capsys, CALCITE, "--face", "001", option, "110")
    (first, *_) = found["least_plan"]["steps"]
    assert first["reference"] == "[110]"
    assert first["laser_angle"] == pytest.approx(120.0)
    assert "120° from edge [110]" in printed(capsys, CALCITE, "--face", "001", option, "[110]")


def test_bench_follows_the_lasers(capsys: pytest.CaptureFixture[str]) -> None:
    found = document(capsys, CALCITE, "--laser", "532", "--laser", "632.991 vacuum", "--temperature", "77")
    assert [round(one["laser"]["air"], 1) for one in found["bench"]] == [532.1, 632.8]
    assert {one["temperature"] for one in found["bench"]} == {77.0}
    assert any("cryostat" in words for words in found["cautions"])
    assert "Name your laser" in printed(capsys, CALCITE)


def test_conditions_reach_the_leakage(capsys: pytest.CaptureFixture[str]) -> None:
    """More tilt and more aperture leak more (monotonous for small angles)."""
    small = document(capsys, FLAKE, "--sample", "flake", "--tilt", "1", "--aperture", "0.3", "--index", "4")
    large = document(capsys, FLAKE, "--sample", "flake", "--tilt", "5", "--aperture", "0.9", "--index", "4")
    for key in ("misorientation", "aperture"):
        first, second = (one["least_plan"]["steps"][0]["leaks"][0][key] for one in (small, large))
        assert 0 < first < second < 1


def test_samples_without_orientation(capsys: pytest.CaptureFixture[str]) -> None:
    for sample in ("powder", "grain"):
        found = document(capsys, CALCITE, "--sample", sample)
        assert found["geometries"] == []
        assert [one["name"] for one in found["unoriented"]] == ["parallel", "crossed"]


def test_curves_with_given_and_complex_letters(capsys: pytest.CaptureFixture[str]) -> None:
    """Parallel intensity of a + i b on diagonal elements: |a cos²θ + b sin²θ|² (Loudon 1964)."""
    found = document(capsys, NIOBATE, "--curves", "010", "--letters", "a=1, b=0.5+0.5i")
    (curve,) = [one for one in found["curves"][0]["curves"] if (one["label"], one["phonon"]) == ("A1", "TO")]
    assert curve["letters"] == {"a": 1.0, "b": [0.5, 0.5]}
    angle = np.radians(np.array(curve["degrees"]))
    expected = np.abs(np.cos(angle) ** 2 + (0.5 + 0.5j) * np.sin(angle) ** 2) ** 2
    assert np.allclose(curve["parallel"], expected, atol=1e-8)


def test_infrared_face_is_chosen(capsys: pytest.CaptureFixture[str]) -> None:
    found = document(capsys, CALCITE, "--infrared", "001")
    assert [one["face"] for one in found["infrared"]] == ["001"]


def test_measured_curves_are_fitted(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Exact curves of a = 1, b = −0.4, turned by 12° and scaled to counts, give these back."""
    angle = np.radians(np.arange(0.0, 360.0, 10.0) - 12.0)
    parallel = 500 * (np.cos(angle) ** 2 - 0.4 * np.sin(angle) ** 2) ** 2
    crossed = 500 * (0.7 * np.sin(2 * angle)) ** 2
    lines = ["angle;parallel;crossed;error"]
    lines += [f"{10 * k};{p:.3f};{c:.3f};1" for k, (p, c) in enumerate(zip(parallel, crossed, strict=True))]
    data = tmp_path / "measured.csv"
    data.write_text("\n".join(lines).replace(".", ","))
    found = document(capsys, NIOBATE, "--face", "010", "--fit", str(data), "--species", "A1(TO)")["fit"]
    values = {one["name"]: one["value"] for one in found["values"]}
    assert values["b/a"] == pytest.approx(-0.4, abs=0.01)
    assert values["offset"] % 180 == pytest.approx(12.0, abs=0.5)
    assert "Fit of A₁(TO) on (010)" in printed(
        capsys, NIOBATE, "--face", "010", "--fit", str(data), "--species", "A1", "--complex"
    )


@pytest.mark.parametrize(("form", "suffix", "start"), [
    ("text", ".txt", "CaCO₃"), ("html", ".html", "<!DOCTYPE html>"), ("json", ".json", "{"), ("csv", ".csv", "number,"),
])  # fmt: skip
def test_every_format_is_printed_and_written(
    form: str, suffix: str, start: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    out = printed(capsys, CALCITE, "--format", form)
    assert out.startswith(start)
    target = tmp_path / f"plan{suffix}"
    assert cli.main(["plan", CALCITE, "--output", str(target)]) == 0
    assert target.read_text(encoding="utf-8") == out
    assert cli.main(["plan", CALCITE, "--output", str(target)]) == 2
    assert "--force" in capsys.readouterr().err


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["--face", "abc"], ("abc", "indices")),
        (["--face", "000"], ("zero",)),
        (["--face", "1-100", "--edge", "001", "--edge", "100"], ("[100]", "none of the faces")),
        (["--geometry", "z(xz)-z"], ("z cannot be polarized along z", "0.0°")),
        (["--geometry", "zxy"], ("zxy", "ki(ei es)ks")),
        (["--geometry", "x([111] y)-x"], ("[111]", "°")),
        (["--sample", "liquid"], ("liquid", "powder")),
        (["--sample", "powder", "--face", "001"], ("powder", "--face")),
        (["--face", "111", "--right-angle"], ("90°", "--face")),
        (["--laser", "green"], ("green", "nm")),
        (["--laser", "5320"], ("5320", "nm")),
        (["--temperature", "0"], ("0 K", "kelvin")),
        (["--temperature", "nan"], ("nan",)),
        (["--aperture", "1.6"], ("1.6", "aperture")),
        (["--tilt", "-3"], ("-3",)),
        (["--tilt", "nan"], ("nan",)),
        (["--index", "inf"], ("inf",)),
        (["--curves", "001", "--letters", "q=1"], ("q", "letters")),
        (["--curves", "001", "--letters", "a"], ("'a'", "b=0.5")),
        (["--curves", "001", "--letters", "a=nan"], ("a", "finite")),
        (["--letters", "a=1"], ("--curves",)),
        (["--species", "Eg"], ("--fit",)),
        (["--fit", "absent.csv"], ("--face",)),
        (["--infrared", "hkl"], ("hkl",)),
        (["--format", "latex"], ("latex", "json")),
        (["--output", "plan.tex"], ("plan.tex", "--format")),
    ],
    ids=lambda value: " ".join(value)[:50] if isinstance(value, list) else "",
)
def test_wrong_command_lines_exit_with_2(
    arguments: list[str], words: tuple[str, ...], capsys: pytest.CaptureFixture[str]
) -> None:
    assert cli.main(["plan", CALCITE, *arguments]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.startswith("sitesym: ")
    assert 1 <= len(err.splitlines()) <= 2
    for word in words:
        assert word in err


def test_files_that_cannot_be_read_exit_with_3(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["plan", str(tmp_path / "absent.cif")]) == 3
    assert cli.main(["plan", CALCITE, "--face", "001", "--fit", str(tmp_path / "absent.csv"), "--species", "Eg"]) == 3
    bad = tmp_path / "bad.csv"
    bad.write_text("angle,parallel\n0,1\n10,x\n")
    assert cli.main(["plan", CALCITE, "--face", "001", "--fit", str(bad), "--species", "Eg"]) == 3
    assert "line 3" in capsys.readouterr().err


def test_help_starts_no_library() -> None:
    code = (
        "import sys; from sitesym.cli import main; main(['plan', '--help']); "
        "print([name for name in ('numpy', 'spglib', 'gemmi', 'scipy', 'jinja2') if name in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, encoding="utf-8")
    assert done.stdout.splitlines()[-1] == "[]"


@pytest.mark.parametrize("form", ["json", "text"])
def test_plans_start_only_what_they_need(form: str) -> None:
    """The exact search needs no solver from elsewhere; scipy waits for a fit."""
    code = (
        f"import sys; from sitesym.cli import main; main(['plan', {CALCITE!r}, '--format', '{form}']); "
        "print('\\n', [name for name in ('ase', 'pymatgen', 'scipy', 'networkx', 'jinja2') if name in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, check=True)
    assert done.stdout.decode("utf-8").splitlines()[-1].strip() == "[]"


def test_python_has_the_same_plan(capsys: pytest.CaptureFixture[str]) -> None:
    sheet = sitesym.plan(sitesym.analyse(sitesym.read(CALCITE)), faces=["001"], lasers=[532])
    assert isinstance(sheet, sitesym.RunSheet)
    found = document(capsys, CALCITE, "--face", "001", "--laser", "532")
    assert [step.measurement.result.geometry.notation for step in sheet.steps] == notations(found)
    assert repr(sheet) == "RunSheet(CCaO3, crystal: z(xx)-z, z(xy)-z)"
