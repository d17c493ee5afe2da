"""The paragraph of an explanation that a user can paste into a draft: what was seen, and as what it is allowed."""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from itertools import groupby
from typing import TYPE_CHECKING

from sitesym.bands.measurement import TECHNIQUES
from sitesym.version import __version__
from sitesym.views.explain_words import (
    NAMES,
    cause_words,
    coincidence_sentence,
    compound_of,
    counted,
    family_words,
    has_place,
    listed,
    lowered_words,
    modes,
    number,
    of,
    typeset,
    vibration_words,
)
from sitesym.views.labels import TEXT, Style
from sitesym.views.sentences import fill, space_group_words

if TYPE_CHECKING:
    from sitesym.bands.explanation import BandResult, Explanation
    from sitesym.bands.inventory import Family
    from sitesym.bands.reasons import Reason

_LISTED = 8
_CLAUSE = re.compile(r": |; |, and the |, which |, so that ")


def paragraph(explanation: Explanation, style: Style = TEXT) -> str:
    """What was found, in sentences for a draft. Claims go no further than "allowed as" and "would need"."""
    sentences = [_opening(explanation, style)]
    for technique in TECHNIQUES:
        if mine := of(explanation, technique):
            sentences += [_placed(technique, mine, style), *_others(explanation, technique, mine, style)]
    sentences += [coincidence_sentence(explanation), _missing_sentence(explanation)]
    lowering = [_lowering_sentence(explanation, style)] if _asks_for_lowering(explanation) else []
    plain = [style.plain(one) if k > 0 else one for k, one in enumerate(sentences[-2:], start=1) if one]
    closing = style.plain(f"Bands were put to what symmetry allows with sitesym {__version__}.")
    return style.plain(" ").join(filter(None, [*sentences[:-2], *plain, *lowering, closing]))


def _opening(explanation: Explanation, style: Style) -> str:
    analysis = explanation.analysis
    totals = analysis.totals
    both = f", {totals.infrared_and_raman} of them in both" if totals.infrared_and_raman else ""
    return fill(
        style,
        f"For {{formula}} in space group {{group}}, factor group {{factor}}, symmetry allows "
        f"{counted(totals.raman, 'fundamental') if totals.raman else 'no fundamental'} in Raman and "
        f"{totals.infrared or 'none'} in infrared{both}.",
        formula=style.formula(compound_of(explanation)),
        group=space_group_words(analysis, style),
        factor=style.schoenflies(analysis.factor_group.schoenflies),
    )


def _placed(technique: str, mine: Sequence[BandResult], style: Style) -> str:
    """`Of the 6 Raman bands measured, 5 are allowed as fundamentals or components of them: ...`."""
    leads = [members[0] for members in modes(mine)]
    placed = [one for one in leads if has_place(one)]
    count, name = len(leads), NAMES[technique]
    geometries = len({one.band.geometry for one in mine if one.band.geometry})
    measured = "measured" + (f" in {geometries} geometries" if geometries > 1 else "")
    if not placed:
        return style.plain(f"None of the {counted(count, f'{name} band')} {measured} is first of all a fundamental.")
    if len(placed) < count:
        share = f"{len(placed)} are" if len(placed) > 1 else "one is"
        opening = f"Of the {count} {name} bands {measured}, {share}"
    else:
        opening = f"All {count} {name} bands {measured} are" if count > 1 else f"The one {name} band {measured} is"
    what = "fundamentals or components of them" if len(placed) > 1 else "a fundamental or a component of one"
    return style.plain(f"{opening} allowed as {what}: ") + _families(placed, style) + style.plain(" cm⁻¹.")


def _families(placed: Sequence[BandResult], style: Style) -> str:
    """`CO₃ ν4 711, ν1 1086; external modes 156 and 281`."""
    groups: dict[str, list[str]] = {}
    by_family: dict[Family, list[BandResult]] = {}
    for one in placed:
        assert one.placed.family is not None
        by_family.setdefault(one.placed.family, []).append(one)
    for family, members in by_family.items():
        through = all(one.reasons[0].cause == "site_activation" for one in members)
        values = style.plain(listed([number(one.band) for one in members]))
        words = f"{vibration_words(family, style)} {values}".strip()
        words += style.plain(" (through the site)") if through else ""
        head = family_words(family, style).removesuffix(vibration_words(family, style)).strip()
        groups.setdefault(head, []).append(words)
    return style.plain("; ").join(f"{head} {style.plain(', ').join(parts)}" for head, parts in groups.items())


