"""Measured angle-resolved intensities of one band, and how they are read from a CSV file.

The first line that is no comment (#) names the columns, in any order; others are left aside:

    angle;parallel;crossed;error
    0;1203,5;88,1;15
    10;1187,0;131,4;15

angle in degrees; parallel, crossed: intensity of the band with the analyser along and across the laser's polarization
(one of them may be missing, and single cells may be empty); error: one standard error for both, or `parallel error` and
`crossed error`; species: the species that the band is assigned to. Fields are divided by semicolons, tabs, commas or
blanks; a decimal comma is read where the comma does not divide fields.
"""

from __future__ import annotations

import csv
import os
import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from sitesym.errors import ReadError, UsageError
from sitesym.groups.operation import Booleans, Floats

_NAMES = {
    "angle": ("angle", "theta", "θ", "rotation", "degrees"),
    "parallel": ("parallel", "∥", "par"),
    "crossed": ("crossed", "cross", "perpendicular", "⊥", "perp"),
    "error": ("error", "standard error", "sigma", "σ", "uncertainty"),
    "parallel error": ("parallel error", "error parallel", "sigma parallel", "parallel sigma"),
    "crossed error": ("crossed error", "error crossed", "sigma crossed", "crossed sigma"),
    "species": ("species",),
}
_INTENSITIES = ("parallel", "crossed")
_ERRORS = ("parallel_error", "crossed_error")
_HEADER = "Begin the file with a line such as: angle,parallel,crossed,error."


@dataclass(frozen=True, eq=False)
class AngleData:
    """Measured intensities of one band; rows of numbers are taken over as arrays.

    species          label of the species it is assigned to, `Eg`, or of one kind of its phonons, `E(TO)`.
    degrees          (n,) angle of the laser's polarization from the reference direction, as in `AngleCurve`.
    parallel         (n,) intensity in any unit, not a number where it was not measured; None if never.
    crossed          likewise.
    parallel_error   (n,) standard errors in the same unit, None where not known; crossed_error likewise.
    """

    species: str
    degrees: Floats
    parallel: Floats | None = None
    crossed: Floats | None = None
    parallel_error: Floats | None = None
    crossed_error: Floats | None = None

    def __post_init__(self) -> None:
        """Raises UsageError where the arrays do not fit together."""
        for name in ("degrees", *_INTENSITIES, *_ERRORS):
            if getattr(self, name) is not None:
                object.__setattr__(self, name, _as_row(getattr(self, name), name))
        if not np.isfinite(self.degrees).all():
            raise UsageError("An angle is no finite number.", "Give one angle in degrees for each point.")
        for name in (*_INTENSITIES, *_ERRORS):
            values = getattr(self, name)
            if values is not None and len(values) != len(self.degrees):
                raise UsageError(
                    f"There are {len(self.degrees)} angles and {len(values)} values of {name}.", "Give as many of each."
                )
        curves = [name for name in _INTENSITIES if getattr(self, name) is not None]
        if not curves:
            raise UsageError("There are angles and no intensities.", "Give parallel or crossed intensities, or both.")
        if len({getattr(self, f"{name}_error") is None for name in curves}) > 1:
            raise UsageError(
                "Standard errors are given for one of the two curves only.", "Give them for both, or none."
            )
        for name in curves:
            _check(getattr(self, name), getattr(self, f"{name}_error"), name)

    @property
    def has_errors(self) -> bool:
        """Whether standard errors were stated."""
        return self.parallel_error is not None or self.crossed_error is not None


def _as_row(values: Floats, name: str) -> Floats:
    try:
        row = np.asarray(values, dtype=float)
    except (TypeError, ValueError):
        raise UsageError(f"The values of {name} are not all numbers.", "Give one number for each angle.") from None
    if row.ndim != 1:
        raise UsageError(f"The values of {name} are no single row.", "Give one number for each angle.")
    return row


def _check(values: Floats, errors: Floats | None, name: str) -> None:
    if np.isinf(values).any():
        raise UsageError(f"A {name} intensity is infinite.", "Correct it, or leave it out.")
    there = measured(values)
    if errors is not None and not (np.isfinite(errors[there]) & (errors[there] > 0)).all():
        raise UsageError(f"A standard error of the {name} curve is missing, zero or negative.", "Correct it.")


def measured(values: Floats) -> Booleans:
    """(n,) whether there is a value."""
    return ~np.isnan(values)


