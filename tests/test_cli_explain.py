"""The command `explain`: files in, an explanation out; picked bands, pins, suspects; mistakes in two lines."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
from test_cli import assert_refused

import sitesym
from sitesym import cli

DEMO = Path(__file__).parent.parent / "structures_demo"
CALCITE, ARAGONITE, QUARTZ = (str(DEMO / f"{name}.cif") for name in ("calcite", "aragonite", "quartz"))
RAMAN = "wavenumber,intensity\n156,12\n281,40\n711,15\n1086,100\n1435,3\n1749,1\n"
INFRARED = "wavenumber;intensity\n712;30\n872;100\n1407;90\n"
"""Calcite: Porto, Giordmaine and Damen 1966; White in Farmer 1974; from memory."""


@pytest.fixture
def files(tmp_path: Path) -> dict[str, str]:
    content = {"raman": RAMAN, "infrared": INFRARED, "pins": "pin 711 CO3 ν4\nnot 1749 CO3 ν3\n"}
    made = {}
    for name, text in content.items():
        (tmp_path / f"{name}.csv").write_text(text, encoding="utf-8")
        made[name] = str(tmp_path / f"{name}.csv")
    return made


def output(capsys: pytest.CaptureFixture[str], *arguments: str) -> str:
    assert cli.main(["explain", *arguments]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    return out


def document(capsys: pytest.CaptureFixture[str], *arguments: str) -> dict:
    return json.loads(output(capsys, *arguments, "--format", "json"))


def place(found: dict, wavenumber: float) -> str | None:
    band = next(one for one in found["bands"] if one["wavenumber"] == wavenumber)
    return band["assignment"] and f"{band['assignment']['unit']} {band['assignment']['vibration']}"


def test_text_is_the_default(files: dict[str, str], capsys: pytest.CaptureFixture[str]) -> None:
    """Calcite: 5 Raman fundamentals, and 1749 as the overtone 2ν2 of the out-of-plane bend (Krishnamurti 1957)."""
    out = output(capsys, CALCITE, "--raman", files["raman"], "--infrared", files["infrared"])
    first, paragraph, *_ = out.split("\n\n")
    assert first == "CaCO₃ calcite: 9 bands"
    assert "5 fundamentals in Raman and 8 in infrared" in " ".join(paragraph.split())
    assert "1749 cm⁻¹ is allowed as 2ν2 of CO₃" in " ".join(paragraph.split())


@pytest.mark.parametrize(
    ("form", "start"), [("text", "CaCO₃"), ("html", "<!doctype"), ("json", "{"), ("csv", "technique,")]
)
def test_formats_are_written_by_name_and_suffix(
    form: str, start: str, files: dict[str, str], tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    given = (CALCITE, "--raman", files["raman"], "--no-scan")
    printed = output(capsys, *given, "--format", form)
    assert printed.lower().startswith(start.lower())
    target = tmp_path / f"out{cli.FORMATS[form][0]}"
    assert output(capsys, *given, "--output", str(target)) == ""
    assert target.read_text(encoding="utf-8") == printed


def test_several_files_and_mixed_lists(
    files: dict[str, str], tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    second, both = tmp_path / "second.txt", tmp_path / "both.csv"
    second.write_text("1067 0.5\n")
    both.write_text("technique,wavenumber\nraman,2500\nIR,1797\n")
    found = document(capsys, CALCITE, "--raman", files["raman"], str(second), "--bands", str(both), "--no-scan")
    assert len(found["bands"]) == 9
    assert [one["bands"] for one in found["input"]["measurements"]] == [6, 1, 2]


def test_pins_are_kept(files: dict[str, str], tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A band goes where the user pins it, and not where the user forbids it."""
    given = (CALCITE, "--raman", files["raman"], "--no-scan")
    assert place(document(capsys, *given), 711.0) == "CO3 ν4"
    pins = tmp_path / "pins.txt"
    pins.write_text("pin 281 CO3 nu4  # for the test\nnot 1435 CO3 v3\n")
    found = document(capsys, *given, "--pins", str(pins))
    assert place(found, 281.0) == "CO3 ν4"
    assert place(found, 711.0) != "CO3 ν4"
    assert place(found, 1435.0) != "CO3 ν3"


