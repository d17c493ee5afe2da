"""A run sheet as comma-separated values: the measurements, and after an empty line the angle-resolved curves.

Text cells that a spreadsheet would take for a formula get an apostrophe in front (see `sitesym.views.csv`).
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from typing import TYPE_CHECKING

from sitesym.views.csv import Cell, table
from sitesym.views.plan_words import percent

if TYPE_CHECKING:
    from sitesym.experiment.run_sheet import RunSheet, Step

MEASUREMENT_COLUMNS = (
    "number", "notation", "faces", "mount", "laser_polarization", "laser_angle", "analyser", "analyser_angle",
    "species", "phonon", "allowed", "expression", "leak_by_tilt",
)  # fmt: skip
CURVE_COLUMNS = ("face", "species", "phonon", "theta_degrees", "parallel", "crossed")


def render(sheet: RunSheet) -> str:
    """Both tables as one text; the second only where curves were asked for."""
    tables = [table(MEASUREMENT_COLUMNS, _measurements(sheet))]
    if sheet.curves:
        tables.append(table(CURVE_COLUMNS, _curves(sheet)))
    return "\n".join(tables)


def _measurements(sheet: RunSheet) -> Iterator[tuple[Cell, ...]]:
    for number, step in enumerate(sheet.steps, start=1):
        yield from _step(number, step)
    for number, one in enumerate(sheet.unoriented, start=1):
        for label, text in one.species:
            yield (number, one.name, "", "", "", "", one.name, "", label, "", "yes", _ascii(text), "")


def _step(number: int, step: Step) -> Iterator[tuple[Cell, ...]]:
    one, layout = step.measurement, step.layout
    geometry = one.result.geometry
    leaks = {leak.label: leak.misorientation for leak in one.leaks}
    head: tuple[Cell, ...] = (
        number, _ascii(geometry.notation), " ".join(one.candidate.faces), one.candidate.mount,
        _ascii(geometry.incoming.name), _angle(layout.incoming), _ascii(geometry.outgoing.name),
        _angle(layout.outgoing),
    )  # fmt: skip
    for shown in one.result.allowed:
        yield (*head, shown.label, shown.phonon or "", "yes", _ascii(shown.expression), "")
    for label, share in leaks.items():
        yield (*head, label, "", "no", "0", percent(share))


def _ascii(text: str) -> str:
    """Our own signs without those that a spreadsheet misreads when it guesses the encoding."""
    return re.sub(r"√(\d+)", r"sqrt(\1)", text.replace("²", "^2").replace("°", ""))


def _angle(degrees: float | None) -> Cell:
    return "" if degrees is None else round(degrees, 3)


def _curves(sheet: RunSheet) -> Iterator[tuple[Cell, ...]]:
    for one in sheet.curves:
        for curve in one.curves:
            if curve.allowed:
                points = zip(curve.degrees, curve.parallel, curve.crossed, strict=True)
                for degrees, parallel, crossed in points:
                    yield (
                        one.axes.face, curve.label, curve.phonon or "", round(float(degrees), 6),
                        round(float(parallel), 9) + 0.0, round(float(crossed), 9) + 0.0,
                    )  # fmt: skip
