"""Reports on a free molecule and on two side by side, and options on molecules on the command line."""

from __future__ import annotations

import io
import json
from pathlib import Path

import pytest
from molecule_shapes import all_shapes
from test_molecule_analysis import SHAPES, compared
from test_molecule_analysis import analysed as free_molecule

from sitesym import cli
from sitesym.views import csv as csv_view
from sitesym.views import json as json_view
from sitesym.views import labels, latex, layout, markdown, text

DEMO = Path(__file__).parent.parent / "structures_demo"


@pytest.mark.parametrize("name", SHAPES)
def test_reports_on_molecules_fit_80_columns_and_every_format(name: str) -> None:
    result = free_molecule(name)
    report = text.render_molecule(result)
    assert max(map(layout.width, report.splitlines())) <= 80
    assert labels.schoenflies_text(result.point_group) in report
    assert json.loads(json_view.render_molecule(result))["totals"]["raman"] == result.counts.raman
    assert csv_view.render_molecule(result).startswith("species,")
    assert markdown.render_molecule(result).startswith("# ")
    assert latex.render_molecule(result).count("\\begin{") == latex.render_molecule(result).count("\\end{")


def test_the_report_on_anti_dichloroethane_says_exclusion() -> None:
    report = " ".join(text.render_molecule(free_molecule("dichloroethane anti")).split())
    assert "as long as it keeps this form, no vibration shows both in infrared and in Raman" in report
    assert "z the twofold axis, normal to the mirror plane" in report
    assert "Γ(internal) 6Ag + 3Bg + 4Au + 5Bu" in report


def test_the_comparison_says_which_bands_tell_conformers_apart() -> None:
    report = " ".join(text.render_comparison(compared("dichloroethane anti", "dichloroethane gauche")).split())
    assert (
        "A has a centre of inversion: no vibration of A shows in both infrared and Raman; in B 18 vibrations show in "
        "both. So a band found at the same wavenumber in the two spectra speaks for B, unless"
    ) in report
    assert "C₂H₄Cl₂: A (dichloroethane anti) and B (dichloroethane gauche), side by side" in report
    assert "C-Cl stretching: 1 infrared and 1 Raman in A, 2 infrared and 2 Raman (all in both spectra) in B." in report
    assert "C-C stretching: 1 Raman, no infrared in A, 1 infrared and 1 Raman (all in both spectra) in B." in report
    assert " 0 infrared" not in report
    swapped = " ".join(text.render_comparison(compared("dichloroethane gauche", "dichloroethane anti")).split())
    assert "B has a centre of inversion" in swapped
    alike = text.render_comparison(compared("ferrocene staggered", "ferrocene staggered"))
    assert "only wavenumbers and intensities tell them apart" in " ".join(alike.split())


def test_json_of_a_comparison() -> None:
    found = json.loads(json_view.render_comparison(compared("ethane staggered", "ethane eclipsed")))
    whole = found["bands"][0]
    assert (whole["first"]["raman"], whole["second"]["raman"], whole["differs"]) == (6, 9, True)
    assert found["first"]["exclusion"]


# The command line


@pytest.fixture
def files(tmp_path: Path) -> Path:
    for name in ("dichloroethane anti", "dichloroethane gauche", "water"):
        shape = all_shapes()[name]
        lines = [f"{e} {x:.6f} {y:.6f} {z:.6f}" for e, (x, y, z) in zip(shape.elements, shape.positions, strict=True)]
        text_ = "\n".join([str(len(lines)), name, *lines]) + "\n"
        (tmp_path / f"{name.split()[-1]}.xyz").write_text(text_, encoding="utf-8")
    (tmp_path / "mine.csv").write_text("unit,name,wavenumber\nCO3,nu3,1407\n", encoding="utf-8")
    return tmp_path


def run(capsys: pytest.CaptureFixture[str], *arguments: str) -> str:
    code = cli.main(["report", *arguments])
    out, err = capsys.readouterr()
    assert code == 0, err
    return out


