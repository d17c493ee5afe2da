"""The command `report`: the whole analysis of a crystal, or of a molecule alone, or of two molecules side by side."""

from __future__ import annotations

import argparse
from typing import Any

from sitesym.cli.molecules import bond_rules, molecule_arguments, molecule_options, wavenumbers
from sitesym.cli.shared import (
    FORMATS,
    Command,
    analysis_options,
    chosen_format,
    output_arguments,
    structure_arguments,
)
from sitesym.errors import UsageError


def _arguments(parser: argparse.ArgumentParser) -> None:
    structure_arguments(parser)
    parser.add_argument(
        "second", metavar="FILE2", nargs="?", help="a second molecule, where FILE is one: both are shown side by side"
    )
    molecule_arguments(parser)
    output_arguments(parser, tuple(FORMATS))
    parser.add_argument("--no-scan", action="store_true", help="do not look at other tolerances")


def _run(arguments: argparse.Namespace) -> str:
    from importlib import import_module

    view = import_module(f"sitesym.views.{chosen_format(arguments)}")
    from sitesym.reading import read_any

    found = read_any(
        arguments.file, block=arguments.block, whole_cell=arguments.whole_cell, elements=arguments.elements
    )  # fmt: skip
    from sitesym.structure import Structure

    if not isinstance(found, Structure):
        return _molecule_report(arguments, view, found)
    if arguments.second is not None:
        raise _no_pair(arguments.file)
    from sitesym.analysis import analyse

    options = {**analysis_options(arguments), **molecule_options(arguments)}
    return str(view.render(analyse(found, scan=not arguments.no_scan, **options)))


def _molecule_report(arguments: argparse.Namespace, view: Any, molecule: Any) -> str:
    """The report on one molecule, or on two side by side."""
    from sitesym.molecule_analysis import analyse_molecule, compare_molecules
    from sitesym.reading import read_any
    from sitesym.structure import Structure

    _refuse_crystal_options(arguments)
    tolerance, bonds, given = arguments.molecule_tolerance, bond_rules(arguments), wavenumbers(arguments)
    first = analyse_molecule(molecule, tolerance, bonds, wavenumbers=given)
    if arguments.second is None:
        return str(_renderer(view, "render_molecule")(first))
    other = read_any(arguments.second)
    if isinstance(other, Structure):
        raise _no_pair(arguments.second)
    second = analyse_molecule(other, tolerance, bonds, wavenumbers=given)
    return str(_renderer(view, "render_comparison")(compare_molecules(first, second)))


def _no_pair(crystal: str) -> UsageError:
    """The error for two files of which one is a crystal."""
    return UsageError(
        "Two files stand side by side only where both are molecules without a unit cell.",
        f"{crystal} is a crystal: give one file, or two molecules.",
    )


def _renderer(view: Any, name: str) -> Any:
    """The function of a view that shows molecules. Raises UsageError where the format has none."""
    found = getattr(view, name, None)
    if found is None:
        form = view.__name__.rpartition(".")[2]
        raise UsageError(f"There is no report of free molecules as {form}.", "Choose another --format, such as text.")
    return found


def _refuse_crystal_options(arguments: argparse.Namespace) -> None:
    """Options that speak of a crystal mean nothing for a molecule."""
    given = {
        "--tolerance": arguments.tolerance is not None, "--setting": arguments.setting is not None,
        "--axes": arguments.axes != "auto", "--no-molecules": arguments.no_molecules,
        "--whole-cell": arguments.whole_cell, "--no-scan": arguments.no_scan,
    }  # fmt: skip
    for name, present in given.items():
        if present:
            mend = "Use --molecule-tolerance." if name == "--tolerance" else f"Leave {name} out."
            raise UsageError(f"{name} does not apply: {arguments.file} is a molecule without a unit cell.", mend)


REPORT = Command(
    "report",
    "Species, infrared and Raman activity, sites, molecules and Raman tensors of a crystal; or a molecule alone.",
    _arguments,
    _run,
)