def _others(explanation: Explanation, technique: str, mine: Sequence[BandResult], style: Style) -> list[str]:
    groups = modes(mine)
    others = [
        one for members in groups for one in (members if has_place(members[0]) else members[:1]) if not has_place(one)
    ]
    if not others:
        return []
    clauses = []
    for clause, members in _same_clause(others[:_LISTED]):
        values = typeset(_with_geometry(members), explanation, style)
        verb = clause if len(members) == 1 else _plural(clause)
        clauses.append(values + style.plain(" ") + typeset(verb, explanation, style))
    more = f"; for {len(others) - _LISTED} more see the table" if len(others) > _LISTED else ""
    opening = "Of them, " if len(others) == len(groups) else "Of the rest, "
    if all(has_place(members[0]) for members in groups):
        opening = "Besides, "
    return [style.plain(opening) + style.plain("; ").join(clauses) + style.plain(f"{more}.")]


def _with_geometry(members: Sequence[BandResult]) -> str:
    """`1749 and 1797 cm⁻¹`; `1086 cm⁻¹ in z(xy)-z` where the geometry matters to the reason."""
    if members[0].reasons[0].cause != "leakage":
        return f"{listed([number(one.band) for one in members])} cm⁻¹"
    return listed([f"{number(one.band)} cm⁻¹ in {one.band.geometry}" for one in members])


def _same_clause(others: Sequence[BandResult]) -> Iterable[tuple[str, list[BandResult]]]:
    for clause, members in groupby(others, key=lambda one: _clause(one.reasons[0])):
        yield clause, list(members)


def _clause(reason: Reason) -> str:
    """The main clause of an argument, as the predicate of a band."""
    main = _CLAUSE.split(reason.argument)[0]
    if reason.cause == "unexplained":
        return "remains unexplained"
    if reason.cause == "leakage":
        return "is forbidden and may be leakage"
    if reason.cause == "symmetry_lowering":
        return "would need a lower symmetry"
    if reason.cause == "disorder":
        return "may come from disorder"
    if main.startswith("allowed"):
        return f"is {main}"
    if main.startswith("near "):
        return f"lies {main}"
    return main if main.startswith("would") else f"may be a case of {cause_words(reason)}"


def _plural(clause: str) -> str:
    words = {"is ": "are ", "remains ": "remain ", "lies ": "lie "}
    return next((many + clause.removeprefix(one) for one, many in words.items() if clause.startswith(one)), clause)


def _missing_sentence(explanation: Explanation) -> str:
    counts = [
        (NAMES[technique], sum(one.allowed - one.seen for one in explanation.missing if one.technique == technique))
        for technique in TECHNIQUES
    ]
    words = [f"{count} in {name}" for name, count in counts if count]
    were = "was" if sum(count for _, count in counts) == 1 else "were"
    return f"Of the fundamentals allowed, {listed(words)} {were} not seen." if words else ""


def _asks_for_lowering(explanation: Explanation) -> bool:
    """Whether a band that lower symmetry would give a place has no better reason."""
    explained = {band for one in explanation.lowerings[:1] for band in one.explains}
    causes = {one.reasons[0].cause for one in explanation.bands if one.band in explained}
    return bool(causes & {"symmetry_lowering", "unexplained"})


def _lowering_sentence(explanation: Explanation, style: Style) -> str:
    """The highest symmetries that explain most; several of one order stand side by side."""
    best = explanation.lowerings[0]
    equal = [
        one for one in explanation.lowerings
        if (len(one.fails), one.subgroup.order) == (len(best.fails), best.subgroup.order)
    ]  # fmt: skip
    count = len(best.explains)
    what = "the one band left over" if count == 1 else f"{count} of the bands left over"
    return fill(
        style,
        f"A loss of symmetry would give {what} a place among the fundamentals; the highest symmetry that would is "
        f"{{groups}}, order {best.subgroup.order}.",
        groups=style.plain(" or ").join(lowered_words(one, explanation, style) for one in equal),
    )
