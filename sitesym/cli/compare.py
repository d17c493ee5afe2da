"""The command `compare`: two structures, their relation, and what becomes active from one to the other."""

from __future__ import annotations

import argparse
from typing import Any

from sitesym.cli.shared import Command, chosen_format, number, output_arguments
from sitesym.errors import UsageError

_FORMATS = ("text", "html", "json", "csv")


def _arguments(parser: argparse.ArgumentParser) -> None:
    files = parser.add_argument_group("the structures")
    files.add_argument("file", metavar="PARENT", help="structure of higher symmetry (CIF, POSCAR and others)")
    files.add_argument("second", metavar="CHILD", help="structure of lower symmetry, or the other polymorph")
    for name in ("parent", "child"):
        files.add_argument(f"--{name}-block", metavar="NAME", help=f"which structure of the {name}'s file, if several")
        files.add_argument(
            f"--{name}-elements", metavar="SYMBOLS", type=_symbols, help='for a POSCAR that names none: "Ca C O"'
        )
    files.add_argument("--whole-cell", action="store_true", help="the files list every atom of the cell, no symmetry")
    symmetry = parser.add_argument_group("their symmetry")
    symmetry.add_argument("--tolerance", metavar="Å", type=number, help="for the space groups of both (0.01 Å)")
    for name in ("parent", "child"):
        symmetry.add_argument(f"--{name}-setting", metavar="SYMBOL", help=f"label the {name} in this setting: Pbnm")
    relation = parser.add_argument_group("their relation")
    relation.add_argument("--strain", metavar="%", type=number, help="by how much lengths may differ (6 %%)")
    relation.add_argument("--displacement", metavar="Å", type=number, help="how far an atom may have moved (1.2 Å)")
    output_arguments(parser, _FORMATS)


def _symbols(text: str) -> tuple[str, ...]:
    return tuple(text.replace(",", " ").split())


def _run(arguments: argparse.Namespace) -> str:
    from importlib import import_module

    view = import_module(f"sitesym.views.compare_{chosen_format(arguments)}")
    from sitesym.comparison import compare

    if arguments.file == arguments.second == "-":
        raise UsageError("Both structures cannot come from standard input.", "Name a file for one of them.")
    parent, child = (_analysed(arguments, path, name) for path, name in _files(arguments))
    limits = {}
    if arguments.strain is not None:
        limits["strain"] = arguments.strain / 100
    if arguments.displacement is not None:
        limits["displacement"] = arguments.displacement
    return str(view.render(compare(parent, child, **limits)))


def _files(arguments: argparse.Namespace) -> tuple[tuple[str, str], ...]:
    return (arguments.file, "parent"), (arguments.second, "child")


def _analysed(arguments: argparse.Namespace, path: str, name: str) -> Any:
    """The analysis of one of the two files."""
    from sitesym.comparison.compare import analysed
    from sitesym.reading import read

    given = vars(arguments)
    structure = read(
        path, block=given[f"{name}_block"], whole_cell=arguments.whole_cell, elements=given[f"{name}_elements"]
    )
    options = {} if arguments.tolerance is None else {"tolerance": arguments.tolerance}
    return analysed(structure, setting=given[f"{name}_setting"], **options)


COMPARE = Command(
    "compare",
    "Two structures: supercell and operations, what species become, which wavevectors fold, what becomes active.",
    _arguments,
    _run,
)
