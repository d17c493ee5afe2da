"""Lists of bands: one band a line, its columns found by name, or by place where no header names them."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from sitesym.bands.axis import Axis, axis_of
from sitesym.bands.columns import letters, technique_of
from sitesym.bands.measurement import DEFAULT_UNCERTAINTY, TECHNIQUES, Band
from sitesym.bands.tables import Row, Table, value
from sitesym.errors import ReadError, UsageError
from sitesym.reading.text import listed, printable

MOST_BANDS = 1000
"""No list of bands is longer; a spectrum is."""

_BY_PLACE = ("wavenumber", "intensity", "width", "uncertainty")
_BEAM = r"-?(?:[xyz]\u0304?|\[[^\]]*\]|\([-+\d\s,]+\))"
_GEOMETRY = re.compile(rf"{_BEAM}\s*\(.+\)\s*{_BEAM}")


@dataclass(frozen=True, slots=True)
class BandList:
    """The bands of one file; notes say what was not used or taken for granted."""

    bands: tuple[Band, ...]
    notes: tuple[str, ...]


def band_list(table: Table, technique: str, unit: str, laser: float | None) -> BandList:
    """Every band of a table.

    technique   "raman" or "infrared", or "" where a column tells it for each band.

    Raises ReadError with the line for what is no band, UsageError where the technique is not known.
    """
    if len(table.rows) > MOST_BANDS:
        raise ReadError(
            f"{table.source} has {len(table.rows)} lines, too many for a list of bands.",
            f"Give at most {MOST_BANDS} bands, or say that it is a spectrum.",
        )
    places = _places(table)
    rows = [(row, _cells(row, table, places)) for row in table.rows]
    stated = _stated_unit(table) or unit
    by_technique = [_technique(cells, row, table.source, technique) for row, cells in rows]
    numbers = [_required(cells["wavenumber"], row, table.source) for row, cells in rows]
    axes = {one: _axis(one, by_technique, numbers, stated, laser, table.source) for one in set(by_technique)}
    bands = tuple(
        _band(row, cells, number, axes[one], table.source)
        for (row, cells), number, one in zip(rows, numbers, by_technique, strict=True)
    )
    unused = [column.text for column in table.columns if not column.field]
    notes = [f"not used: the column {listed(unused)}"] if unused else []
    words = dict.fromkeys(axis.words for axis in axes.values() if axis.words)
    return BandList(bands, (*words, *notes))


def _axis(
    technique: str, techniques: Sequence[str], numbers: Sequence[float], unit: str, laser: float | None, source: str
) -> Axis:
    mine = [number for number, one in zip(numbers, techniques, strict=True) if one == technique]
    return axis_of(np.array(mine), unit, technique, laser, source)


def _stated_unit(table: Table) -> str:
    """The unit of the column of wavenumbers. Raises ReadError for one that is not known, or a wavelength without."""
    for column in table.columns:
        if column.field != "wavenumber":
            continue
        needs_unit = column.name in ("wavelength", "wavelengths", "lambda", "λ", "energy")
        if column.other or (needs_unit and not column.unit):
            raise ReadError(
                f"{table.source}: the unit of the column '{printable(column.text, 40)}' is not known.",
                "Write cm-1, nm, um, meV or THz behind its name, in brackets.",
            )
        return column.unit
    return ""


# Cells


def _places(table: Table) -> dict[str, int]:
    """Which column holds what. Raises ReadError where two hold the same."""
    places: dict[str, int] = {}
    for number, column in enumerate(table.columns):
        field = "width" if column.field == "half_width" else column.field
        if not field:
            continue
        if field in places and field != "note":
            first = table.columns[places[field]].text
            raise ReadError(
                f"{table.source}: the columns '{printable(first, 40)}' and '{printable(column.text, 40)}' "
                f"both give the {field}.",
                "Keep one of them, or write each spectrum into a file of its own.",
            )
        places.setdefault(field, number)
    return places


def _cells(row: Row, table: Table, places: Mapping[str, int]) -> dict[str, str]:
    if not table.columns:
        return _by_place(row)
    found = {field: row.cells[number] for field, number in places.items() if number < len(row.cells)}
    notes = [row.cells[k] for k, one in enumerate(table.columns) if one.field == "note" and k < len(row.cells)]
    if notes:
        found["note"] = "; ".join(filter(None, notes))
    half = any(column.field == "half_width" for column in table.columns)
    if half and found.get("width"):
        found["half"] = "yes"
    return {"wavenumber": "", **found}


def _by_place(row: Row) -> dict[str, str]:
    """Numbers are wavenumber, intensity, width and uncertainty in this order; words are what they look like."""
    found: dict[str, str] = {}
    words: list[str] = []
    numbers = list(_BY_PLACE)
    for cell in row.cells:
        if not cell and numbers and not words:
            numbers.pop(0)
        elif value(cell) is not None and numbers and not words:
            found[numbers.pop(0)] = cell
        elif letters(cell) is not None and "intensity" not in found and not words:
            found["intensity"] = cell
            numbers = [one for one in numbers if one != "intensity"]
        elif _is_geometry(cell) and "geometry" not in found:
            found["geometry"] = cell
        elif technique_of(cell) and "technique" not in found and cell.lower() in TECHNIQUES:
            found["technique"] = cell
        else:
            words.append(cell)
    if "wavenumber" not in found:
        found["wavenumber"] = row.cells[0]
        words = words[1:]
    return {**found, "note": " ".join(filter(None, words))}


def _is_geometry(cell: str) -> bool:
    """Whether it is written like ki(ei es)ks; whether the polarizations lie across their beams the crystal tells."""
    return _GEOMETRY.fullmatch(cell) is not None


def _typed(geometry: str) -> str:
    """`z(xx)z̄` as it is typed, `z(xx)-z`."""
    return re.sub("([xyz])\u0304", r"-\1", geometry)


def _technique(cells: Mapping[str, str], row: Row, source: str, given: str) -> str:
    word = cells.get("technique", "")
    own = technique_of(word) if word else ""
    if word and not own:
        raise ReadError(
            f"{source}, line {row.line}: '{printable(word, 40)}' is no technique.", "Write raman or infrared."
        )
    if own and given and own != given:
        raise ReadError(
            f"{source}, line {row.line} is {own}, but the file was given as {given}.",
            "Give a list that holds both with --bands.",
        )
    if not own and not given:
        raise UsageError(
            f"{source}, line {row.line}: nothing tells whether it is Raman or infrared.",
            "Give the file with --raman or --infrared, or add a column 'technique'.",
        )
    return own or given


def _required(cell: str, row: Row, source: str) -> float:
    found = value(cell)
    if found is None:
        what = f"'{printable(cell, 40)}' is no number" if cell else "there is no wavenumber"
        raise ReadError(
            f"{source}, line {row.line}: {what}.",
            "Write plain numbers such as 711.3 or 711,3, no thousands separators; begin other lines with #.",
        )
    return found[0]


def _band(row: Row, cells: Mapping[str, str], number: float, axis: Axis, source: str) -> Band:
    wavenumber = float(axis.wavenumbers(np.array([number]))[0])
    if not wavenumber > 0:
        raise ReadError(
            f"{source}, line {row.line}: a band at {wavenumber:g} cm⁻¹ makes no sense.",
            "Give Stokes shifts or infrared wavenumbers, all positive.",
        )
    slope = float(axis.slope(np.array([number]))[0])
    found = value(cells["wavenumber"])
    own = found[1] if found else None
    uncertainty = _optional(cells, "uncertainty", row, source, slope) or (own * slope if own else None)
    width = _optional(cells, "width", row, source, slope * (2 if "half" in cells else 1))
    geometry, note = _geometry(cells)
    intensity, word = _intensity(cells, row, source)
    note = "; ".join(filter(None, (word, note)))
    return Band(
        round(wavenumber, 4), axis.technique, round(uncertainty, 4) if uncertainty else DEFAULT_UNCERTAINTY, intensity,
        width, geometry, printable(note),
    )  # fmt: skip


def _optional(cells: Mapping[str, str], field: str, row: Row, source: str, slope: float) -> float | None:
    """A positive number in cm⁻¹; None where the cell is empty or says that there is none."""
    cell = cells.get(field, "")
    if cell in ("", "-", "–", "—"):
        return None
    found = value(cell.lstrip("±"))
    if found is None or not found[0] > 0:
        raise ReadError(
            f"{source}, line {row.line}: '{printable(cell, 40)}' is no {field}.", "Give a positive number, or nothing."
        )
    return found[0] * slope


def _intensity(cells: Mapping[str, str], row: Row, source: str) -> tuple[float | None, str]:
    """An intensity as a number, and the letters that stood for it."""
    cell = cells.get("intensity", "")
    if cell in ("", "-", "–", "—"):
        return None, ""
    found, meant = value(cell), letters(cell)
    if found is None and meant is None:
        raise ReadError(
            f"{source}, line {row.line}: '{printable(cell, 40)}' is no intensity.",
            "Give a number, or letters such as vs, s, m, w, vw.",
        )
    return (found[0], "") if found else (meant, cell)


def _geometry(cells: Mapping[str, str]) -> tuple[str, str]:
    """A scattering geometry, and the note; a polarization that is no geometry goes into the note."""
    cell, note = cells.get("geometry", ""), cells.get("note", "")
    if not cell or _is_geometry(cell):
        return _typed(cell), note
    return "", "; ".join(filter(None, (f"polarization {cell}", note)))
