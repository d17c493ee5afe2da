"""The command `plan`: a run sheet for Raman and infrared measurements on the sample at hand."""

from __future__ import annotations

import argparse
from typing import Any

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
_SAMPLES = ("crystal", "flake", "film", "grain", "powder")
_MOUNTS = ("backscattering", "right-angle", "forward")


def _arguments(parser: argparse.ArgumentParser) -> None:
    structure_arguments(parser)
    _sample_arguments(parser.add_argument_group("the sample"))
    _measurement_arguments(parser.add_argument_group("the measurements"))
    _bench_arguments(parser.add_argument_group("the bench"))
    _curve_arguments(parser.add_argument_group("angle-resolved curves"))
    output_arguments(parser, _FORMATS)


def _sample_arguments(group: Any) -> None:
    group.add_argument("--sample", choices=_SAMPLES, default="crystal", help="what it is (crystal)")
    group.add_argument(
        "--face", metavar="HKL", action="append", default=[],
        help="a face of it: 001, 10-10, '1 0 -1 2'; repeatable. Without one, simple faces are assumed",
    )  # fmt: skip
    group.add_argument(
        "--edge", "--up", metavar="UVW", action="append", default=[],
        help="a visible edge, as lattice direction: 110; angles of polarizations are told from it; repeatable",
    )  # fmt: skip


def _measurement_arguments(group: Any) -> None:
    for mount in _MOUNTS:
        words = {"forward": "through the sample"}.get(mount, "")
        group.add_argument(
            f"--{mount}", dest="mounts", action="append_const", const=mount,
            help=f"plan for {mount.replace('-', ' ')} {words}".strip(),
        )  # fmt: skip
    group.add_argument("--no-analyser", action="store_true", help="the scattered light is not analysed")
    group.add_argument(
        "--geometry", metavar="GEOMETRY", action="append", default=[],
        help="judge this one: 'z(xy)-z', '[001]([110][1-10])[00-1]', 'x(z*)y'; --geometry='-z(xx)z'; repeatable",
    )  # fmt: skip
    group.add_argument(
        "--infrared", metavar="HKL", action="append", help="face for infrared spectra; those of the sample if not given"
    )


def _bench_arguments(group: Any) -> None:
    group.add_argument(
        "--laser", metavar="NM", action="append", default=[],
        help="laser line in nm, in air: 532; or '514.674 vacuum'; repeatable",
    )  # fmt: skip
    group.add_argument("--temperature", metavar="K", type=number, help="of the sample, in kelvin (295)")
    group.add_argument("--aperture", metavar="NA", type=number, help="numerical aperture of the objective (0)")
    group.add_argument("--index", metavar="N", type=number, help="refractive index of the crystal (1.5)")
    group.add_argument("--tilt", metavar="DEG", type=number, help="misorientation to reckon with, in degrees (2)")


def _curve_arguments(group: Any) -> None:
    group.add_argument(
        "--curves", metavar="HKL", action="append", default=[], help="intensity against rotation on this face"
    )
    group.add_argument(
        "--letters", metavar="A=1,B=0.5", type=_letters, help="values of tensor letters, which may be complex: b=1+0.5i"
    )
    group.add_argument(
        "--fit",
        metavar="CSV",
        help="fit these measured intensities (angle, parallel, crossed, error) on the one --face",
    )
    group.add_argument("--species", metavar="LABEL", help="the species to which the measured band belongs: Eg, E(TO)")
    group.add_argument("--complex", action="store_true", help="fit phases too: the crystal absorbs")


def _letters(text: str) -> dict[str, complex]:
    """`a=1,b=0.5+0.2i` as letters and values."""
    values: dict[str, complex] = {}
    for part in filter(None, (one.strip() for one in text.split(","))):
        letter, equals, value = (one.strip() for one in part.partition("="))
        try:
            values[letter] = complex(value.replace(" ", "").replace("i", "j"))
        except ValueError:
            equals = ""
        if not equals or not letter:
            raise argparse.ArgumentTypeError(f"'{part}' is no letter with its value, such as b=0.5")
    if not values:
        raise argparse.ArgumentTypeError("no letter is given")
    return values


def _run(arguments: argparse.Namespace) -> str:
    from importlib import import_module

    _check(arguments)
    view = import_module(f"sitesym.views.plan_{chosen_format(arguments)}")
    structure = read_structure(arguments)
    from sitesym.analysis import analyse
    from sitesym.experiment.run_sheet import plan

    analysis = analyse(structure, molecules=False, **analysis_options(arguments))
    return str(view.render(plan(analysis, **_options(arguments))))


def _check(arguments: argparse.Namespace) -> None:
    """Options that mean nothing without others."""
    if arguments.letters and not arguments.curves:
        raise UsageError("--letters are values for curves, and no curves are asked for.", "Add --curves FACE.")
    if arguments.fit is None and (arguments.species or arguments.complex):
        name = "--species" if arguments.species else "--complex"
        raise UsageError(f"{name} is for a fit, and none is asked for.", "Add --fit MEASURED.csv.")
    if arguments.fit is not None and len(arguments.face) != 1:
        raise UsageError("--fit needs the one face on which the curves were measured.", "Give it with --face.")


def _options(arguments: argparse.Namespace) -> dict[str, Any]:
    """Arguments of `sitesym.plan`; what was not given is left to its defaults."""
    options: dict[str, Any] = {
        "sample": arguments.sample,
        "faces": arguments.face,
        "edges": arguments.edge,
        "analyser": not arguments.no_analyser,
        "geometries": arguments.geometry,
        "infrared": arguments.infrared,
        "curves": arguments.curves,
        "letters": arguments.letters,
        "lasers": arguments.laser,
        "conditions": _conditions(arguments),
    }
    if arguments.fit is not None:
        from sitesym.experiment.angle_data import read_angle_data

        options |= {
            "measured": read_angle_data(arguments.fit, arguments.species or ""),
            "complex_letters": arguments.complex,
        }
    if arguments.mounts:
        options["mounts"] = tuple(dict.fromkeys(arguments.mounts))
    if arguments.temperature is not None:
        options["temperature"] = arguments.temperature
    return options


def _conditions(arguments: argparse.Namespace) -> Any:
    from sitesym.experiment.plan import Conditions

    given = {name: getattr(arguments, name) for name in ("tilt", "aperture", "index")}
    return Conditions(**{name: value for name, value in given.items() if value is not None})


PLAN = Command(
    "plan",
    "A run sheet for the sample at hand: the fewest polarized measurements, what each shows, bench and cautions.",
    _arguments,
    _run,
)
