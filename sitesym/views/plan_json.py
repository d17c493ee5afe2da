"""The JSON document of a run sheet, for other programs: a contract, whose keys are added to and never renamed.

Species are plain ASCII (`A1g`, `E'`), geometries as typed (`z(xy)-z`), infinite limits null with words beside them.
"""

from __future__ import annotations

import json
from math import isfinite
from typing import TYPE_CHECKING, Any

from sitesym.version import __version__
from sitesym.views.labels import characters

if TYPE_CHECKING:
    from sitesym.experiment.bench import CheckLine, LaserBench, Position
    from sitesym.experiment.plan import Measurement, Plan
    from sitesym.experiment.powder import PowderRow
    from sitesym.experiment.run_sheet import CurveFace, InfraredFace, RunSheet, Step
    from sitesym.experiment.shown import GeometryResult

SCHEMA = 1
Document = dict[str, Any]


def render(sheet: RunSheet) -> str:
    """The document as text, ending in a line feed."""
    return json.dumps(document(sheet), indent=2, allow_nan=False, ensure_ascii=True) + "\n"


def document(sheet: RunSheet) -> Document:
    """The document as plain dictionaries, lists, strings, numbers, booleans and None.

    `geometries` are those that the user named, then all that the faces allow; `least_plan.measurements` are indices
    into them.
    """
    analysis, sample = sheet.analysis, sheet.sample
    return {
        "schema": SCHEMA,
        "version": __version__,
        "formula": analysis.structure.formula,
        "space_group": {"number": analysis.symmetry.number, "hermann_mauguin": analysis.space_group},
        "axes": analysis.axes,
        "sample": {
            "kind": sample.kind,
            "faces": list(sample.faces),
            "assumed": sample.assumed,
            "edges": [edge.name for edge in sample.edges],
        },
        "geometries": _geometries(sheet),
        "least_plan": _least_plan(sheet),
        "unoriented": [
            {"name": one.name, "species": [{"label": label, "expression": text} for label, text in one.species]}
            for one in sheet.unoriented
        ],
        "powder": [_powder(row) for row in sheet.powder],
        "infrared": [_infrared(one) for one in sheet.infrared],
        "curves": [_curve_face(one) for one in sheet.curves],
        "fit": _fit(sheet),
        "bench": [_bench(bench) for bench in sheet.benches],
        "cautions": _cautions(sheet),
        "hazards": [
            {"kind": flag.kind, "cause": flag.cause, "words": flag.words, "source": flag.source}
            for flag in sheet.hazards.flags
        ],
    }


def _geometries(sheet: RunSheet) -> list[Document]:
    plan = sheet.raman
    if plan is None:
        return []
    asked = [_geometry(one.result, one.candidate.faces, one.candidate.mount) for one in plan.asked]
    if not plan.faces:
        return asked
    offered = zip(plan.results, plan.candidates, strict=True)
    return [*asked, *(_geometry(result, one.faces, one.mount) for result, one in offered)]


def _geometry(result: GeometryResult, faces: tuple[str, ...], mount: str) -> Document:
    return {
        "notation": result.geometry.notation,
        "face": " ".join(faces) or None,
        "mount": mount,
        "species": _species(result),
    }


def _species(result: GeometryResult) -> list[Document]:
    """One entry for each kind of phonon that is allowed; one for a species that is forbidden."""
    allowed = {one.label for one in result.allowed}
    entries: dict[tuple[str, str | None], Document] = {}
    for one in result.shown:
        if one.allowed:
            key = (one.label, one.phonon)
        elif one.label not in allowed:
            key = (one.label, None)
        else:
            continue
        entries.setdefault(
            key, {"label": one.label, "allowed": one.allowed, "phonon": key[1], "expression": one.expression}
        )
    return list(entries.values())


def _least_plan(sheet: RunSheet) -> Document:
    plan = sheet.raman
    if plan is None:
        lists: Document = {name: [] for name in ("measurements", "separated", "inseparable", "unseen")}
        return {**lists, "phonons_unseen": [], "further_face": None, "steps": [], "patterns": []}
    before = len(plan.asked) if plan.faces else 0
    return {
        "measurements": [before + index for index in plan.cover.chosen],
        "separated": [list(pair) for pair in plan.separated],
        "inseparable": [list(pair) for pair in plan.inseparable],
        "unseen": list(plan.unseen),
        "phonons_unseen": list(plan.other_phonons),
        "further_face": _further(plan),
        "cone": sheet.cone or None,
        "steps": [_step(step) for step in sheet.steps],
        "patterns": [
            {"name": one.name, "label": one.label, "phonon": one.phonon, "seen": list(one.seen)}
            for one in sheet.patterns
        ],
    }


def _further(plan: Plan) -> Document | None:
    if plan.further is None:
        return None
    return {"face": plan.further.face, "gains": [demand.words for demand in plan.further.meets]}


