"""Words of an explanation of bands, ready for a style: names, the table, arguments, notes."""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import lru_cache
from itertools import groupby
from typing import TYPE_CHECKING

from sitesym.bands.explanation import same_bands
from sitesym.bands.measurement import TECHNIQUES
from sitesym.known_units import composition_of
from sitesym.views.labels import TEXT, Style
from sitesym.views.plan_symbols import direction
from sitesym.views.sentences import fill

if TYPE_CHECKING:
    from sitesym.bands.explanation import BandResult, Explanation
    from sitesym.bands.inventory import Family
    from sitesym.bands.lowering import Lowering
    from sitesym.bands.measurement import Band
    from sitesym.bands.missing import Missing
    from sitesym.bands.reasons import Reason

NAMES = {"raman": "Raman", "infrared": "infrared"}
CAUSES = {
    "fundamental": "fundamental", "site_splitting": "site splitting", "correlation_splitting": "correlation splitting",
    "site_activation": "site activation", "overtone": "overtone", "combination": "combination",
    "fermi_resonance": "Fermi resonance", "longitudinal_companion": "LO companion", "leakage": "leakage",
    "isotopologue": "isotopologue", "disorder": "disorder", "symmetry_lowering": "lower symmetry",
    "second_phase": "second phase", "instrument": "instrument or room", "atmosphere": "air",
    "unexplained": "unexplained",
}  # fmt: skip
OF_PLACE = ("fundamental", "site_splitting", "correlation_splitting", "site_activation")
"""Causes of bands that are fundamentals, or components of them."""

_SHOWN, _WORTH, _NAMED = 3, 0.4, 2
_WORD = r"(?<![\w'])(?:{})(?![\w'])"


# Symbols within the sentences of a result


def typeset(text: str, explanation: Explanation, style: Style) -> str:
    """A sentence of the result with species, groups and formulas set in the style, all else made safe for it."""
    geometries = frozenset(one.band.geometry for one in explanation.bands if one.band.geometry)
    labels, groups, formulas = _symbols(explanation)
    found: list[tuple[frozenset[str], Callable[[str], str]]] = [
        (geometries, lambda typed: direction(typed, style)), (labels, style.species), (groups, style.schoenflies),
        (formulas, style.formula),
    ]  # fmt: skip
    return _set(text, [(names, maker) for names, maker in found if names], style)


def _set(text: str, kinds: Sequence[tuple[frozenset[str], Callable[[str], str]]], style: Style) -> str:
    if not kinds:
        return style.plain(text)
    names, maker = kinds[0]
    pattern = _WORD.format("|".join(re.escape(name) for name in sorted(names, key=len, reverse=True)))
    parts, end = [], 0
    for match in re.finditer(pattern, text):
        parts += [_set(text[end : match.start()], kinds[1:], style), maker(match[0])]
        end = match.end()
    return "".join([*parts, _set(text[end:], kinds[1:], style)])


@lru_cache(maxsize=8)
def _symbols(explanation: Explanation) -> tuple[frozenset[str], frozenset[str], frozenset[str]]:
    """Species, groups and formulas that may stand in the sentences; single letters look the same in any style."""
    labels = {species.label for species in explanation.analysis.factor_group.species}
    labels |= {family.free_species for family in explanation.families}
    for one in explanation.lowerings:
        labels |= {species.label for species in one.subgroup.group.species}
    groups = {one.name for one in explanation.lowerings} | {explanation.analysis.factor_group.schoenflies}
    formulas = {family.unit for family in explanation.families if re.fullmatch(r"(?:[A-Z][a-z]?\d*)+", family.unit)}
    first, second, third = (frozenset(name for name in one if len(name) > 1) for one in (labels, groups, formulas))
    return first, second, third


# Short words


def title(explanation: Explanation, style: Style = TEXT) -> str:
    """`CaCO₃ Calcite: 16 bands explained`."""
    analysis = explanation.analysis
    name = style.plain(analysis.structure.name)
    compound = f"{style.formula(compound_of(explanation))} {name}".strip()
    count = counted(len(explanation.bands), "band")
    return f"{compound}{style.plain(f': {count}')}"


