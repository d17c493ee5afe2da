"""Words that all views of a run sheet share: directions, geometries, set-ups, what to compare.

Functions take a `Style` and return text that is ready and safe for that kind of document.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from typing import TYPE_CHECKING

from sitesym.views import plan_symbols as symbols
from sitesym.views.labels import TEXT, Style
from sitesym.views.sentences import fill

if TYPE_CHECKING:
    from sitesym.analysis import Analysis
    from sitesym.experiment.bench import LaserBench
    from sitesym.experiment.cover import Demand
    from sitesym.experiment.curves import AngleCurve
    from sitesym.experiment.fitted import CurveFit
    from sitesym.experiment.infrared import InfraredBand, InfraredRow
    from sitesym.experiment.leakage import Leak
    from sitesym.experiment.patterns import Comparison, Pattern
    from sitesym.experiment.plan import Measurement, Plan
    from sitesym.experiment.run_sheet import RunSheet, Step
    from sitesym.experiment.shown import GeometryResult
    from sitesym.geometry.notation import Polarization

_HANDS = {"R": "right-handed circular", "L": "left-handed circular"}
_WORTH_A_LINE = 1e-3
SAMPLES = {"crystal": "Crystal", "flake": "Flake", "film": "Thin film", "grain": "Grain", "powder": "Powder"}


def sentence(words: str, analysis: Analysis, style: Style = TEXT) -> str:
    """A plain sentence of a result with its species typeset, beginning with a capital and ending in a stop."""
    labels = [row.label for row in analysis.species if len(row.label) > 1]
    pattern = "|".join(re.escape(one) for one in sorted(labels, key=len, reverse=True))
    whole = words[:1].upper() + words[1:] if not words.startswith(tuple("xyz")) else words
    whole = whole if whole.endswith((".", "!")) else f"{whole}."
    if not labels:
        return style.plain(whole)
    parts = re.split(rf"(?<![A-Za-z0-9])({pattern})(?![A-Za-z0-9'])", whole)
    return "".join(style.species(part) if k % 2 else style.plain(part) for k, part in enumerate(parts))


# Set-up ---------------------------------------------------------------------------------------------------------------


def place(measurement: Measurement, style: Style = TEXT) -> str:
    """`(001), backscattering`; `(001) and (100), right angle`; `as named`."""
    mount = {"right-angle": "right angle", "forward": "forward, through the sample", "as named": ""}
    candidate = measurement.candidate
    faces = style.plain(" and ").join(symbols.direction(face, style) for face in candidate.faces)
    words = style.plain(mount.get(candidate.mount, candidate.mount))
    return ", ".join(part for part in (faces, words) if part)


def light(polarization: Polarization, what: str, angle: float | None, style: Style = TEXT, edge: str = "") -> str:
    """`laser ∥ x`, `analyser ∥ [11̄0], 90° from the edge`, `no analyser`, `laser right-handed circular`."""
    if polarization.name == "*":
        return style.plain("no analyser" if what == "analyser" else f"{what} unpolarized")
    if polarization.name in _HANDS:
        return style.plain(f"{what} {_HANDS[polarization.name]}")
    words = style.plain(f"{what} ∥ ") + symbols.direction(polarization.name, style)
    return words + (style.plain(f", {angle:.3g}° from ") + edge if edge and angle is not None else "")


def lights(step: Step, style: Style = TEXT) -> str:
    """`laser ∥ x, analyser ∥ y`, with angles from the edge where the user named one."""
    shown, layout = step.measurement.result.geometry, step.layout
    edge = ""
    if layout.from_edge and layout.reference is not None:
        edge = fill(style, "edge {name}", name=symbols.direction(layout.reference.name, style))
    first = light(shown.incoming, "laser", layout.incoming, style, edge)
    second = light(shown.outgoing, "analyser", layout.outgoing, style, edge)
    return f"{first}{style.plain('; ' if edge else ', ')}{second}"


def comparison(step: Step, style: Style = TEXT) -> str:
    """`Against 1: Eg stays, A₁g goes.`; "" for the first measurement."""
    change: Comparison | None = step.comparison
    if change is None:
        return ""
    parts = [
        fill(style, f"{{names}} {verb if len(names) == 1 else plural}", names=symbols.many(names, style))
        for names, verb, plural in (
            (change.stay, "stays", "stay"), (change.go, "goes", "go"), (change.new, "is new", "are new"),
        )
        if names
    ]  # fmt: skip
    return fill(style, f"Against {change.other + 1}: {{parts}}.", parts=style.plain(", ").join(parts))


def pattern(one: Pattern, style: Style = TEXT) -> str:
    """`in 1 and 3, not in 2`, with what else has the same pattern."""
    there = [str(k + 1) for k, seen in enumerate(one.seen) if seen]
    absent = [str(k + 1) for k, seen in enumerate(one.seen) if not seen]
    words = style.plain(f"in {_and(there)}" + (f", not in {_and(absent)}" if absent else ""))
    if one.like:
        words += fill(style, ", like {others}", others=symbols.many(one.like, style))
    return words + style.plain("; wavenumber moves with the geometry" if one.moves else "")


def forbidden(result: GeometryResult) -> list[str]:
    """Labels of the species that a geometry forbids."""
    seen = {one.label for one in result.allowed}
    return list(dict.fromkeys(one.label for one in result.shown if one.label not in seen))


def needed(sheet: RunSheet) -> str:
    """`1 and 3 alone decide as much as all of these.`: plain text."""
    chosen = [str(number + 1) for number in sheet.needed]
    return f"{_and(chosen)} alone {'decides' if len(chosen) == 1 else 'decide'} as much as all of these."


def _and(words: Sequence[str]) -> str:
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} and {words[-1]}"


def leak_rows(sheet: RunSheet) -> list[tuple[int, Leak]]:
    """Numbers of measurements with the leaks in them that are worth a line: a thousandth and more."""
    return [
        (number, leak)
        for number, step in enumerate(sheet.steps, start=1)
        for leak in step.measurement.leaks
        if max(leak.misorientation, leak.aperture) >= _WORTH_A_LINE
    ]


def leak_rest(sheet: RunSheet) -> str:
    """What to say of the leaks that are not listed: plain text."""
    every = [leak for step in sheet.steps for leak in step.measurement.leaks]
    if not every:
        return "No species is forbidden in any of them: nothing can leak in."
    listed = len(leak_rows(sheet))
    if listed == len(every):
        return ""
    return "All others stay below 0.1 %." if listed else "All that is forbidden stays below 0.1 %."


def unoriented_infrared(sheet: RunSheet, style: Style = TEXT) -> str:
    """What infrared light shows of a powder or grain; "" for oriented samples and inactive crystals."""
    rows = [row for row in sheet.analysis.species if row.activity.infrared and row.optic]
    if sheet.sample.is_oriented or not rows:
        return ""
    words = {
        "powder": "A powder absorbs in every infrared-active species, {names}, and polarization tells nothing; strong "
        "bands lie between TO and LO, by the shape of the grains and the index of what surrounds them.",
        "grain": "In a grain of unknown orientation each of the infrared-active species, {names}, may show at any "
        "polarization; turn the polarizer and see which bands change together.",
    }
    return fill(style, words[sheet.sample.kind], names=symbols.many([row.label for row in rows], style))


def optics_notes(sheet: RunSheet) -> dict[str, list[str]]:
    """Each note on the optics of the crystal, in plain text, with the numbers of the measurements that it concerns."""
    notes: dict[str, list[str]] = {}
    for number, step in enumerate(sheet.steps, start=1):
        one = step.measurement
        for said in dict.fromkeys([*(beam.words for beam in one.beams), one.activity, step.refraction]):
            if said:
                notes.setdefault(said, []).append(str(number))
    return notes | ({sheet.cone: ["all"]} if sheet.cone and sheet.steps else {})


def letter_values(curve: AngleCurve) -> str:
    """`a = 1, b = 0.6 (assumed)`: the values for which a curve is drawn."""
    shown = []
    for letter, value in zip(curve.letters, curve.values, strict=True):
        number = f"{value.real:.3g}" if not value.imag else f"{value.real:.3g}{value.imag:+.3g}i"
        shown.append(f"{letter} = {number}{' (assumed)' if letter in curve.assumed else ''}")
    return ", ".join(shown).replace("-", "−")


def fit_title(fit: CurveFit, style: Style = TEXT) -> str:
    """`Fit of E(TO) on (010), angles from x`."""
    return fill(
        style,
        "Fit of {name} on {face}, angles from {reference}",
        name=symbols.species(fit.seen.name, style),
        face=symbols.direction(f"({fit.axes.face})", style),
        reference=symbols.direction(fit.axes.reference.name, style),
    )


def fit_quality(fit: CurveFit) -> str:
    """χ², its probability, and where the errors come from: plain text."""
    name = "χ²" if fit.probability is not None else "Sum of squares"
    chance = f", probability {fit.probability:.2g}" if fit.probability is not None else ""
    unseen = f" The curves do not show {_and(fit.unseen)}." if fit.unseen else ""
    size = f"{name} {fit.chi_square:.4g}, {fit.freedom} degrees of freedom{chance}"
    return f"{size}. Standard errors {fit.error_words}.{unseen}"


# What is left ---------------------------------------------------------------------------------------------------------


def undecided(plan: Plan, style: Style = TEXT) -> list[str]:
    """What no measurement offered shows or tells apart, and the face that would help; else that nothing is left."""
    said = []
    if plan.unseen:
        said.append(fill(style, "Not seen in any geometry offered: {names}.", names=symbols.many(plan.unseen, style)))
    if plan.inseparable:
        pairs = style.plain(", ").join(
            fill(style, "{one} from {other}", one=symbols.species(one, style), other=symbols.species(other, style))
            for one, other in plan.inseparable
        )
        said.append(fill(style, "Not told apart by presence and absence: {pairs}.", pairs=pairs))
    if not said:
        said.append(style.plain("Every Raman-active species is seen and told from every other."))
    if plan.other_phonons:
        said.append(fill(style, "No geometry offered shows {names}.", names=symbols.many(plan.other_phonons, style)))
    if plan.further is not None:
        face = symbols.direction(f"({plan.further.face})", style)
        gains = style.plain("; ").join(gain_words(plan.further.meets, style))
        said.append(fill(style, "A face {face} would help: {gains}.", face=face, gains=gains))
    return said


def gain_words(demands: Sequence[Demand], style: Style = TEXT) -> list[str]:
    """`it shows E1g`, `it tells A1g from E1g`: the sightings, and separations of what was seen before."""
    seen = [demand.first for demand in demands if not demand.second]
    said = [fill(style, "it shows {names}", names=symbols.many(seen, style))] if seen else []
    told = [
        demand
        for demand in demands
        if demand.second and not {demand.first, demand.second} & {*seen, *(name.partition("(")[0] for name in seen)}
    ]
    if told:
        pairs = style.plain(", ").join(
            fill(
                style,
                "{one} from {other}",
                one=symbols.species(one.first, style),
                other=symbols.species(one.second, style),
            )
            for one in told
        )
        said.append(fill(style, "it tells {pairs}", pairs=pairs))
    return said


# Sample and bench -----------------------------------------------------------------------------------------------------


def sample_words(sheet: RunSheet, style: Style = TEXT) -> str:
    """`Crystal with faces (001), (010), (21̄0), assumed because none was named; backscattering`."""
    sample, plan = sheet.sample, sheet.raman
    words = style.plain(SAMPLES[sample.kind])
    if not sample.is_oriented:
        return words + style.plain(", orientation unknown" if sample.kind == "grain" else "")
    if sample.faces:
        words += style.plain(" with the face " if len(sample.faces) == 1 else " with the faces ")
        words += symbols.faces(sample.faces, style)
        words += style.plain(" (assumed, because none was named)" if sample.assumed else "")
    else:
        words += style.plain(", geometries as named")
    if sample.edges:
        edges = style.plain(", ").join(symbols.direction(edge.name, style) for edge in sample.edges)
        words += style.plain(", edge " if len(sample.edges) == 1 else ", edges ") + edges
    if plan is not None and sample.faces:
        mounts = _and([mount.replace("-", " ") for mount in plan.mounts])
        words += style.plain(f"; {mounts}{'' if plan.analyser else ', no analyser'}")
    return words


def laser_words(bench: LaserBench) -> str:
    """`532.100 nm in air, 532.250 nm in vacuum, 18788.2 cm⁻¹ (neodymium solid-state, doubled)`: plain text."""
    laser = bench.laser
    name = f" ({laser.name})" if laser.name else ""
    return f"{laser.air:.3f} nm in air, {laser.vacuum:.3f} nm in vacuum, {laser.wavenumber:.1f} cm⁻¹{name}"


def laser_care(bench: LaserBench) -> str:
    """How far the line may be trusted, in plain sentences."""
    laser = bench.laser
    error = f"1 nm off puts every shift {laser.per_nanometre:.1f} cm⁻¹ off."
    if laser.fixed:
        return f"An atomic transition holds this line. {error}"
    if laser.fixed is None:
        return f"The line is taken as you gave it. {error}"
    return f"No atomic transition holds this line: measure it against a lamp or a standard. {error}"


def standard_notes(bench: LaserBench) -> list[str]:
    """What to mind with each standard of the scale: plain text."""
    return [symbols.minus(f"{one.source}: {one.note}.").replace("cm-1", "cm⁻¹") for one in bench.standards]


def false_lines(bench: LaserBench) -> str:
    """`1556 (O2 in the air); 16, 136 (plasma of the laser)`: sharp lines that are none of the sample."""
    shifts: dict[str, list[str]] = {}
    for one in bench.false_lines:
        shifts.setdefault(one.source, []).append(f"{one.shift:.0f}")
    return "; ".join(f"{', '.join(places)} ({source})" for source, places in shifts.items())


def percent(share: float) -> str:
    """`0.3 %`, `12 %`, `below 0.1 %`, `0`."""
    if share < 1e-9:
        return "0"
    if share < 1e-3:
        return "below 0.1 %"
    return f"{100 * share:.1f} %" if share < 0.1 else f"{100 * share:.0f} %"


def flag_words(sheet: RunSheet) -> str:
    """`explosive (ClO4), toxic (Pb)`: the flags of the sample in brief; "" if there is none."""
    kinds: dict[str, list[str]] = {}
    for flag in sheet.hazards.flags:
        kinds.setdefault(flag.kind, []).append(flag.cause)
    return ", ".join(f"{kind} ({', '.join(causes)})" for kind, causes in kinds.items())


def on_faces(names: Sequence[str], said: str, sheet: RunSheet, style: Style = TEXT) -> str:
    """A sentence, led by `On (001):` where it does not hold for all faces of the infrared plan."""
    whole = sentence(said, sheet.analysis, style)
    if len(names) == len(sheet.infrared):
        return whole
    return f"{style.plain('On ')}{symbols.faces(names, style)}{style.plain(': ')}{whole[:1].lower()}{whole[1:]}"


def electric(row: InfraredRow, style: Style = TEXT) -> str:
    """`∥ x`, or `∥ normal (tilted, p-polarized)`."""
    if row.incidence != "normal incidence":
        return style.plain("∥ normal (tilted, p-polarized)")
    return style.plain("∥ ") + symbols.direction(row.direction.name, style)


def infrared_band(band: InfraredBand, style: Style = TEXT) -> str:
    """`Eu(TO)`, `A′(oblique), free direction`, `E(TO) 75 %`."""
    words = symbols.species(band.name, style)
    if band.free:
        return words + style.plain(" (dipole free)")
    return words + (style.plain(f" {100 * band.coupling:.0f} %") if band.coupling < 1 - 1e-6 else "")
