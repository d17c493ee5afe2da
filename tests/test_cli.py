"""The command line: exit codes, two-line errors, files that are not overwritten, UTF-8, and a quick start."""

from __future__ import annotations

import io
import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

from sitesym import cli
from sitesym.version import __version__

DEMO = Path(__file__).parent.parent / "structures_demo"
CALCITE = str(DEMO / "calcite.cif")


def run(*arguments: str, **environment: str) -> subprocess.CompletedProcess[bytes]:
    """The command in a process of its own."""
    return subprocess.run(
        [sys.executable, "-m", "sitesym", *arguments],
        capture_output=True,
        check=False,
        timeout=120,
        env={**os.environ, **environment},
    )


def assert_refused(capsys: pytest.CaptureFixture[str], arguments: list[str], code: int, *words: str) -> None:
    """The exit code, nothing on standard output, and one or two lines without traceback that hold the words."""
    assert cli.main(arguments) == code
    out, err = capsys.readouterr()
    assert out == ""
    assert err.startswith("sitesym: ")
    assert 1 <= len(err.splitlines()) <= 2
    assert "Traceback" not in err
    for word in words:
        assert word in err


def test_text_is_the_default(capsys: pytest.CaptureFixture[str]) -> None:
    """Calcite: 8 infrared and 5 Raman frequencies (Porto, Giordmaine, Damen 1966, from memory)."""
    assert cli.main(["report", CALCITE]) == 0
    out, err = capsys.readouterr()
    assert "Infrared      8" in out
    assert "Raman         5" in out
    assert err == ""


