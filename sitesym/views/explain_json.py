"""The JSON document of an explanation, for other programs: a contract, whose keys are added to and never renamed.

Labels are plain ASCII, wavenumbers in cm⁻¹, and the document is strict JSON. Reasons are in order of rank; `score`
serves to rank and is no probability. `bands` are those that were measured or picked, in rising order within each
technique.
"""

from __future__ import annotations

import json
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from sitesym.version import __version__
from sitesym.views.explain_paragraph import paragraph
from sitesym.views.explain_words import lowered_words
from sitesym.views.labels import Style, characters

if TYPE_CHECKING:
    from sitesym.bands.explanation import BandResult, Explanation
    from sitesym.bands.inventory import Family
    from sitesym.bands.lowering import Lowering
    from sitesym.bands.measurement import Band
    from sitesym.bands.missing import Missing
    from sitesym.bands.reading import Record
    from sitesym.bands.reasons import Reason

SCHEMA = 1
Document = dict[str, Any]


def _same(label: str) -> str:
    return label


_PLAIN = Style(_same, _same, _same, _same, characters)


def render(explanation: Explanation, records: Sequence[Record] = ()) -> str:
    """The document as text, ending in a line feed."""
    return json.dumps(document(explanation, records), indent=2, allow_nan=False, ensure_ascii=True) + "\n"


def document(explanation: Explanation, records: Sequence[Record] = ()) -> Document:
    """The document as plain dictionaries, lists, strings, numbers, booleans and None."""
    return {
        "schema": SCHEMA,
        "version": __version__,
        "summary": paragraph(explanation, _PLAIN),
        "input": _input(explanation, records),
        "bands": [_band_result(one) for one in explanation.bands],
        "missing": [_missing(one) for one in explanation.missing],
        "lowering": [_lowering(one, explanation) for one in explanation.lowerings],
        "coincidences": _coincidences(explanation),
        "families": [_family(one) for one in explanation.families],
    }


def _input(explanation: Explanation, records: Sequence[Record]) -> Document:
    analysis = explanation.analysis
    return {
        "path": characters(analysis.structure.source),
        "name": characters(analysis.structure.name),
        "formula": analysis.formula,
        "space_group": {"number": analysis.symmetry.number, "hermann_mauguin": analysis.space_group},
        "factor_group": {"schoenflies": analysis.factor_group.schoenflies, "axes": analysis.axes},
        "warnings": [{"code": one.code, "message": characters(one.message)} for one in analysis.cautions],
        "measurements": [_record(one) for one in records],
    }


def _record(record: Record) -> Document:
    return {
        "path": characters(record.source),
        "kind": "list" if record.picks is None else "spectrum",
        "bands": len(record.bands),
        "notes": list(record.notes),
    }


def _band_result(result: BandResult) -> Document:
    band, family = result.band, result.placed.family
    return {
        **_place(band),
        "uncertainty": float(band.uncertainty),
        "intensity": _number(band.intensity),
        "width": _number(band.width),
        "geometry": characters(band.geometry),
        "note": characters(band.note),
        "assignment": _assignment(family, band) if family else None,
        "alternatives": [_assignment(other, band) for other in result.placed.alternatives],
        "reasons": [_reason(one) for one in result.reasons],
    }


def _number(value: float | None) -> float | None:
    return None if value is None else float(value)


def _place(band: Band) -> Document:
    return {"wavenumber": float(band.wavenumber), "technique": band.technique}


def _assignment(family: Family, band: Band) -> Document:
    """`species` are those of the factor group that the technique shows, `free_species` that of the free unit."""
    return {
        "unit": family.unit,
        "vibration": family.vibration,
        "species": [one.label for one in family.active(band.technique)],
        "free_species": family.free_species or None,
    }


def _reason(reason: Reason) -> Document:
    return {
        "cause": reason.cause,
        "argument": reason.argument,
        "parents": [float(one) for one in reason.parents],
        "species": list(reason.species),
        "decisive_test": reason.decisive_test,
        "score": round(float(reason.score), 4),
    }


def _missing(one: Missing) -> Document:
    return {
        "unit": one.family.unit,
        "vibration": one.family.vibration,
        "technique": one.technique,
        "allowed": one.allowed,
        "seen": one.seen,
        "reasons": list(one.reasons),
    }


def _lowering(one: Lowering, explanation: Explanation) -> Document:
    return {
        "group": one.name,
        "hermann_mauguin": lowered_words(one, explanation, _PLAIN).partition("(")[2].rstrip(")"),
        "order": one.subgroup.order,
        "explains": [_place(band) for band in one.explains],
        "fails": [_place(band) for band in one.fails],
        "infrared": one.infrared,
        "raman": one.raman,
    }


def _coincidences(explanation: Explanation) -> Document:
    found = explanation.coincidences
    return {
        "pairs": [{"raman": float(one.wavenumber), "infrared": float(two.wavenumber)} for one, two in found.pairs],
        "expected": float(found.expected),
        "chance": float(found.chance),
        "allowed": found.allowed,
    }


def _family(family: Family) -> Document:
    return {
        "unit": family.unit,
        "vibration": family.vibration,
        "free_species": family.free_species or None,
        "wavenumber": _number(family.wavenumber),
        "window": [float(end) for end in family.window],
        "species": {one.label: one.count for one in family.components},
        "raman": family.capacity("raman"),
        "infrared": family.capacity("infrared"),
    }