def compound_of(explanation: Explanation) -> str:
    """The formula of the crystal; of a crystal of one kind of molecule that of the molecule, C10H8 and not C5H4."""
    analysis = explanation.analysis
    units = {row.name for row in analysis.molecular.molecules} if analysis.molecular else set()
    if len(units) != 1:
        return analysis.formula
    (unit,) = units
    counts = dict(composition_of(unit))
    whole = sum(counts.values())
    content = analysis.structure.composition
    same = {element: count / whole for element, count in counts.items()}
    total = sum(content.values())
    return (
        unit
        if same.keys() == content.keys()
        and all(abs(same[element] - count / total) < 1e-6 for element, count in content.items())
        else analysis.formula
    )


def number(band: Band) -> str:
    """The wavenumber with as many decimals as its uncertainty deserves."""
    return f"{round(band.wavenumber, 2 if band.uncertainty < 0.5 else 1):g}"


def family_words(family: Family, style: Style = TEXT) -> str:
    """`CO₃ ν₄` as `CO₃ ν4`; `external modes`, `modes of the net`."""
    if family.is_internal:
        formula = style.formula(family.unit) if re.fullmatch(r"\w+", family.unit) else style.plain(family.unit)
        return f"{formula} {vibration_words(family, style)}"
    return style.plain("modes of the net" if family.unit == "net" else family.vibration)


def vibration_words(family: Family, style: Style = TEXT) -> str:
    """`ν3`, `stretching B₁u`; "" for external modes and nets."""
    if not family.is_internal:
        return ""
    first, _, last = family.vibration.rpartition(" ")
    if last == family.free_species and first:
        return f"{style.plain(first)} {style.species(last)}"
    return style.plain(family.vibration)


def cause_words(reason: Reason) -> str:
    """The cause in the words of the trade."""
    return CAUSES.get(reason.cause, reason.cause.replace("_", " "))


def counted(count: int, noun: str) -> str:
    """`1 band`, `2 bands`."""
    return f"{count} {noun}" if count == 1 else f"{count} {noun}s"


def listed(words: Sequence[str], last: str = " and ") -> str:
    """`a, b and c`."""
    return last.join([", ".join(words[:-1]), words[-1]]) if len(words) > 1 else "".join(words)


def of(explanation: Explanation, technique: str) -> list[BandResult]:
    """The bands of one technique."""
    return [one for one in explanation.bands if one.band.technique == technique]


def modes(results: Sequence[BandResult]) -> list[list[BandResult]]:
    """The bands of one technique, each with all geometries that it was seen in; the one that tells its place first."""
    first = same_bands([one.band for one in results])
    groups: dict[int, list[BandResult]] = {}
    for one, start in zip(results, first, strict=True):
        groups.setdefault(start, []).append(one)
    return [sorted(members, key=lambda one: not has_place(one)) for members in groups.values()]


def geometries_words(geometries: Sequence[str], style: Style = TEXT) -> str:
    """`z(xx)z̄ and z(xy)z̄`."""
    made = [direction(one, style) for one in geometries]
    return style.plain(" and ").join([style.plain(", ").join(made[:-1]), made[-1]]) if len(made) > 1 else made[0]


def has_place(result: BandResult) -> bool:
    """Whether it is first of all a fundamental or a component of one."""
    return result.is_allowed and result.reasons[0].cause in OF_PLACE


# Table and arguments


@dataclass(frozen=True, slots=True)
class BandRow:
    """One line of the table, its words ready for the style; `doubt` is the next reason worth a thought."""

    wavenumber: str
    uncertainty: str
    technique: str
    geometry: str
    place: str
    reason: str
    species: str
    doubt: str
    note: str
    is_left_over: bool


def band_rows(explanation: Explanation, style: Style = TEXT) -> tuple[BandRow, ...]:
    """All bands, in the order of the result."""
    alone = len({family.unit for family in explanation.families if family.is_internal}) == 1
    return tuple(_band_row(one, alone, style) for one in explanation.bands)


def _band_row(result: BandResult, alone: bool, style: Style) -> BandRow:
    band, first = result.band, result.reasons[0]
    family = result.placed.family
    doubt = next((one for one in result.reasons[1:] if one.cause != first.cause and _is_worth(one, first)), None)
    return BandRow(
        number(band), f"{band.uncertainty:.2g}", style.plain(NAMES[band.technique]), direction(band.geometry, style),
        _place(family, alone, style) if family else "", style.plain(reason_words(first)),
        _species(first, style), style.plain(cause_words(doubt)) if doubt else "",
        style.plain(band.note), not has_place(result),
    )  # fmt: skip