@pytest.mark.parametrize(
    ("form", "start"),
    [("text", "CaCO₃"), ("json", "{"), ("csv", "species,"), ("markdown", "# "), ("latex", "%"), ("html", "<!")],
)
def test_every_format_is_printed_and_written(
    form: str, start: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The same document on standard output, in a file with --format, and in a file with the format's suffix."""
    assert cli.main(["report", CALCITE, "--format", form]) == 0
    printed = capsys.readouterr().out
    assert printed.lower().startswith(start.lower())
    named, by_suffix = tmp_path / "any.name", tmp_path / f"report{cli.FORMATS[form][0]}"
    assert cli.main(["report", CALCITE, "--format", form, "--output", str(named)]) == 0
    assert cli.main(["report", CALCITE, "--output", str(by_suffix)]) == 0
    assert named.read_text(encoding="utf-8") == by_suffix.read_text(encoding="utf-8") == printed
    assert capsys.readouterr().out == ""


def test_file_is_not_overwritten_unless_forced(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    kept = tmp_path / "kept.json"
    kept.write_text("precious")
    assert_refused(capsys, ["report", CALCITE, "--output", str(kept)], 2, "exists", "--force")
    assert kept.read_text() == "precious"
    assert cli.main(["report", CALCITE, "--output", str(kept), "--force"]) == 0
    assert json.loads(kept.read_text())["totals"]["raman"] == 5


def test_structure_file_is_never_overwritten(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    source = tmp_path / "mine.cif"
    source.write_bytes(Path(CALCITE).read_bytes())
    arguments = ["report", str(source), "--format", "text", "--output", str(source), "--force"]
    assert_refused(capsys, arguments, 2, "structure file itself")
    assert source.read_bytes() == Path(CALCITE).read_bytes()


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        ([], ("No command", "sitesym report FILE")),
        (["report"], ("FILE", "sitesym report --help")),
        (["repot", CALCITE], ("repot", "sitesym --help")),
        (["report", CALCITE, "--fromat", "json"], ("--fromat",)),
        (["report", CALCITE, "--format", "pdf"], ("pdf", "json")),
        (["report", CALCITE, "--form", "json"], ("--form",)),
        (["report", CALCITE, "--tolerance", "tight"], ("tight", "number")),
        (["report", CALCITE, "--tolerance", "nan"], ("nan",)),
        (["report", CALCITE, "--tolerance", "inf"], ("inf",)),
        (["report", CALCITE, "--tolerance", "-1"], ("-1",)),
        (["report", CALCITE, "--tolerance", "0"], ("0",)),
        (["report", CALCITE, "--axes", "polar"], ("polar", "standard")),
        (["report", CALCITE, "--setting", "Pnma"], ("Pnma", "167")),
        (["report", CALCITE, "--elements", " , "], ("element",)),
        (["report", CALCITE, "--block", "elsewhere"], ("elsewhere",)),
        (["report", CALCITE, "--output", "report.docx"], ("report.docx", "--format")),
        (["report", CALCITE, "--output", "report"], ("report", "--format")),
        (["report", CALCITE, "--output", "no_such_folder/report.txt"], ("no_such_folder", "No such file")),
        (["report", CALCITE, "--output", "nul\0l.txt"], ("Cannot write",)),
    ],
    ids=lambda value: " ".join(value)[-40:].replace("\0", "0") if isinstance(value, list) else "",
)
def test_wrong_command_lines_exit_with_2(
    arguments: list[str], words: tuple[str, ...], capsys: pytest.CaptureFixture[str]
) -> None:
    assert_refused(capsys, arguments, 2, *words)


@pytest.mark.parametrize(
    "content",
    [
        b"",
        b"%PDF-1.4\n%\xe2\xe3",
        bytes(range(256)) * 20,
        b"data_x\nloop_\n_atom_site_label\n",
        b"nothing of the kind\n",
    ],
)
def test_files_that_are_no_structure_exit_with_3(
    content: bytes, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    bad = tmp_path / "a name with späces.cif"
    bad.write_bytes(content)
    assert_refused(capsys, ["report", str(bad)], 3)


def test_missing_file_and_folder_exit_with_3(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert_refused(capsys, ["report", str(tmp_path / "absent.cif")], 3, "absent.cif")
    assert_refused(capsys, ["report", str(tmp_path)], 3)


def test_file_name_cannot_steer_the_terminal(capsys: pytest.CaptureFixture[str]) -> None:
    assert_refused(capsys, ["report", "\x1b[31m\nabsent\udcff.cif"], 3, "absent")
    assert cli.main(["report", "\x1b[31m"]) == 3
    assert "\x1b" not in capsys.readouterr().err


def failing(error: BaseException) -> object:
    def analyse(*_: object, **__: object) -> object:
        raise error

    return analyse


@pytest.mark.parametrize(
    ("error", "words"),
    [(RuntimeError("the unforeseen\nhappened"), ("Internal error", "the unforeseen happened", "--traceback")),
     (MemoryError(), ("memory",)), (RecursionError(), ("Internal error",))],
)  # fmt: skip
def test_the_unforeseen_exits_with_4(
    error: Exception, words: tuple[str, ...], monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setattr("sitesym.analysis.analyse", failing(error))
    assert_refused(capsys, ["report", CALCITE], 4, *words)


def test_contradiction_exits_with_4(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    from sitesym.errors import InconsistencyError

    monkeypatch.setattr("sitesym.analysis.analyse", failing(InconsistencyError("Two routes disagree.", "Look again.")))
    assert_refused(capsys, ["report", CALCITE], 4, "Two routes disagree.", "Look again.")


def test_traceback_is_shown_when_asked_for(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    monkeypatch.setattr("sitesym.analysis.analyse", failing(RuntimeError("unforeseen")))
    assert cli.main(["report", CALCITE, "--traceback"]) == 4
    err = capsys.readouterr().err
    assert "Traceback (most recent call last)" in err
    assert err.splitlines()[-2].startswith("sitesym: Internal error")
    assert cli.main(["report", "absent.cif", "--traceback"]) == 3
    assert "Traceback (most recent call last)" in capsys.readouterr().err


def test_interrupt_is_quiet(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    """128 + 2, as a shell reports a process ended by an interrupt (common practice)."""
    monkeypatch.setattr("sitesym.analysis.analyse", failing(KeyboardInterrupt()))
    assert cli.main(["report", CALCITE]) == 130
    assert capsys.readouterr() == ("", "")


def test_standard_input_is_read(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    data = io.BytesIO(Path(CALCITE).read_bytes())
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(data, encoding="utf-8"))
    assert cli.main(["report", "-", "--format", "json"]) == 0
    assert json.loads(capsys.readouterr().out)["space_group"]["number"] == 167


def test_options_reach_the_analysis(capsys: pytest.CaptureFixture[str]) -> None:
    """The perovskite of the demo has 7 B1g modes in Pbnm and 5 in Pnma (Iliev 1998, from memory); scan; tolerance."""
    manganite = str(DEMO / "lanthanum_manganite.cif")
    found = {}
    for setting in ("Pnma", "Pbnm"):
        assert cli.main(["report", manganite, "--format", "json", "--setting", setting, "--no-scan"]) == 0
        document = json.loads(capsys.readouterr().out)
        assert document["space_group"]["scan"] == []
        found[setting] = {row["label"]: row["optic"] for row in document["species"]}
    assert (found["Pnma"]["B1g"], found["Pbnm"]["B1g"]) == (5, 7)
    assert cli.main(["report", CALCITE, "--format", "json", "--tolerance", "0.02", "--axes", "standard"]) == 0
    document = json.loads(capsys.readouterr().out)
    assert document["space_group"]["tolerance"] == 0.02
    assert "standardised" in document["factor_group"]["axes"]


def test_elements_name_the_atoms_of_an_old_poscar(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    poscar = tmp_path / "POSCAR"
    poscar.write_text("salt\n5.64\n0 .5 .5\n.5 0 .5\n.5 .5 0\n1 1\nDirect\n0 0 0\n.5 .5 .5\n")
    assert cli.main(["report", str(poscar), "--elements", "Na, Cl", "--format", "json"]) == 0
    assert json.loads(capsys.readouterr().out)["input"]["formula"] == "ClNa"


def test_help_names_the_default_tolerance(capsys: pytest.CaptureFixture[str]) -> None:
    """The help text cannot import the number without starting numpy."""
    from sitesym.symmetry.crystal import DEFAULT_TOLERANCE

    assert cli.main(["report", "--help"]) == 0
    assert f"({DEFAULT_TOLERANCE:g} Å)" in capsys.readouterr().out


def test_version(capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["--version"]) == 0
    assert capsys.readouterr().out == f"sitesym {__version__}\n"


@pytest.mark.parametrize("arguments", ['["--help"]', '["--version"]', '["report", "--help"]', '["report"]'])
def test_help_starts_no_library(arguments: str) -> None:
    """Help and version come at once: nothing heavy is imported for them."""
    code = (
        f"import sys; from sitesym.cli import main; main({arguments}); "
        "print([name for name in ('numpy', 'spglib', 'gemmi', 'ase', 'rich', 'jinja2') if name in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, encoding="utf-8")
    assert done.stdout.splitlines()[-1] == "[]"


@pytest.mark.parametrize("form", ["json", "text"])
def test_reports_start_only_what_they_need(form: str) -> None:
    """A report on a CIF does not wait for libraries of other formats and views."""
    code = (
        f"import sys; from sitesym.cli import main; main(['report', {CALCITE!r}, '--format', '{form}']); "
        "heavy = ('ase', 'pymatgen', 'scipy', 'networkx', 'rich', 'jinja2', 'matplotlib'); "
        "print('\\n', [name for name in heavy if name in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, check=True)
    assert done.stdout.decode("utf-8").splitlines()[-1].strip() == "[]"


def test_output_is_utf8_whatever_the_locale() -> None:
    done = run(
        "report", CALCITE, LC_ALL="C", LANG="C", PYTHONIOENCODING="ascii", PYTHONUTF8="0", PYTHONCOERCECLOCALE="0"
    )
    assert done.returncode == 0
    assert "Γ(optic)    = A₁g + 3A₂g" in done.stdout.decode("utf-8")
    assert done.stderr == b""


def test_reader_may_close_the_pipe() -> None:
    """`sitesym report … | head -1` ends quietly."""
    for arguments in (["report", CALCITE], ["--help"]):
        process = subprocess.Popen(
            [sys.executable, "-m", "sitesym", *arguments], stdout=subprocess.PIPE, stderr=subprocess.PIPE
        )
        assert process.stdout is not None
        process.stdout.close()
        _, err = process.communicate(timeout=120)
        assert (process.returncode, err) == (0, b"")


@pytest.mark.skipif(not os.path.exists("/dev/full"), reason="needs a device that is always full")
def test_full_disk_is_said() -> None:
    with open("/dev/full", "wb") as full:
        done = subprocess.run(
            [sys.executable, "-m", "sitesym", "report", CALCITE], stdout=full, stderr=subprocess.PIPE, check=False
        )
    assert done.returncode == 2
    assert done.stderr.decode("utf-8").startswith("sitesym: Cannot write to standard output")
    assert len(done.stderr.splitlines()) == 2


def test_commands_are_told_by_the_help(capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["--help"]) == 0
    printed = " ".join(capsys.readouterr().out.split())
    for command in cli.COMMANDS:
        assert command.summary in printed