def read_angle_data(path: str | os.PathLike[str], species: str = "") -> AngleData:
    """Read a CSV file (see the module).

    species  assignment of the band; it overrides a column `species`.

    Raises ReadError for a file that cannot be read or a line that makes no sense, with its number; UsageError where
    neither the file nor the caller names the species.
    """
    from sitesym.reading.source import open_source

    given = open_source(path)
    if given.is_binary:
        raise ReadError(f"{given.name} is no text file.", "Save the curve as CSV.")
    rows = list(_rows(given.text))
    if not rows:
        raise ReadError(f"{given.name} has no lines but comments.", _HEADER)
    columns = _columns(rows[0][1], given.name)
    body = rows[1:]
    table = {
        name: np.array(
            [_number(fields, k, name, f"{given.name}, line {line}") for line, fields in _full(rows, given.name)]
        )
        for name, k in columns.items()
        if name != "species"
    }
    if not len(body):
        raise ReadError(f"{given.name} has a first line with names and no data.", "Add one line for each angle.")
    return _assembled(table, species or _species(body, columns, given.name), given.name)


def _rows(text: str) -> Iterator[tuple[int, list[str]]]:
    """Number and fields of every line that is neither empty nor a comment."""
    lines = [
        (number, line)
        for number, line in enumerate(text.lstrip("\ufeff").splitlines(), start=1)
        if line.strip() and not line.lstrip().startswith("#")
    ]
    first = lines[0][1] if lines else ""
    separator = next((one for one in (";", "\t", ",") if one in first), None)
    for number, line in lines:
        fields = line.split() if separator is None else next(csv.reader([line], delimiter=separator))
        yield number, [field.strip().replace(",", ".") if number != lines[0][0] else field.strip() for field in fields]


def _columns(header: Sequence[str], source: str) -> dict[str, int]:
    """Which field holds what; units in brackets behind a name do not matter."""
    words = [re.sub(r"\s*[\[(].*?[\])]", "", name).strip().strip('"').lower().replace("_", " ") for name in header]
    found: dict[str, int] = {}
    for name, accepted in _NAMES.items():
        places = [k for k, word in enumerate(words) if word in accepted]
        if len(places) > 1:
            raise ReadError(f"{source} has two columns for '{name}'.", "Keep one of them.")
        if places:
            found[name] = places[0]
    if "angle" not in found or not {"parallel", "crossed"} & set(found):
        raise ReadError(f"{source} names no columns 'angle' and 'parallel' or 'crossed' in its first line.", _HEADER)
    return found


def _full(rows: Sequence[tuple[int, list[str]]], source: str) -> Iterator[tuple[int, list[str]]]:
    """The lines of data, each with as many fields as there are names."""
    width = len(rows[0][1])
    for line, fields in rows[1:]:
        while len(fields) > width and not fields[-1]:
            fields = fields[:-1]
        if len(fields) != width:
            raise ReadError(
                f"{source}, line {line} has {len(fields)} fields, its first line {width}.",
                "Where decimal commas are used, divide the fields by semicolons.",
            )
        yield line, fields


def _number(fields: Sequence[str], place: int, name: str, where: str) -> float:
    word = fields[place]
    if not word and name != "angle":
        return float("nan")
    try:
        value = float(word)
    except ValueError:
        value = float("nan")
    if not np.isfinite(value):
        raise ReadError(f"{where}: '{word}' is no number for '{name}'.", "Correct it, or leave the cell empty.")
    return value


def _species(body: Sequence[tuple[int, list[str]]], columns: dict[str, int], source: str) -> str:
    named = {fields[columns["species"]] for _, fields in body} - {""} if "species" in columns else set()
    if len(named) > 1:
        raise ReadError(f"{source} names {len(named)} species.", "Put the curves of each band in a file of its own.")
    if not named:
        raise UsageError(
            f"{source} does not say to which species the band is assigned.", "Name it, or add a column 'species'."
        )
    return named.pop()


def _assembled(table: dict[str, Floats], species: str, source: str) -> AngleData:
    common = table.get("error")
    curves = {name: table[name] for name in _INTENSITIES if name in table}
    errors = {f"{name}_error": table.get(f"{name} error", common) for name in curves}
    try:
        return AngleData(species, table["angle"], **curves, **errors)
    except UsageError as error:
        raise ReadError(f"{source}: {error.problem}", error.mend) from None
