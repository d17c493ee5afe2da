"""The command line: arguments in, text and an exit code out.

Exit codes: 0 done; 2 the command line was wrong; 3 the file could not be read or is no crystal structure; 4 the
analysis was stopped. Libraries are imported when a command runs, so that `--help` and `--version` come at once.
A new command is a module in this folder and an entry in `COMMANDS`.
"""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Sequence
from typing import NoReturn

from sitesym.cli.compare import COMPARE
from sitesym.cli.explain import EXPLAIN
from sitesym.cli.output import check_output, leave_standard_output, speak_utf8, write
from sitesym.cli.plan import PLAN
from sitesym.cli.report import REPORT
from sitesym.cli.shared import FORMATS, Command
from sitesym.errors import SitesymError, UsageError
from sitesym.version import __version__

__all__ = ["COMMANDS", "FORMATS", "main"]

INTERNAL = 4
INTERRUPTED = 130

COMMANDS = (REPORT, PLAN, EXPLAIN, COMPARE)


class _Parser(argparse.ArgumentParser):
    """Mistakes become a UsageError, which is reported like every other error: in two lines."""

    def error(self, message: str) -> NoReturn:
        raise UsageError(f"{message[:1].upper()}{message[1:]}.", f"See {self.prog} --help.")


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command line and return the exit code."""
    traceback = "--traceback" in (sys.argv[1:] if argv is None else argv)
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # the matrices are small: threads would cost more than they give
    speak_utf8()
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
    check_output(arguments)
    write(command.run(arguments), arguments)
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
    leave_standard_output()
    return 0
