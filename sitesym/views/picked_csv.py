"""Bands picked from spectra as a list that can be edited and read again by `read_bands`."""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING

from sitesym.views.csv import Cell, table
from sitesym.views.labels import printable

if TYPE_CHECKING:
    from sitesym.bands.measurement import Band
    from sitesym.bands.reading import Record

COLUMNS = ("technique", "wavenumber (cm-1)", "uncertainty (cm-1)", "intensity", "width (cm-1)", "geometry", "note")


def render(records: Iterable[Record]) -> str:
    """The bands of all files, each file led by a comment that names it."""
    parts = []
    header, _, _ = table(COLUMNS, []).partition("\n")
    for record in records:
        _, _, rows = table(COLUMNS, [_row(band) for band in record.bands]).partition("\n")
        parts.append(f"# {printable(record.source)}\n{rows}")
    return f"{header}\n{''.join(parts)}"


def _row(band: Band) -> tuple[Cell, ...]:
    return (
        band.technique, float(band.wavenumber), float(band.uncertainty),
        "" if band.intensity is None else float(band.intensity), "" if band.width is None else float(band.width),
        band.geometry, band.note,
    )  # fmt: skip
