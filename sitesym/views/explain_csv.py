"""An explanation as comma-separated values: reasons of each band, what is missing, lower symmetries, families.

The first table has one row for each band and reason, `rank` 1 being the best. Text from files cannot act as a formula
in a spreadsheet (see `sitesym.views.csv`).
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

from sitesym.views.csv import Cell, table
from sitesym.views.explain_words import number

if TYPE_CHECKING:
    from sitesym.bands.explanation import BandResult, Explanation
    from sitesym.bands.measurement import Band
    from sitesym.bands.reading import Record

BAND_COLUMNS = (
    "technique", "wavenumber", "uncertainty", "intensity", "width", "geometry", "note", "unit", "vibration", "rank",
    "cause", "score", "species", "parents", "argument", "decisive_test",
)  # fmt: skip
MISSING_COLUMNS = ("technique", "unit", "vibration", "free_species", "allowed", "seen", "reasons")
LOWERING_COLUMNS = ("group", "order", "raman", "infrared", "explains", "fails")
FAMILY_COLUMNS = (
    "unit",
    "vibration",
    "free_species",
    "wavenumber",
    "lowest",
    "highest",
    "species",
    "raman",
    "infrared",
)


def render(explanation: Explanation, records: Sequence[Record] = ()) -> str:
    """All tables as one text, an empty line between two."""
    del records
    tables = (
        bands_table(explanation),
        missing_table(explanation),
        lowering_table(explanation),
        families_table(explanation),
    )
    return "\n".join(tables)


def bands_table(explanation: Explanation) -> str:
    """Every reason of every band."""
    return table(BAND_COLUMNS, [row for one in explanation.bands for row in _rows(one)])


def _rows(result: BandResult) -> Iterator[tuple[Cell, ...]]:
    band, family = result.band, result.placed.family
    for rank, reason in enumerate(result.reasons, start=1):
        yield (
            band.technique, float(band.wavenumber), float(band.uncertainty), _cell(band.intensity), _cell(band.width),
            band.geometry, band.note, family.unit if family else "", family.vibration if family else "", rank,
            reason.cause, round(float(reason.score), 4), " ".join(reason.species),
            " ".join(f"{one:g}" for one in reason.parents), reason.argument, reason.decisive_test,
        )  # fmt: skip


def _cell(value: float | None) -> Cell:
    return "" if value is None else float(value)


def missing_table(explanation: Explanation) -> str:
    """What is allowed and was not seen."""
    return table(
        MISSING_COLUMNS,
        [
            (one.technique, one.family.unit, one.family.vibration, one.family.free_species, one.allowed, one.seen,
             "; ".join(one.reasons))
            for one in explanation.missing
        ],
    )  # fmt: skip


def lowering_table(explanation: Explanation) -> str:
    """Lower symmetries that would give bands a place."""
    return table(
        LOWERING_COLUMNS,
        [
            (one.name, one.subgroup.order, one.raman, one.infrared, _bands(one.explains), _bands(one.fails))
            for one in explanation.lowerings
        ],
    )


def _bands(bands: Sequence[Band]) -> str:
    return "; ".join(f"{band.technique} {number(band)}" for band in bands)


def families_table(explanation: Explanation) -> str:
    """What symmetry predicts."""
    return table(
        FAMILY_COLUMNS,
        [
            (one.unit, one.vibration, one.free_species, _cell(one.wavenumber), float(one.window[0]),
             float(one.window[1]), " ".join(f"{part.count}{part.label}" for part in one.components),
             one.capacity("raman"), one.capacity("infrared"))
            for one in explanation.families
        ],
    )  # fmt: skip