def _place(family: Family, alone: bool, style: Style) -> str:
    """The family, without the unit where there is only one kind."""
    if not family.is_internal:
        return style.plain("net" if family.unit == "net" else "external")
    return vibration_words(family, style) if alone else family_words(family, style)


def _species(reason: Reason, style: Style) -> str:
    """The first species; a dot dot dot for more."""
    more = style.plain(", …") if len(reason.species) > _NAMED else ""
    return style.plain(", ").join(map(style.species, reason.species[:_NAMED])) + more


def reason_words(reason: Reason) -> str:
    """The cause; of levels also which."""
    level = re.match(r"allowed as (?:the difference )?(\S+(?: [+−] \S+)?)(?: of |:)", reason.argument)
    if reason.cause in ("overtone", "combination") and level:
        return f"{cause_words(reason)} {level[1]}"
    return cause_words(reason)


def _is_worth(reason: Reason, first: Reason) -> bool:
    """Whether a further reason is worth its lines beside the first."""
    return reason.score > _WORTH * first.score and reason.cause != "unexplained"


@dataclass(frozen=True, slots=True)
class Argument:
    """One reason: cause, argument and decisive test, ready for the style."""

    cause: str
    words: str
    test: str


@dataclass(frozen=True, slots=True)
class Arguments:
    """The reasons of one band, or of several that have the same ones; `head` names them."""

    head: str
    reasons: tuple[Argument, ...]


def arguments(explanation: Explanation, style: Style = TEXT) -> tuple[Arguments, ...]:
    """The reasons worth reading, in the order of the bands; neighbours with the same reasons together."""
    found = []
    for _, group in groupby(explanation.bands, key=_same_reasons):
        members = list(group)
        technique = NAMES[members[0].band.technique]
        values = ", ".join(dict.fromkeys(number(one.band) for one in members))
        geometries = list(dict.fromkeys(one.band.geometry for one in members))
        seen = style.plain(" in ") + geometries_words(geometries, style) if all(geometries) else ""
        place = "" if members[0].is_allowed else ", without a place among the fundamentals"
        reasons = tuple(_argument(one, explanation, style) for one in _worth(members[0]))
        head = style.plain(f"{technique[:1].upper()}{technique[1:]} {values} cm⁻¹") + seen + style.plain(place)
        found.append(Arguments(head, reasons))
    return tuple(found)


def _worth(result: BandResult) -> list[Reason]:
    """The best reason of each cause, as many as are worth reading."""
    first = result.reasons[0]
    best: dict[str, Reason] = {}
    for one in result.reasons:
        if one is first or _is_worth(one, first):
            best.setdefault(one.cause, one)
    return list(best.values())[:_SHOWN]


def _same_reasons(result: BandResult) -> tuple[object, ...]:
    return (result.band.technique, result.is_allowed, *((one.cause, one.argument) for one in _worth(result)))


def _argument(reason: Reason, explanation: Explanation, style: Style) -> Argument:
    made = (typeset(text, explanation, style) for text in (reason.argument.rstrip("."), reason.decisive_test))
    return Argument(style.plain(cause_words(reason)), *made)


# Notes


def missing_notes(explanation: Explanation, style: Style = TEXT) -> tuple[str, ...]:
    """What is allowed and was not seen, families with the same reasons together."""
    groups: dict[tuple[str, tuple[str, ...]], list[Missing]] = {}
    for one in explanation.missing:
        groups.setdefault((one.technique, one.reasons), []).append(one)
    return tuple(_missing_note(technique, reasons, members, style) for (technique, reasons), members in groups.items())


def _missing_note(technique: str, reasons: Sequence[str], members: Sequence[Missing], style: Style) -> str:
    families = style.plain(", ").join(
        family_words(one.family, style) + style.plain(f" ({one.seen} of {one.allowed} seen)") for one in members
    )
    head, tail = f"{NAMES[technique].capitalize()}: ", f". {_sentence('; '.join(reasons))}"
    return style.plain(head) + families + style.plain(tail)


