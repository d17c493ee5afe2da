"""The command `explain`: measured bands against what symmetry allows."""

from __future__ import annotations

import argparse
import os
from typing import Any

from sitesym.cli.molecules import molecule_arguments, molecule_options
from sitesym.cli.output import check_target, write_file
from sitesym.cli.shared import (
    Command,
    analysis_options,
    chosen_format,
    number,
    output_arguments,
    read_structure,
    structure_arguments,
)
from sitesym.errors import UsageError

_FORMATS = ("text", "html", "json", "csv")
_UNITS = ("cm-1", "nm", "um", "meV", "THz")
_POINT = {"up": "peaks", "down": "dips"}


def _arguments(parser: argparse.ArgumentParser) -> None:
    structure_arguments(parser)
    _measured_arguments(parser.add_argument_group("the measurements"))
    _choice_arguments(parser.add_argument_group("what to consider"))
    molecule_arguments(parser)
    output_arguments(parser, _FORMATS)
    parser.add_argument("--no-scan", action="store_true", help="do not look at other tolerances")


def _measured_arguments(group: Any) -> None:
    lists = "lists of bands or spectra (text, CSV, JCAMP-DX), one or several"
    for name, words in (
        ("raman", f"Raman: {lists}"),
        ("infrared", f"infrared: {lists}"),
        ("bands", "lists in which a column 'technique' says raman or infrared, such as those of --picked"),
    ):
        group.add_argument(f"--{name}", metavar="FILE", nargs="+", action="extend", default=[], help=words)
    group.add_argument(
        "--laser", metavar="NM", help="laser line of the Raman spectra in nm, in air: 532; or '514.674 vacuum'"
    )
    group.add_argument("--axis-unit", choices=_UNITS, help="unit of axes that tell none (cm-1)")
    group.add_argument("--kind", choices=("list", "spectrum"), help="take all files as such; default: by content")
    group.add_argument(
        "--bands-point", choices=tuple(_POINT), help="way of bands in infrared spectra; default: by name or looks"
    )
    group.add_argument(
        "--calibration", metavar="CM-1", type=number, help="uncertainty of the scale, for picked bands (1 cm-1)"
    )
    group.add_argument(
        "--weakest", metavar="%", type=number, help="weakest band to pick, in per cent of the strongest (1 %%)"
    )
    group.add_argument(
        "--picked", metavar="CSV", help="write all bands to this file, to be edited and given to --bands"
    )


def _choice_arguments(group: Any) -> None:
    group.add_argument(
        "--suspect", metavar="FILE", action="append", default=[],
        help="structure of another phase that may be there; repeatable",
    )  # fmt: skip
    group.add_argument(
        "--pins", metavar="FILE", help="assignments to insist on or rule out, a line each: pin 711 CO3 nu4"
    )


def _run(arguments: argparse.Namespace) -> str:
    from importlib import import_module

    check_target(arguments.picked, "--picked", arguments)
    view = import_module(f"sitesym.views.explain_{chosen_format(arguments)}")
    laser = _laser(arguments)
    records = _records(arguments, laser)
    bands = [band for record in records for band in record.bands]
    structure = read_structure(arguments)
    from sitesym.analysis import analyse
    from sitesym.bands.explanation import explain

    options = {**analysis_options(arguments), **molecule_options(arguments)}
    analysis = analyse(structure, scan=not arguments.no_scan, **options)
    _check_geometries(bands, analysis)
    pinned, forbidden = _pins(arguments, bands, analysis)
    found = explain(
        analysis, bands, suspects=_suspects(arguments), pinned=pinned, forbidden=forbidden, laser=laser
    )  # fmt: skip
    text = str(view.render(found, records))
    if arguments.picked:
        from sitesym.views.picked_csv import render

        write_file(render(records), arguments.picked, "--picked", force=arguments.force)
    return text


def _laser(arguments: argparse.Namespace) -> float | None:
    """The wavelength of the laser line in air, nm; a nominal one stands for the line itself."""
    if arguments.laser is None:
        return None
    from sitesym.experiment.bench import read_laser

    return read_laser(arguments.laser).air


def _records(arguments: argparse.Namespace, laser: float | None) -> Any:
    from sitesym.bands.reading import Manner, read_records

    if not (arguments.raman or arguments.infrared or arguments.bands):
        raise UsageError("There are no bands to explain.", "Give files with --raman, --infrared or --bands.")
    choices: dict[str, Any] = {
        "laser": laser,
        "unit": arguments.axis_unit or "",
        "kind": arguments.kind or "",
        "direction": _POINT.get(arguments.bands_point, ""),
    }
    if arguments.calibration is not None:
        choices["calibration"] = arguments.calibration
    if arguments.weakest is not None:
        choices["least"] = arguments.weakest / 100
    return read_records(arguments.raman, arguments.infrared, arguments.bands, Manner(**choices))


def _check_geometries(bands: Any, analysis: Any) -> None:
    """Raise UsageError for a geometry whose polarizations do not lie across their beams in this crystal."""
    from sitesym.geometry.notation import parse_geometry

    for band in bands:
        if band.geometry:
            try:
                parse_geometry(band.geometry, analysis.symmetry.lattice)
            except UsageError as error:
                raise UsageError(f"{band.words}: {error.problem}", error.mend) from None


def _pins(arguments: argparse.Namespace, bands: Any, analysis: Any) -> Any:
    if not arguments.pins:
        return (), ()
    from sitesym.bands.inventory import inventory
    from sitesym.bands.pins import read_pins, resolved

    return resolved(read_pins(arguments.pins), bands, inventory(analysis))


def _suspects(arguments: argparse.Namespace) -> list[tuple[str, Any]]:
    """Names and analyses of the other phases."""
    from sitesym.analysis import analyse
    from sitesym.reading import read
    from sitesym.reading.text import printable

    found = []
    for path in arguments.suspect:
        structure = read(path)
        stem = os.path.splitext(os.path.basename(path))[0]
        found.append((printable(structure.name or stem, 60), analyse(structure, scan=False)))
    return found


EXPLAIN = Command(
    "explain",
    "Measured infrared and Raman bands: as what each is allowed, what is missing, which symmetry would explain them.",
    _arguments,
    _run,
)