def test_suspects_are_compared(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """853 cm⁻¹ in Raman is ν2 of aragonite (Frech, Wang and Bates 1980, from memory); calcite has none there."""
    bands = tmp_path / "bands.txt"
    bands.write_text("711\n853\n1086\n")
    found = document(capsys, CALCITE, "--raman", str(bands), "--suspect", ARAGONITE, "--suspect", QUARTZ, "--no-scan")
    reasons = next(one for one in found["bands"] if one["wavenumber"] == 853.0)["reasons"]
    assert any(one["cause"] == "second_phase" and "aragonite" in one["argument"] for one in reasons)


def test_the_users_wavenumbers_move_families(
    files: dict[str, str], tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    own = tmp_path / "own.csv"
    own.write_text("unit,name,wavenumber\nCO3,nu4,712\n")
    found = document(capsys, CALCITE, "--raman", files["raman"], "--wavenumbers", str(own), "--no-scan")
    assert next(one for one in found["families"] if one["vibration"] == "ν4")["wavenumber"] == 712.0


def spectrum_file(folder: Path, laser: float | None = None) -> str:
    """Four Lorentzians of calcite with noise, in cm⁻¹ or in nm (vacuum and air alike: far less than a width)."""
    shift = np.arange(100.0, 1900.0, 1.0)
    lines = ((281, 40, 9), (711, 15, 4), (1086, 100, 4), (1749, 4, 10))
    y = sum(height / (1 + (2 * (shift - centre) / width) ** 2) for centre, height, width in lines)
    y = y + np.random.default_rng(4).normal(0, 0.1, len(shift))
    x = shift if laser is None else 1e7 / (1e7 / laser - shift)
    head = "Raman shift (cm-1)\tcounts\n" if laser is None else "wavelength (nm)\tcounts\n"
    target = folder / "spectrum.txt"
    target.write_text(head + "\n".join(f"{a:.5f}\t{b:.4f}" for a, b in zip(x, y, strict=True)))
    return str(target)


def test_spectrum_picked_edited_and_fed_back(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    picked = tmp_path / "picked.csv"
    first = document(capsys, CALCITE, "--raman", spectrum_file(tmp_path), "--picked", str(picked), "--no-scan")
    assert [round(one["wavenumber"]) for one in first["bands"]] == [281, 711, 1086, 1749]
    rows = picked.read_text(encoding="utf-8").splitlines()
    picked.write_text("\n".join(row for row in rows if not row.startswith("raman,28")), encoding="utf-8")
    again = document(capsys, CALCITE, "--bands", str(picked), "--no-scan")
    assert [one["wavenumber"] for one in again["bands"]] == [one["wavenumber"] for one in first["bands"][1:]]


def test_wavelengths_are_turned_with_the_laser_line(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    given = (CALCITE, "--raman", spectrum_file(tmp_path, 785.2), "--no-scan")
    assert_refused(capsys, ["explain", *given], 2, "laser")
    found = document(capsys, *given, "--laser", "785.2")
    assert [one["wavenumber"] for one in found["bands"]] == pytest.approx([281, 711, 1086, 1749], abs=1.5)


def test_weakest_band_is_the_users_choice(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    found = document(capsys, CALCITE, "--raman", spectrum_file(tmp_path), "--weakest", "10", "--no-scan")
    assert [round(one["wavenumber"]) for one in found["bands"]] == [281, 711, 1086]


def test_nothing_is_overwritten_by_accident(
    files: dict[str, str], tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    given = ["explain", CALCITE, "--raman", files["raman"], "--no-scan"]
    kept = tmp_path / "kept.csv"
    kept.write_text("precious")
    for option in ("--picked", "--output"):
        assert_refused(capsys, [*given, option, str(kept)], 2, "exists", "--force")
        assert_refused(capsys, [*given, option, files["raman"], "--force"], 2, "to be read", option)
    assert kept.read_text() == "precious"
    assert Path(files["raman"]).read_text() == RAMAN


@pytest.mark.parametrize(
    ("content", "code", "words"),
    [
        (b"", 3, ("empty",)),
        (b"\x00\xff\x00", 3, ("no text",)),
        (b"1086\nNaN\n", 3, ("line 2", "NaN")),
        (b"1086,5\n711,3\n", 3, ("line 1", "comma")),
        (b"calcite\n", 3, ("no measurements",)),
        (b"\n".join(b"%d 3" % (7919 * k % 4001 + 1) for k in range(100_000)), 3, ("100000 lines",)),
        (b"wavenumber,geometry\n1086,z(zx)-z\n", 2, ("Raman 1086", "polarized")),
        (b"wavelength (nm)\n564\n", 2, ("laser",)),
        (b"technique,wavenumber\ninfrared,876\n", 3, ("line 2", "--bands")),
    ],
    ids=lambda value: value[:20].decode("latin-1") if isinstance(value, bytes) else "",
)  # fmt: skip
def test_bad_measurements_are_told_in_two_lines(
    content: bytes, code: int, words: tuple[str, ...], tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    bad = tmp_path / "bad.txt"
    bad.write_bytes(content)
    assert_refused(capsys, ["explain", CALCITE, "--raman", str(bad), "--no-scan"], code, *words)


@pytest.mark.parametrize(
    ("content", "code", "words"),
    [
        ("pin 500 CO3 ν4\n", 2, ("line 1", "no band at 500", "711")),
        ("\npin 711 CO3 ν9\n", 2, ("line 2", "CO3 ν9", "CO3 ν1")),
        ("pin 711 CO3 ν2\n", 2, ("line 1", "forbidden in Raman")),
        ("711 CO3 ν4\n", 3, ("line 1", "pin 711")),
    ],
)
def test_bad_pins_are_told_in_two_lines(
    content: str, code: int, words: tuple[str, ...], files: dict[str, str], tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
) -> None:  # fmt: skip
    pins = tmp_path / "bad.txt"
    pins.write_text(content)
    given = ["explain", CALCITE, "--raman", files["raman"], "--pins", str(pins), "--no-scan"]
    assert_refused(capsys, given, code, *words)


@pytest.mark.parametrize(
    ("arguments", "code", "words"),
    [
        ([], 2, ("no bands", "--raman")),
        (["--raman"], 2, ("--raman",)),
        (["--raman", "nowhere.csv"], 3, ("nowhere.csv",)),
        (["--raman", "."], 3, ("folder",)),
        (["--raman", "RAMAN", "--laser", "12"], 2, ("12", "nm")),
        (["--raman", "RAMAN", "--kind", "graph"], 2, ("graph",)),
        (["--raman", "RAMAN", "--kind", "spectrum"], 3, ("spectrum",)),
        (["--raman", "RAMAN", "--axis-unit", "furlong"], 2, ("furlong",)),
        (["--raman", "RAMAN", "--calibration", "nan"], 2, ("nan",)),
        (["--raman", "RAMAN", "--suspect", "nowhere.cif"], 3, ("nowhere.cif",)),
        (["--raman", "RAMAN", "--format", "latex"], 2, ("latex",)),
        (["--raman", "RAMAN", "--picked", "no_such_folder/p.csv"], 2, ("no_such_folder",)),
    ],
    ids=lambda value: " ".join(value)[-30:] if isinstance(value, list) else "",
)
def test_wrong_command_lines(
    arguments: list[str], code: int, words: tuple[str, ...], files: dict[str, str], capsys: pytest.CaptureFixture[str]
) -> None:
    given = [files["raman"] if one == "RAMAN" else one for one in arguments]
    assert_refused(capsys, ["explain", CALCITE, *given], code, *words)


def test_names_from_strangers_are_harmless(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    bands = tmp_path / "<script>alert(1)<script>.csv"
    bands.write_text("wavenumber;note\n1086;<script>alert(1)</script>\n711;=cmd|'/C calc'!A0\n", encoding="utf-8")
    page = output(capsys, CALCITE, "--raman", str(bands), "--format", "html", "--no-scan")
    assert "<script" not in page.lower()
    table = output(capsys, CALCITE, "--raman", str(bands), "--format", "csv", "--no-scan")
    assert ",=cmd" not in table
    assert "'=cmd" in table


def test_public_names_do_the_same(files: dict[str, str]) -> None:
    analysis = sitesym.analyse(sitesym.read(CALCITE), scan=False)
    found = sitesym.explain(analysis, sitesym.read_bands(files["raman"], "raman"))
    assert isinstance(found, sitesym.Explanation)
    assert [one.band.wavenumber for one in found.bands] == [156, 281, 711, 1086, 1435, 1749]


def test_help_needs_no_heavy_library() -> None:
    code = (
        "import sys; from sitesym import cli; cli.main(['explain', '--help']); "
        "sys.exit(any(name in sys.modules for name in ('numpy', 'scipy', 'spglib', 'gemmi', 'jinja2', 'jcamp')))"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, check=False, timeout=60, env=dict(os.environ)
    )
    assert done.returncode == 0
    for option in (b"--raman", b"--infrared", b"--suspect", b"--pins", b"--wavenumbers", b"--picked", b"--laser"):
        assert option in done.stdout


def test_a_pin_leaves_the_other_technique_alone(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A Raman band pinned to ν1, which infrared does not show, and an infrared band of ν2 within its uncertainty."""
    lists = {"raman": "wavenumber,uncertainty\n880,4\n", "infrared": "wavenumber,uncertainty\n878,4\n"}
    for name, text in lists.items():
        (tmp_path / name).write_text(text)
    pins = tmp_path / "pins.txt"
    pins.write_text("pin 880 CO3 ν1\n")
    given = [word for name in lists for word in (f"--{name}", str(tmp_path / name))]
    found = document(capsys, CALCITE, *given, "--pins", str(pins), "--no-scan")
    assert (place(found, 880.0), place(found, 878.0)) == ("CO3 ν1", "CO3 ν2")