def _sentence(words: str) -> str:
    return f"{words[:1].upper()}{words[1:]}."


def lowering_notes(explanation: Explanation, style: Style = TEXT) -> tuple[str, ...]:
    """Lower symmetries, the best first, with what speaks for and against each."""
    return tuple(_lowering_note(one, explanation, style) for one in explanation.lowerings)


def _lowering_note(one: Lowering, explanation: Explanation, style: Style) -> str:
    group = explanation.analysis.factor_group
    fails = f" Without a place stay {_values(one.fails)}." if one.fails else " No band stays without a place."
    lost = group.has_inversion and not one.subgroup.group.has_inversion
    inversion = " It has no inversion: a mode may then be seen in both techniques." if lost else ""
    return fill(
        style,
        f"{{lowered}}, order {one.subgroup.order} of {len(group)}. For it, that {_values(one.explains)} would be "
        f"allowed.{fails} Against it, {_against(one, explanation)}.{inversion}",
        lowered=lowered_words(one, explanation, style),
    )


def _against(one: Lowering, explanation: Explanation) -> str:
    """How many fundamentals it allows, and how many bands were seen, in the techniques that were measured."""
    totals = explanation.analysis.totals
    allowed = {"raman": (totals.raman, one.raman), "infrared": (totals.infrared, one.infrared)}
    parts = [
        f"{allowed[technique][1]} fundamentals in {NAMES[technique]} (assumed symmetry {allowed[technique][0]}), where "
        f"{counted(seen, 'band')} {'was' if seen == 1 else 'were'} seen"
        for technique in TECHNIQUES
        if (seen := len(modes(of(explanation, technique))))
    ]
    return f"that it allows {listed(parts, ', and ')}"


def lowered_words(one: Lowering, explanation: Explanation, style: Style = TEXT) -> str:
    """A lower group with its orientation in the axes of the report: `D₂d (4̄m.2)`."""
    from sitesym.symmetry.site_symbol import oriented_symbol

    symmetry = explanation.analysis.symmetry
    symbol = oriented_symbol(one.subgroup.group, symmetry.lattice, symmetry.number)
    return f"{style.schoenflies(one.name)} ({style.symbol(symbol)})"


def _values(bands: Sequence[Band]) -> str:
    parts = []
    for technique in TECHNIQUES:
        mine = [number(band) for band in bands if band.technique == technique]
        if mine:
            parts.append(f"{NAMES[technique]} {listed(mine)}")
    return f"{listed(parts)} cm⁻¹"


def coincidence_notes(explanation: Explanation, style: Style = TEXT) -> tuple[str, ...]:
    """Pairs of bands at the same place, and what they mean."""
    found = explanation.coincidences
    pairs = tuple(
        style.plain(f"Raman {_with_error(one)} and infrared {_with_error(two)} cm⁻¹") for one, two in found.pairs
    )
    if not all(of(explanation, technique) for technique in TECHNIQUES):
        return ()
    allowed = "This symmetry has no inversion, so a mode may be seen in both techniques." if found.allowed else ""
    return (*pairs, style.plain(allowed or coincidence_sentence(explanation)))


def _with_error(band: Band) -> str:
    return f"{number(band)} ± {band.uncertainty:.2g}"


def coincidence_sentence(explanation: Explanation) -> str:
    """What coincidences of the two techniques say about inversion; "" where they can say nothing."""
    found = explanation.coincidences
    if not all(of(explanation, technique) for technique in TECHNIQUES) or found.allowed:
        return ""
    if not found.pairs:
        return "No Raman band coincides with an infrared one within the uncertainties, as inversion demands."
    pairs = listed([f"{number(one)} and {number(two)}" for one, two in found.pairs[:4]], "; ")
    few = found.chance > 0.05
    count = "One pair coincides" if len(found.pairs) == 1 else f"{len(found.pairs)} pairs coincide"
    verdict = "no evidence against inversion" if few else "evidence for a loss of inversion"
    return (
        f"{count} in Raman and infrared within the uncertainties ({pairs} cm⁻¹), where inversion forbids that one mode "
        f"is seen in both; {found.expected:.2g} would by accident (probability of as many {found.chance:.2g}), which "
        f"is {verdict}."
    )
