"""Options on molecules that commands share: what is bonded, tolerance, wavenumbers."""

from __future__ import annotations

import argparse
import os
from typing import Any

from sitesym.cli.shared import number
from sitesym.errors import ReadError, UsageError


def molecule_arguments(parser: argparse.ArgumentParser) -> None:
    """How molecules and complex ions are found and named."""
    group = parser.add_argument_group("molecules and complex ions")
    group.add_argument("--unit", metavar="UNIT", action="append", default=[], help=_UNIT)
    group.add_argument("--bond", metavar="A-B", action="append", default=[], help=_BOND)
    group.add_argument(
        "--no-bond", metavar="A-B", action="append", default=[], help="count no contact of these as a bond; repeatable"
    )
    group.add_argument(
        "--molecule-tolerance", metavar="Å", type=number, help="for the point group of a free molecule (0.25 Å)"
    )
    group.add_argument(
        "--wavenumbers", metavar="FILE", help="wavenumbers of vibrations, as TOML or CSV: unit, name, wavenumber"
    )
    group.add_argument("--no-molecules", action="store_true", help="analyse by atomic sites only")


_UNIT = 'a unit to cut out, by formula ("CO3") or by labels of its atoms ("C1,O1,O2"); repeatable'
_BOND = (
    "count contacts as bonds: Ca-O, Cu1-O3; up to 1.35 times the sum of the covalent radii, or 0.6 Å more than the "
    "sum, whichever is longer; repeatable"
)
_WAVENUMBER_FILE = "Name a file of wavenumbers, TOML or CSV."


def bond_rules(arguments: argparse.Namespace) -> Any:
    """The user's word on bonds, None if there is none. Raises UsageError for what names no pair."""
    if not (arguments.unit or arguments.bond or arguments.no_bond):
        return None
    from sitesym.bonding import BondRules, parse_pair

    added, forbidden = (tuple(map(parse_pair, pairs)) for pairs in (arguments.bond, arguments.no_bond))
    wanted = {frozenset(pair) for pair in added}
    for one, other in forbidden:
        if frozenset((one, other)) in wanted:
            raise UsageError(f"--bond and --no-bond both name {one}-{other}.", "Leave one of the two out.")
    return BondRules(add=added, forbid=forbidden, units=tuple(arguments.unit))


def wavenumbers(arguments: argparse.Namespace) -> Any:
    """What the file holds that --wavenumbers names, None if there is none. Raises ReadError for a folder."""
    if arguments.wavenumbers is None:
        return None
    if not arguments.wavenumbers:
        raise UsageError("The name for --wavenumbers is empty.", _WAVENUMBER_FILE)
    if os.path.isdir(arguments.wavenumbers):
        raise ReadError(f"'{arguments.wavenumbers}' is a folder.", _WAVENUMBER_FILE)
    from sitesym.wavenumbers import read_wavenumbers

    return read_wavenumbers(arguments.wavenumbers)


def molecule_options(arguments: argparse.Namespace) -> dict[str, Any]:
    """Options of `analyse` that `molecule_arguments` asks for.

    Raises UsageError for options that contradict each other.
    """
    given = {
        "--unit": arguments.unit, "--bond": arguments.bond, "--no-bond": arguments.no_bond,
        "--molecule-tolerance": arguments.molecule_tolerance, "--wavenumbers": arguments.wavenumbers,
    }  # fmt: skip
    if arguments.no_molecules:
        for name, value in given.items():
            if value:
                raise UsageError(f"{name} means nothing beside --no-molecules.", "Leave one of the two out.")
        return {"molecules": False}
    return {
        "bonds": bond_rules(arguments),
        "molecule_tolerance": arguments.molecule_tolerance,
        "wavenumbers": wavenumbers(arguments),
    }