def _step(step: Step) -> Document:
    one, layout = step.measurement, step.layout
    return {
        "notation": one.result.geometry.notation,
        "reference": layout.reference.name if layout.reference else None,
        "laser_angle": layout.incoming,
        "analyser_angle": layout.outgoing,
        "leaks": _leaks(one),
        "optics": [*(note.words for note in one.beams), *filter(None, (one.activity, step.refraction))],
    }


def _leaks(one: Measurement) -> list[Document]:
    return [
        {"label": leak.label, "misorientation": float(leak.misorientation), "aperture": float(leak.aperture)}
        for leak in one.leaks
    ]


def _powder(row: PowderRow) -> Document:
    low, high = row.depolarization
    resonance = row.resonance
    return {
        "label": row.label,
        "depolarization": [_finite(low), _finite(high)],
        "resonance": None if resonance is None else [_finite(resonance[0]), _finite(resonance[1])],
        "parallel": row.parallel,
        "crossed": row.crossed,
        "words": row.words,
    }


def _finite(value: float) -> float | None:
    """Infinity is no number of JSON: null, and `words` says without limit."""
    return float(value) if isfinite(value) else None


def _infrared(one: InfraredFace) -> Document:
    return {
        "face": one.face,
        "directions": [
            {
                "electric": row.direction.name,
                "incidence": row.incidence,
                "species": [
                    {"label": band.label, "phonon": band.phonon, "coupling": band.coupling, "free": band.free}
                    for band in row.allowed
                ],
            }
            for row in one.rows
        ],
    }


def _curve_face(one: CurveFace) -> Document:
    return {
        "face": one.axes.face,
        "reference": one.axes.reference.name,
        "across": one.axes.across.name,
        "curves": [
            {
                "label": curve.label,
                "phonon": curve.phonon,
                "letters": {
                    letter: _letter(complex(value)) for letter, value in zip(curve.letters, curve.values, strict=True)
                },
                "assumed": list(curve.assumed),
                "parallel_expression": curve.parallel_expression,
                "crossed_expression": curve.crossed_expression,
                "degrees": _numbers(curve.degrees),
                "parallel": _numbers(curve.parallel),
                "crossed": _numbers(curve.crossed),
            }
            for curve in one.curves
        ],
        "notes": list(one.notes),
    }


def _fit(sheet: RunSheet) -> Document | None:
    fit = sheet.fit
    if fit is None:
        return None
    return {
        "label": fit.seen.label,
        "phonon": fit.seen.phonon,
        "face": fit.axes.face,
        "reference": fit.axes.reference.name,
        "letters": {
            letter: _letter(complex(value)) for letter, value in zip(fit.seen.letters, fit.letters, strict=True)
        },
        "values": [
            {
                "name": one.name,
                "value": one.value,
                "error": None if one.error is None else _finite(one.error),
                "unit": one.unit,
                "held": one.held,
                "words": one.words,
            }
            for one in fit.values
        ],
        "chi_square": fit.chi_square,
        "freedom": fit.freedom,
        "probability": fit.probability,
        "error_words": fit.error_words,
        "undecided": list(fit.undecided),
        "doubts": list(fit.doubts),
        "others": [
            {"exact": one.exact, "offset": one.offset, "chi_square": one.chi_square, "words": one.words}
            for one in fit.others
        ],
    }


def _letter(value: complex) -> float | list[float]:
    """A real letter as a number, a complex one as [real, imaginary]."""
    return value.real if not value.imag else [value.real, value.imag]


def _numbers(values: Any) -> list[float]:
    return [round(float(value), 9) + 0.0 for value in values]


def _bench(bench: LaserBench) -> Document:
    laser = bench.laser
    return {
        "laser": {
            "name": laser.name or None,
            "air": laser.air,
            "vacuum": laser.vacuum,
            "wavenumber": laser.wavenumber,
            "fixed": laser.fixed,
        },
        "span": [_position(one) for one in bench.ends],
        "filters": [_position(one) for one in bench.filters],
        "standards": [_line(one) for one in bench.standards],
        "lamps": [_line(one) for one in bench.lamps],
        "false_lines": [_line(one) for one in bench.false_lines],
        "temperature": bench.temperature,
        "anti_stokes_over_stokes": [
            {"shift": one.shift, "photons": one.photons, "power": one.power} for one in bench.ratios
        ],
    }


def _position(one: Position) -> Document:
    return {"shift": one.shift, "stokes": one.stokes, "anti_stokes": one.anti_stokes}


def _line(one: CheckLine) -> Document:
    return {"source": one.source, "shift": one.shift, "air": one.air, "strength": one.strength, "note": one.note}


def _cautions(sheet: RunSheet) -> list[str]:
    """All cautions as sentences: flags of the sample, of the measurement, of the structure."""
    hazards = sheet.hazards
    said = [hazards.preface, *(f"{flag.kind}: {flag.words}" for flag in hazards.flags)]
    said += [one.words for one in hazards.cautions]
    said += [characters(question.message) for question in sheet.analysis.cautions]
    return said