def test_a_file_without_a_cell_is_recognised(files: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert "Point group    C₂h" in run(capsys, str(files / "anti.xyz"))
    both = run(capsys, str(files / "anti.xyz"), str(files / "gauche.xyz"))
    assert "Which bands tell them apart" in both
    found = json.loads(run(capsys, str(files / "water.xyz"), "--format", "json", "--molecule-tolerance", "0.1"))
    assert found["point_group"] == "C2v"


def test_an_ase_file_without_a_cell_is_a_molecule(files: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Any format without a cell that ASE reads, here a connection table (V2000)."""
    (files / "water.mol").write_text(
        "water\n  test\n\n  3  2  0  0  0  0  0  0  0  0999 V2000\n"
        "    0.0000    0.0000   -0.3918 O   0  0\n    0.7591    0.0000    0.1959 H   0  0\n"
        "   -0.7591    0.0000    0.1959 H   0  0\n  1  2  1  0\n  1  3  1  0\nM  END\n"
    )
    assert "Point group    C₂v" in run(capsys, str(files / "water.mol"))


def test_options_on_molecules_reach_the_analysis(files: Path, capsys: pytest.CaptureFixture[str]) -> None:
    calcite = str(DEMO / "calcite.cif")
    assert "at 1407 cm⁻¹" in run(capsys, calcite, "--wavenumbers", str(files / "mine.csv"))
    assert "three-dimensional net" in run(capsys, calcite, "--bond", "Ca-O")
    assert "2 C; 6 O" in run(capsys, calcite, "--no-bond", "C-O")
    assert "2 CO₃ (D₃h on D₃)" in run(capsys, calcite, "--unit", "CO3")
    assert "Units" not in run(capsys, calcite, "--no-molecules")
    assert "your tolerance of 0.1 Å" in run(capsys, calcite, "--molecule-tolerance", "0.1")


@pytest.mark.parametrize(
    ("arguments", "words_"),
    [
        (["calcite.cif", "--bond", "CaO"], ["names no pair", "Ca-O"]),
        (["calcite.cif", "--bond", "Ca-Si"], ["No atom is called 'Si'"]),
        (["calcite.cif", "--unit", "SO3"], ["no unit of this structure"]),
        (["calcite.cif", "--molecule-tolerance", "2"], ["tolerance", "at most 1"]),
        (["calcite.cif", "--molecule-tolerance", "wide"], ["no number"]),
        (["calcite.cif", "--no-molecules", "--unit", "CO3"], ["--unit", "--no-molecules"]),
        (["calcite.cif", "quartz.cif"], ["Two files", "one file"]),
    ],
)
def test_wrong_options_are_told_plainly(
    arguments: list[str], words_: list[str], capsys: pytest.CaptureFixture[str]
) -> None:
    given = [str(DEMO / one) if one.endswith(".cif") else one for one in arguments]
    assert cli.main(["report", *given]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert 1 <= len(err.splitlines()) <= 2
    assert "Traceback" not in err
    for word in words_:
        assert word in err


@pytest.mark.parametrize(
    ("arguments", "code", "words_"),
    [
        (["water.xyz", "--tolerance", "0.1"], 2, ["--tolerance does not apply", "--molecule-tolerance"]),
        (["water.xyz", "--setting", "Pnma"], 2, ["--setting does not apply"]),
        (["water.xyz", "nothing.xyz"], 3, ["no file"]),
        (["water.xyz", "--wavenumbers", "mine.csv"], 2, ["no unit CO3", "H2O"]),
    ],
)
def test_wrong_options_for_a_molecule_are_told_plainly(
    arguments: list[str], code: int, words_: list[str], files: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    given = [str(files / one) if one.endswith((".xyz", ".csv")) else one for one in arguments]
    assert cli.main(["report", *given]) == code
    out, err = capsys.readouterr()
    assert out == ""
    assert 1 <= len(err.splitlines()) <= 2
    for word in words_:
        assert word in err


def test_the_second_molecule_is_never_overwritten(files: Path, capsys: pytest.CaptureFixture[str]) -> None:
    target = str(files / "gauche.xyz")
    arguments = ["report", str(files / "anti.xyz"), target, "--output", target, "--format", "text", "--force"]
    assert cli.main(arguments) == 2
    assert "structure file itself" in capsys.readouterr().err


def test_a_molecule_from_standard_input(
    files: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    class Stream(io.TextIOWrapper):
        """Standard input with bytes behind it."""

    monkeypatch.setattr("sys.stdin", Stream(io.BytesIO((files / "water.xyz").read_bytes()), encoding="utf-8"))
    assert "Point group    C₂v" in run(capsys, "-")
