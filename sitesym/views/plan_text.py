"""A run sheet as plain text for a terminal of 80 columns: the measurements first, then what to know about them."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from sitesym.views import plan_symbols as symbols
from sitesym.views import plan_words as words
from sitesym.views import sentences
from sitesym.views.labels import TEXT, printable
from sitesym.views.layout import WIDTH, ZERO, clip, pad, table, width, wrap
from sitesym.views.plan_method import plan_paragraphs, plan_references

if TYPE_CHECKING:
    from sitesym.experiment.bench import CheckLine, LaserBench
    from sitesym.experiment.run_sheet import CurveFace, RunSheet, Step
    from sitesym.experiment.shown import Shown

_NUMBER = 4
_FIELD = 10


def render(sheet: RunSheet) -> str:
    """The whole run sheet, ending in a line feed."""
    sections = (
        ("Geometries as named", _asked(sheet)),
        ("What may leak and turn", _leaks(sheet)),
        ("Depolarization in powders", _powder(sheet)),
        ("Infrared", _infrared(sheet)),
        ("Angle-resolved curves", _curves(sheet)),
        ("Bench", _benches(sheet)),
        ("Cautions", _cautions(sheet)),
        ("Method", _method(sheet)),
    )
    lines = [*_head(sheet), *_fit(sheet), *_measurements(sheet), *_reading(sheet)]
    for title, body in sections:
        if body:
            lines += ["", title, "─" * len(title), *body]
    return "\n".join(line.rstrip() for line in lines) + "\n"


def _head(sheet: RunSheet) -> list[str]:
    analysis = sheet.analysis
    title = "   ".join(filter(None, (TEXT.formula(analysis.formula), printable(analysis.structure.name))))
    lines = [clip(title, WIDTH)]
    for question in sentences.serious_cautions(analysis):
        lines += _flag(printable(question.message))
    lines += _field("Crystal", sentences.space_group_words(analysis))
    lines += _field("Sample", words.sample_words(sheet))
    lines += _field("Axes", printable(analysis.axes))
    for bench in sheet.benches:
        lines += _field("Laser", words.laser_words(bench))
    lines += _field("Safety", "laser class, eyes, heating: see Cautions before you open the shutter")
    if sheet.hazards.flags:
        lines += _flag(f"Check the sample first: {words.flag_words(sheet)}. See Cautions.")
    return [*lines, ""]


def _field(name: str, text: str) -> list[str]:
    return wrap(text, indent=" " * _FIELD, first=f"{name:<{_FIELD}}")


def _flag(text: str) -> list[str]:
    return wrap(text, indent="  ", first="! ")


def _fit(sheet: RunSheet) -> list[str]:
    """The fit of measured curves stands before the plan: it is what was asked for."""
    fit = sheet.fit
    if fit is None:
        return []
    lines = [words.fit_title(fit)]
    lines += [f"    {symbols.minus(value.words)}" for value in fit.values]
    lines += wrap(words.fit_quality(fit), indent=" " * _NUMBER, first=" " * _NUMBER)
    for said in fit.undecided:
        lines += _flag(symbols.minus(said))
    for said in fit.doubts:
        lines += wrap(symbols.minus(said), indent="  ", first="- ")
    for other in fit.others:
        lines += wrap(symbols.minus(f"Also: {other.words}."), indent="  ", first="- ")
    return [*lines, ""]


def _measurements(sheet: RunSheet) -> list[str]:
    if not sheet.sample.is_oriented:
        return _unoriented(sheet)
    if sheet.raman is None:
        return ["No optic mode of this crystal is Raman active at first order."]
    lines: list[str] = []
    for number, step in enumerate(sheet.steps, start=1):
        lines += _step(step, str(number), with_forbidden=not sheet.sample.faces)
    if len(sheet.needed) < len(sheet.steps):
        lines.append(words.needed(sheet))
    return lines or ["No geometry offered shows a Raman-active species."]


def _step(step: Step, number: str, *, with_forbidden: bool) -> list[str]:
    """Where and how; what is seen and perhaps what is not; what changes."""
    notation = symbols.geometry(step.measurement.result.geometry)
    lead = f"{number:>2}  {pad(notation, 10)}  "
    where = "; ".join(filter(None, (words.place(step.measurement), words.lights(step))))
    lines = [*wrap(where, indent=" " * width(lead), first=lead), *_seen(step.measurement.result.allowed)]
    if with_forbidden:
        lines += _forbidden(step)
    change = words.comparison(step)
    return lines + (wrap(change, indent=" " * _NUMBER, first=" " * _NUMBER) if change else [])


def _seen(shown: Sequence[Shown]) -> list[str]:
    """`A₁g: a²     Eg: c²`, each species kept together with its expression where a line holds both."""
    entries = [f"{symbols.species(one.name)}: {symbols.expression(one.expression)}" for one in shown] or ["nothing"]
    lines: list[str] = []
    for entry in entries:
        if lines and width(lines[-1]) + 5 + width(entry) <= WIDTH:
            lines[-1] += f"     {entry}"
        else:
            lines += wrap(entry, indent=" " * 2 * _NUMBER, first=" " * _NUMBER)
    return lines


def _unoriented(sheet: RunSheet) -> list[str]:
    if not sheet.unoriented:
        return ["No optic mode of this crystal is Raman active at first order."]
    lines: list[str] = []
    for number, one in enumerate(sheet.unoriented, start=1):
        how = "along" if one.name == "parallel" else "across"
        lines.append(f"{number:>2}  {one.name}   analyser {how} the laser's polarization; mean intensities:")
        rows = [(symbols.species(label), symbols.expression(text)) for label, text in one.species]
        lines += [f"      {line}" for line in table(rows, "<<")]
    lines += ["", "What to compare"]
    for said in sheet.unoriented_words:
        lines += wrap(words.sentence(said, sheet.analysis), indent="  ", first="- ")
    return lines


def _reading(sheet: RunSheet) -> list[str]:
    """The table that assigns every band, and what it leaves open."""
    if sheet.raman is None or not sheet.steps:
        return []
    lines = ["", "Bands of"]
    size = max((width(symbols.species(one.name)) for one in sheet.patterns), default=0)
    for one in sheet.patterns:
        lead = f"  {pad(symbols.species(one.name), size)}  "
        lines += wrap(words.pattern(one), indent=" " * width(lead), first=lead)
    for said in words.undecided(sheet.raman):
        lines += wrap(said, indent="  ")
    return lines


def _forbidden(step: Step) -> list[str]:
    names = words.forbidden(step.measurement.result)
    return wrap(f"forbidden: {symbols.many(names)}", indent=" " * 8, first=" " * _NUMBER) if names else []


def _asked(sheet: RunSheet) -> list[str]:
    """Geometries that the user named beside faces, with what they forbid too."""
    lines: list[str] = []
    for step in sheet.asked:
        result = step.measurement.result
        lines += [
            f"{symbols.geometry(result.geometry)}   {words.lights(step)}",
            *_seen(result.allowed),
            *_forbidden(step),
        ]
    return lines


def _leaks(sheet: RunSheet) -> list[str]:
    if sheet.raman is None or not sheet.steps:
        return []
    setup = sheet.raman.conditions
    rows = [("in", "leaks", f"tilt {setup.tilt:g}°", f"aperture {setup.aperture:g}" if setup.aperture else "")]
    for number, leak in words.leak_rows(sheet):
        cone = words.percent(leak.aperture) if setup.aperture else ""
        rows.append((str(number), symbols.species(leak.label), words.percent(leak.misorientation), cone))
    lines = table(rows, "<<>>") if len(rows) > 1 else []
    rest = words.leak_rest(sheet)
    lines += [rest] if rest else []
    for said, places in words.optics_notes(sheet).items():
        lines += wrap(f"{', '.join(places)}: {said}.", indent="  ", first="- ")
    return lines


def _powder(sheet: RunSheet) -> list[str]:
    if not sheet.powder:
        return []
    rows = [("species", "least", "most", "")]
    for row in sheet.powder:
        low, high = row.depolarization
        rows.append((symbols.species(row.label), f"{low:.3g}", f"{high:.3g}", "fixed" if high - low < 1e-9 else ""))
    return [*wrap("Crossed over parallel intensity, averaged over all orientations."), *table(rows, "<>><")]


def _infrared(sheet: RunSheet) -> list[str]:
    if not sheet.infrared:
        said = words.unoriented_infrared(sheet)
        return wrap(said) if said else []
    rows = [("face", "electric vector", "shows")]
    for one in sheet.infrared:
        for row in one.rows:
            seen = ", ".join(words.infrared_band(band) for band in row.allowed) or ZERO
            rows.append((symbols.direction(f"({one.face})"), words.electric(row), seen))
    lines = table(rows, "<<<", shrink=(2,))
    for faces, said in sheet.infrared_words:
        lines += wrap(words.on_faces(faces, said, sheet), indent="  ", first="- ")
    return lines


def _curves(sheet: RunSheet) -> list[str]:
    lines: list[str] = []
    for one in sheet.curves:
        lines += _curve_face(one, sheet)
    return lines


def _curve_face(one: CurveFace, sheet: RunSheet) -> list[str]:
    face = symbols.direction(f"({one.axes.face})")
    across = symbols.direction(one.axes.across.name)
    lines = wrap(f"On {face}: θ from {symbols.direction(one.axes.reference.name)} towards {across}.")
    seen = [curve for curve in one.curves if curve.allowed]
    size = max((width(symbols.species(curve.name)) for curve in seen), default=0)
    for curve in seen:
        lines += wrap(
            symbols.expression(curve.parallel_expression),
            " " * (size + 14),
            f"  {pad(symbols.species(curve.name), size)}  parallel  ",
        )
        lines += wrap(symbols.expression(curve.crossed_expression), " " * (size + 14), f"{' ' * (size + 4)}crossed   ")
    absent = [curve.name for curve in one.curves if not curve.allowed]
    if absent:
        lines += wrap(f"Not seen on this face: {symbols.many(absent)}.", indent="  ", first="  ")
    for said in one.notes:
        lines += wrap(words.sentence(said, sheet.analysis), indent="  ", first="- ")
    return [*lines, "  Values of the curves: --format csv."]


def _benches(sheet: RunSheet) -> list[str]:
    if not sheet.benches:
        return wrap("Name your laser, such as --laser 532, for absolute wavelengths and lines to check the scale.")
    return [line for bench in sheet.benches for line in [*_bench(bench), ""]][:-1]


def _bench(bench: LaserBench) -> list[str]:
    low, high = bench.ends
    lines = wrap(f"{words.laser_words(bench)}. {words.laser_care(bench)}")
    lines += wrap(
        f"Span for {low.shift:g} to {high.shift:g} cm⁻¹, in air: Stokes {low.stokes:.2f} to {high.stokes:.2f} nm, "
        f"anti-Stokes {low.anti_stokes:.2f} to {high.anti_stokes:.2f} nm."
    )
    filters = ", ".join(f"{one.shift:g} cm⁻¹ at {one.stokes:.2f} and {one.anti_stokes:.2f} nm" for one in bench.filters)
    lines += wrap(f"A notch or edge must have let go at the first shift that you want: {filters}.")
    rows = [("check the scale", "shift", "air / nm", "")]
    rows += [_check_line(one) for one in (*bench.standards, *bench.lamps)]
    lines += ["", *table(rows, "<>><"), ""]
    for said in words.standard_notes(bench):
        lines += wrap(said, indent="  ", first="- ")
    if bench.false_lines:
        lines += wrap(f"No lines of the sample, in cm⁻¹: {words.false_lines(bench)}.", indent="  ", first="- ")
    ratios = ", ".join(f"{one.photons:.2g} at {one.shift:g}" for one in bench.ratios)
    temperature = f"{bench.temperature:g} K"
    return lines + wrap(
        f"Anti-Stokes over Stokes, photons counted, at {temperature}: {ratios} cm⁻¹.", indent="  ", first="- "
    )


def _check_line(one: CheckLine) -> tuple[str, str, str, str]:
    return one.source, f"{one.shift:.1f}", f"{one.air:.3f}", one.strength


def _cautions(sheet: RunSheet) -> list[str]:
    hazards = sheet.hazards
    lines = wrap(hazards.preface)
    for flag in hazards.flags:
        lines += wrap(f"{flag.kind}: {flag.words}", indent="  ", first="! ")
    for one in hazards.cautions:
        lines += wrap(one.words, indent="  ", first="- ")
    for question in sentences.other_cautions(sheet.analysis):
        lines += wrap(printable(question.message), indent="  ", first="- ")
    return lines


def _method(sheet: RunSheet) -> list[str]:
    lines: list[str] = []
    for paragraph in plan_paragraphs(sheet):
        lines += [*wrap(f"{paragraph.heading}. {paragraph.text}"), ""]
    for number, reference in enumerate(plan_references(), start=1):
        lines += wrap(reference, indent="     ", first=f"{f'[{number}]':<5}")
    return lines
