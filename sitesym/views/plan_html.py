"""The run sheet as one self-contained HTML page: the first printed sheet holds all that is needed at the spectrometer.

Then come the details, part by part, each a template of its own in `templates/plan`. No script, no download; for screen
(light, dark, small, wide) and print. Everything is escaped: by the templates, or by the functions that set symbols.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from sitesym.version import __version__
from sitesym.views import plan_symbols as symbols
from sitesym.views import plan_words as words
from sitesym.views import sentences
from sitesym.views.labels import HTML
from sitesym.views.plan_method import plan_paragraphs, plan_references
from sitesym.views.templating import environment, ready

if TYPE_CHECKING:
    from sitesym.experiment.bench import CheckLine
    from sitesym.experiment.run_sheet import CurveFace, RunSheet, Step

Values = dict[str, Any]


@dataclass(frozen=True, slots=True)
class Part:
    """One section of details: `name` is its template and its anchor; without contents (None) it is left out."""

    name: str
    title: str
    contents: Callable[[RunSheet], Values | None]


def render(sheet: RunSheet) -> str:
    """The page, under the name that all views share."""
    analysis = sheet.analysis
    shown = [(part, contents) for part in PARTS if (contents := part.contents(sheet)) is not None]
    return environment().get_template("plan.html").render(
        title=f"Run sheet: {analysis.formula}, {sentences.space_group_words(analysis)}",
        structure=analysis.structure,
        compound=analysis.formula,
        crystal=ready(sentences.space_group_words(analysis, HTML)),
        sample=ready(words.sample_words(sheet, HTML)),
        axes=analysis.axes,
        lasers=[words.laser_words(bench) for bench in sheet.benches],
        flags=words.flag_words(sheet),
        serious=sentences.serious_cautions(analysis),
        fit=_fit(sheet),
        cards=[_card(number, step, sheet) for number, step in enumerate(sheet.steps, start=1)],
        needed=words.needed(sheet) if len(sheet.needed) < len(sheet.steps) else "",
        patterns=[(ready(symbols.species(one.name, HTML)), one) for one in sheet.patterns],
        moving=any(one.moves for one in sheet.patterns),
        left=[ready(said) for said in words.undecided(sheet.raman, HTML)] if sheet.raman and sheet.steps else [],
        unoriented=_unoriented(sheet),
        silent=_silent(sheet),
        parts=shown,
        version=__version__,
    )  # fmt: skip


@dataclass(frozen=True, slots=True)
class Card:
    """One measurement on the sheet, all its text ready for HTML. seen: (species, expression)."""

    number: int
    sketch: str
    notation: str
    place: str
    lights: str
    seen: tuple[tuple[str, str], ...]
    forbidden: str
    compare: str


def _card(number: int, step: Step, sheet: RunSheet) -> Card:
    from sitesym.views.figures.sketch import sketch

    result = step.measurement.result
    names = words.forbidden(result)
    return Card(
        number,
        sketch(step, f"sketch-{number}"),
        ready(symbols.geometry(result.geometry, HTML)),
        ready(words.place(step.measurement, HTML)),
        ready(words.lights(step, HTML)),
        tuple(_seen(one.name, one.expression) for one in result.allowed),
        ready(symbols.many(names, HTML)) if names and not sheet.sample.faces else "",
        ready(words.comparison(step, HTML)),
    )


def _seen(name: str, expression: str) -> tuple[str, str]:
    return ready(symbols.species(name, HTML)), ready(symbols.expression(expression, HTML))


def _fit(sheet: RunSheet) -> Values | None:
    from sitesym.views.figures.polar import fit_plot

    fit = sheet.fit
    if fit is None:
        return None
    return {
        "title": ready(words.fit_title(fit, HTML)),
        "plot": fit_plot(fit, "fit"),
        "values": [symbols.minus(value.words) for value in fit.values],
        "quality": words.fit_quality(fit),
        "undecided": [symbols.minus(said) for said in fit.undecided],
        "doubts": [symbols.minus(said) for said in fit.doubts],
        "others": [symbols.minus(f"Also: {one.words}.") for one in fit.others],
    }


def _silent(sheet: RunSheet) -> str:
    """Why there is no measurement, where there is none."""
    if sheet.steps or sheet.unoriented:
        return ""
    if not sheet.powder:
        return "No optic mode of this crystal is Raman active at first order."
    return "No geometry offered shows a Raman-active species."


def _unoriented(sheet: RunSheet) -> Values | None:
    if not sheet.unoriented:
        return None
    return {
        "rows": [(one.name, [_seen(label, text) for label, text in one.species]) for one in sheet.unoriented],
        "words": [ready(words.sentence(said, sheet.analysis, HTML)) for said in sheet.unoriented_words],
    }


# Details --------------------------------------------------------------------------------------------------------------


def _asked(sheet: RunSheet) -> Values | None:
    if not sheet.asked:
        return None
    return {
        "rows": [
            (
                ready(symbols.geometry(step.measurement.result.geometry, HTML)),
                ready(words.lights(step, HTML)),
                [_seen(one.name, one.expression) for one in step.measurement.result.allowed],
                ready(symbols.many(names, HTML)) if (names := words.forbidden(step.measurement.result)) else "",
            )
            for step in sheet.asked
        ]
    }


def _leaks(sheet: RunSheet) -> Values | None:
    plan = sheet.raman
    if plan is None or not sheet.steps:
        return None
    rows = [
        (
            number,
            ready(symbols.species(one.label, HTML)),
            words.percent(one.misorientation),
            words.percent(one.aperture),
        )
        for number, one in words.leak_rows(sheet)
    ]
    return {
        "rows": rows,
        "rest": words.leak_rest(sheet),
        "setup": plan.conditions,
        "notes": [(", ".join(places), said) for said, places in words.optics_notes(sheet).items()],
    }


def _powder(sheet: RunSheet) -> Values | None:
    if not sheet.powder:
        return None
    rows = [
        (
            ready(symbols.species(row.label, HTML)),
            *(f"{value:.3g}" for value in row.depolarization),
            ready(symbols.expression(row.parallel, HTML)),
            ready(symbols.expression(row.crossed, HTML)),
        )
        for row in sheet.powder
    ]
    return {"rows": rows}


def _infrared(sheet: RunSheet) -> Values | None:
    if not sheet.infrared:
        said = words.unoriented_infrared(sheet, HTML)
        return {"faces": [], "words": [ready(said)]} if said else None
    return {
        "faces": [
            (
                ready(symbols.direction(f"({one.face})", HTML)),
                [
                    (
                        ready(words.electric(row, HTML)),
                        ready(", ".join(words.infrared_band(band, HTML) for band in row.allowed)),
                    )
                    for row in one.rows
                ],
            )
            for one in sheet.infrared
        ],
        "words": [ready(words.on_faces(faces, said, sheet, HTML)) for faces, said in sheet.infrared_words],
    }


def _curves(sheet: RunSheet) -> Values | None:
    if not sheet.curves:
        return None
    return {"faces": [_curve_face(place, one, sheet) for place, one in enumerate(sheet.curves)]}


def _curve_face(place: int, one: CurveFace, sheet: RunSheet) -> Values:
    from sitesym.views.figures.polar import polar_plot

    return {
        "face": ready(symbols.direction(f"({one.axes.face})", HTML)),
        "reference": ready(symbols.direction(one.axes.reference.name, HTML)),
        "across": ready(symbols.direction(one.axes.across.name, HTML)),
        "plots": [
            (
                ready(symbols.species(curve.name, HTML)),
                polar_plot(curve, f"polar-{place}-{number}"),
                ready(symbols.expression(curve.parallel_expression, HTML)),
                ready(symbols.expression(curve.crossed_expression, HTML)),
                words.letter_values(curve),
            )
            for number, curve in enumerate(one.curves)
            if curve.allowed
        ],
        "absent": ready(symbols.many(names, HTML))
        if (names := [curve.name for curve in one.curves if not curve.allowed])
        else "",
        "notes": [ready(words.sentence(said, sheet.analysis, HTML)) for said in one.notes],
    }


def _bench(sheet: RunSheet) -> Values | None:
    if not sheet.benches:
        return None
    return {
        "lasers": [
            {
                "bench": bench,
                "words": words.laser_words(bench),
                "care": words.laser_care(bench),
                "lines": [_line(one) for one in (*bench.standards, *bench.lamps)],
                "notes": words.standard_notes(bench),
                "false": words.false_lines(bench),
            }
            for bench in sheet.benches
        ]
    }


def _line(one: CheckLine) -> tuple[str, str, str, str]:
    return one.source, f"{one.shift:.1f}", f"{one.air:.3f}", one.strength


def _cautions(sheet: RunSheet) -> Values:
    return {"hazards": sheet.hazards, "others": sentences.other_cautions(sheet.analysis)}


def _method(sheet: RunSheet) -> Values:
    return {
        "paragraphs": [(one.heading, ready(one.text)) for one in plan_paragraphs(sheet, HTML)],
        "references": plan_references(),
    }


PARTS = (
    Part("cautions", "Cautions", _cautions),
    Part("asked", "Geometries as named", _asked),
    Part("leaks", "Leaks and optics", _leaks),
    Part("curves", "Curves", _curves),
    Part("powder", "Powders", _powder),
    Part("infrared", "Infrared", _infrared),
    Part("bench", "Bench", _bench),
    Part("method", "Method", _method),
)
"""The details in reading order; cautions first, because the page is read before the shutter opens."""
