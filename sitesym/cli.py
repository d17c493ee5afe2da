"""The command line: arguments in, text and an exit code out.

Exit codes: 0 done; 2 the command line was wrong; 3 the file could not be read or is no crystal structure; 4 the
analysis was stopped. Libraries are imported when a command runs, so that `--help` and `--version` come at once.
A new command is an entry in `COMMANDS`.
"""

from __future__ import annotations

import argparse
import io
import os
import sys
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any, NoReturn

from sitesym.errors import SitesymError, UsageError
from sitesym.version import __version__

INTERNAL = 4
INTERRUPTED = 130

FORMATS = {
    "text": (".txt",),
    "html": (".html", ".htm"),
    "json": (".json",),
    "csv": (".csv",),
    "markdown": (".md", ".markdown"),
    "latex": (".tex",),
}
"""Name of a view (a module of `sitesym.views`) and the file suffixes that stand for it."""


@dataclass(frozen=True, slots=True)
class Command:
    """One word of the command line: what it is for, its arguments, and the function that makes its text."""

    name: str
    summary: str
    arguments: Callable[[argparse.ArgumentParser], None]
    run: Callable[[argparse.Namespace], str]


class _Parser(argparse.ArgumentParser):
    """Mistakes become a UsageError, which is reported like every other error: in two lines."""

    def error(self, message: str) -> NoReturn:
        raise UsageError(f"{message[:1].upper()}{message[1:]}.", f"See {self.prog} --help.")


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command line and return the exit code."""
    traceback = "--traceback" in (sys.argv[1:] if argv is None else argv)
    _speak_utf8()
    try:
        return _run(argv)
    except SitesymError as error:
        return _fail(error.problem, error.mend, error.exit_code, traceback)
    except KeyboardInterrupt:
        return INTERRUPTED
    except BrokenPipeError:
        return _reader_gone()
    except MemoryError:
        return _fail("Not enough memory.", "Use a smaller cell, or a larger computer.", INTERNAL, traceback)
    except Exception as error:
        problem = f"Internal error: {type(error).__name__}: {error}"
        return _fail(
            problem, "This should not happen. Run it again with --traceback and report it.", INTERNAL, traceback
        )


def _run(argv: Sequence[str] | None) -> int:
    try:
        arguments = _parser().parse_args(argv)
    except SystemExit as finished:  # --help and --version
        sys.stdout.flush()
        return int(finished.code or 0)
    command: Command | None = arguments.command
    if command is None:
        raise UsageError("No command was given.", "Start with: sitesym report FILE. All commands: sitesym --help.")
    if not arguments.traceback and not sys.warnoptions:
        import warnings

        warnings.simplefilter("ignore")
    _check_output(arguments)
    _write(command.run(arguments), arguments)
    return 0


def _parser() -> argparse.ArgumentParser:
    parser = _Parser(
        prog="sitesym",
        description="Zone-centre vibrations of crystals: species, activity and polarization from a structure file.",
        epilog="sitesym COMMAND --help tells the options of a command.",
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"sitesym {__version__}")
    parser.set_defaults(command=None)
    commands = parser.add_subparsers(title="commands", metavar="COMMAND")
    for command in COMMANDS:
        sub = commands.add_parser(
            command.name, help=command.summary, description=command.summary, allow_abbrev=False
        )  # fmt: skip
        command.arguments(sub)
        sub.add_argument("--traceback", action="store_true", help="show where in the code an error happened")
        sub.set_defaults(command=command)
    return parser


# Arguments that several commands share


def structure_arguments(parser: argparse.ArgumentParser) -> None:
    """How a structure file is read and how its symmetry is found."""
    reading = parser.add_argument_group("the structure")
    reading.add_argument(
        "file", metavar="FILE", help="structure file (CIF, POSCAR and others), or - for standard input"
    )
    reading.add_argument("--block", metavar="NAME", help="which structure, where the file holds several")
    reading.add_argument("--whole-cell", action="store_true", help="the file lists every atom of the cell, no symmetry")
    reading.add_argument(
        "--elements", metavar="SYMBOLS", type=_symbols, help='elements of a POSCAR that does not name them: "Ca C O"'
    )
    symmetry = parser.add_argument_group("its symmetry")
    symmetry.add_argument(
        "--tolerance", metavar="Å", type=_number, help="distance within which atoms match, for the space group (0.01 Å)"
    )
    symmetry.add_argument(
        "--axes",
        choices=("auto", "input", "standard"),
        default="auto",
        help="axes of all labels: of the input cell, the standardised cell, or (auto) the input cell if conventional",
    )
    symmetry.add_argument("--setting", metavar="SYMBOL", help="label everything in this setting, such as Pnma or Pbnm")


def output_arguments(parser: argparse.ArgumentParser, formats: Sequence[str]) -> None:
    """Where the result goes, and in which form."""
    group = parser.add_argument_group("output")
    group.add_argument("--format", choices=tuple(formats), help="default: by the suffix of --output, else text")
    group.add_argument("--output", metavar="FILE", help="write to a file instead of standard output")
    group.add_argument("--force", action="store_true", help="overwrite the file if it exists")


def read_structure(arguments: argparse.Namespace) -> Any:
    """The `Structure` that the arguments name."""
    from sitesym.reading import read

    return read(
        arguments.file, block=arguments.block, whole_cell=arguments.whole_cell, elements=arguments.elements
    )  # fmt: skip


def _number(text: str) -> float:
    try:
        return float(text)
    except ValueError:
        raise argparse.ArgumentTypeError(f"'{text}' is no number") from None


def _symbols(text: str) -> tuple[str, ...]:
    symbols = tuple(text.replace(",", " ").split())
    if not symbols:
        raise argparse.ArgumentTypeError("no element is given")
    return symbols


# report


def _report_arguments(parser: argparse.ArgumentParser) -> None:
    structure_arguments(parser)
    output_arguments(parser, tuple(FORMATS))
    parser.add_argument("--no-scan", action="store_true", help="do not look at other tolerances")


def _report(arguments: argparse.Namespace) -> str:
    from importlib import import_module

    view = import_module(f"sitesym.views.{_format(arguments)}")
    structure = read_structure(arguments)
    from sitesym.analysis import analyse

    options = {"axes": arguments.axes, "setting": arguments.setting, "scan": not arguments.no_scan}
    if arguments.tolerance is not None:
        options["tolerance"] = arguments.tolerance
    return str(view.render(analyse(structure, **options)))


COMMANDS = (
    Command(
        "report",
        "Species, infrared and Raman activity, site groups and Raman tensors of a crystal.",
        _report_arguments,
        _report,
    ),
)


# Output


def _format(arguments: argparse.Namespace) -> str:
    if arguments.format or not arguments.output:
        return arguments.format or "text"
    suffix = os.path.splitext(arguments.output)[1].lower()
    for name, suffixes in FORMATS.items():
        if suffix in suffixes:
            return name
    known = ", ".join(suffix for suffixes in FORMATS.values() for suffix in suffixes)
    raise UsageError(
        f"The suffix of '{arguments.output}' does not say which format is meant.", f"Give --format, or one of {known}."
    )


def _check_output(arguments: argparse.Namespace) -> None:
    """Refuse to overwrite, before anything is computed."""
    target = arguments.output
    if not target or not os.path.exists(target):
        return
    if os.path.exists(arguments.file) and os.path.samefile(arguments.file, target):
        raise UsageError(f"The output '{target}' is the structure file itself.", "Choose another name for --output.")
    if not arguments.force:
        raise UsageError(f"The file '{target}' exists.", "Choose another name, or add --force to overwrite it.")


def _write(text: str, arguments: argparse.Namespace) -> None:
    if not arguments.output:
        _print(text)
        return
    mode = "w" if arguments.force else "x"
    try:
        with open(arguments.output, mode, encoding="utf-8", errors="backslashreplace", newline="\n") as stream:
            stream.write(text)
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise UsageError(f"Cannot write '{arguments.output}': {reason}.", "Choose another --output.") from error


def _print(text: str) -> None:
    try:
        sys.stdout.write(text)
        sys.stdout.flush()
    except BrokenPipeError:
        raise
    except OSError as error:
        _leave_standard_output()
        raise UsageError(
            f"Cannot write to standard output: {error.strerror}.", "Make room, or use --output."
        ) from error


def _speak_utf8() -> None:
    """UTF-8 out, whatever the locale says; never a failure on a character."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(encoding="utf-8", errors="backslashreplace")


def _fail(problem: str, mend: str, code: int, traceback: bool) -> int:
    """One line on the problem and one on the mend, on standard error."""
    from sitesym.views.labels import printable

    if traceback:
        from traceback import print_exc

        print_exc()
    lines = [f"sitesym: {printable(problem)}", *([f"  {printable(mend)}"] if mend else [])]
    print("\n".join(lines), file=sys.stderr)
    return code


def _reader_gone() -> int:
    """The reader of a pipe closed it (`| head`): nothing is wrong."""
    _leave_standard_output()
    return 0


def _leave_standard_output() -> None:
    """Drop what is still to be written, so that the interpreter does not complain about it at exit."""
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
