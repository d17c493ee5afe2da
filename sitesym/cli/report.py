"""The command `report`: the whole analysis of a crystal."""

from __future__ import annotations

import argparse

from sitesym.cli.shared import (
    FORMATS,
    Command,
    analysis_options,
    chosen_format,
    output_arguments,
    read_structure,
    structure_arguments,
)


def _arguments(parser: argparse.ArgumentParser) -> None:
    structure_arguments(parser)
    output_arguments(parser, tuple(FORMATS))
    parser.add_argument("--no-scan", action="store_true", help="do not look at other tolerances")


def _run(arguments: argparse.Namespace) -> str:
    from importlib import import_module

    view = import_module(f"sitesym.views.{chosen_format(arguments)}")
    structure = read_structure(arguments)
    from sitesym.analysis import analyse

    return str(view.render(analyse(structure, scan=not arguments.no_scan, **analysis_options(arguments))))


REPORT = Command(
    "report", "Species, infrared and Raman activity, site groups and Raman tensors of a crystal.", _arguments, _run
)
