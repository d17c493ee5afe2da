"""What commands share: their shape, arguments of structure and output, the formats."""

from __future__ import annotations

import argparse
import os
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

from sitesym.errors import UsageError

FORMATS = {
    "text": (".txt",),
    "html": (".html", ".htm"),
    "json": (".json",),
    "csv": (".csv",),
    "markdown": (".md", ".markdown"),
    "latex": (".tex",),
}
"""Name of a view and the file suffixes that stand for it."""


@dataclass(frozen=True, slots=True)
class Command:
    """One word of the command line: what it is for, its arguments, and the function that makes its text."""

    name: str
    summary: str
    arguments: Callable[[argparse.ArgumentParser], None]
    run: Callable[[argparse.Namespace], str]


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
        "--tolerance", metavar="Å", type=number, help="distance within which atoms match, for the space group (0.01 Å)"
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
    parser.set_defaults(formats=tuple(formats))


def read_structure(arguments: argparse.Namespace) -> Any:
    """The `Structure` that the arguments name."""
    from sitesym.reading import read

    return read(
        arguments.file, block=arguments.block, whole_cell=arguments.whole_cell, elements=arguments.elements
    )  # fmt: skip


def analysis_options(arguments: argparse.Namespace) -> dict[str, Any]:
    """Options of `analyse` that `structure_arguments` asks for."""
    if arguments.setting is not None and arguments.axes == "input":
        raise UsageError(
            "--setting and --axes input contradict each other: a setting chooses other axes.",
            "Leave one of the two out.",
        )
    options = {"axes": arguments.axes, "setting": arguments.setting}
    if arguments.tolerance is not None:
        options["tolerance"] = arguments.tolerance
    return options


def chosen_format(arguments: argparse.Namespace) -> str:
    """The format that --format names, or the suffix of --output, or text.

    Raises UsageError for a suffix that stands for no format of the command.
    """
    if arguments.format or not arguments.output:
        return arguments.format or "text"
    suffix = os.path.splitext(arguments.output)[1].lower()
    for name in arguments.formats:
        if suffix in FORMATS[name]:
            return str(name)
    known = ", ".join(suffix for name in arguments.formats for suffix in FORMATS[name])
    raise UsageError(
        f"The suffix of '{arguments.output}' does not say which format is meant.", f"Give --format, or one of {known}."
    )


def number(text: str) -> float:
    """An argument that is a number."""
    try:
        return float(text)
    except ValueError:
        raise argparse.ArgumentTypeError(f"'{text}' is no number") from None


def _symbols(text: str) -> tuple[str, ...]:
    symbols = tuple(text.replace(",", " ").split())
    if not symbols:
        raise argparse.ArgumentTypeError("no element is given")
    return symbols
