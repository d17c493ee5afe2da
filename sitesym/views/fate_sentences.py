"""Words on the fate of one kind of motion: at its site, by the correlation field, and in the two spectra.

Functions that name species or symbols take a `Style` and return text that is ready and safe for that kind of document.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from itertools import groupby
from typing import TYPE_CHECKING

from sitesym.fate import Degeneracy
from sitesym.views.labels import Style, decomposition
from sitesym.views.sentences import fill, infrared_words

if TYPE_CHECKING:
    from sitesym.analysis import Analysis
    from sitesym.fate import Branch, Component, Counts, Fate
    from sitesym.selection import Activity

_NUMBERS = {
    1: "one", 2: "two", 3: "three", 4: "four", 5: "five", 6: "six", 7: "seven", 8: "eight", 9: "nine", 10: "ten",
    11: "eleven", 12: "twelve",
}  # fmt: skip


def spelled(number: int) -> str:
    """Small numbers as words."""
    return _NUMBERS.get(number, str(number))


def activity_words(activity: Activity) -> str:
    """`infrared and Raman`, `infrared only`, `Raman only`, `silent`."""
    if activity.infrared and activity.raman:
        return "infrared and Raman"
    if activity.infrared:
        return "infrared only"
    return "Raman only" if activity.raman else "silent"


def letters(activity: Activity) -> str:
    """`I R`, `I -`, `- R`, `- -`: activity as two letters of fixed places."""
    return f"{'I' if activity.infrared else '-'} {'R' if activity.raman else '-'}"


def joined(words: Sequence[str]) -> str:
    """`a`, `a and b`, `a, b and c`."""
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} and {words[-1]}"


def at_site(site: str, fate: Fate, many: bool, style: Style) -> str:
    """`keeps its degeneracy on the D₃ site (E)`; `site` is the ready symbol of the site group, `many` the plural."""
    parts = {one.label: one.count for one in fate.site}
    becomes = decomposition(parts, style)
    s, its = ("", "their") if many else ("s", "its")
    if fate.degeneracy is Degeneracy.NONE:
        same = list(parts) == [fate.free.label]
        verb = ("stay" if many else "stays") if same else f"become{s}"
        words = fill(style, f"{verb} {{species}} on the {{site}} site", species=becomes, site=site)
    elif fate.degeneracy is Degeneracy.KEPT:
        words = fill(style, f"keep{s} {its} degeneracy on the {{site}} site ({{species}})", species=becomes, site=site)
    else:
        partly = "only partly " if fate.degeneracy is Degeneracy.PARTLY else ""
        verb = "are" if many else "is"
        words = fill(style, f"{verb} {partly}split by the {{site}} site into {{species}}", species=becomes, site=site)
    gained = joined([_NAMES[name] for name in fate.gained]) if fate.gained else ""
    return words + (style.plain(f", which allows {gained}") if gained else "")


_NAMES = {"infrared": "infrared", "raman": "Raman"}


def in_crystal(analysis: Analysis, fate: Fate, many: bool, alone: bool, style: Style) -> str:
    """`, splits into Eg (Raman) + Eu (infrared) by the correlation field`: what follows on `at_site`.

    alone  whether there is only one such unit in the primitive cell.
    """
    parts = _components(analysis, fate.crystal, style)
    if alone:
        verb = "give" if fate.in_crystal.components > 1 else "become"
        return fill(style, f", and {verb if many else f'{verb}s'} {{parts}} in the crystal", parts=parts)
    if fate.degeneracy in (Degeneracy.LIFTED, Degeneracy.PARTLY):
        split = [_branch(analysis, branch, style) for branch in fate.branches]
        return style.plain("; the correlation field ") + joined(split)
    lead, s = ", and" if fate.gained else ",", "" if many else "s"
    if fate.is_split_by_correlation:
        return fill(style, f"{lead} split{s} into {{parts}} by the correlation field", parts=parts)
    return fill(style, f"{lead} become{s} {{parts}} in the crystal", parts=parts)


def _branch(analysis: Analysis, branch: Branch, style: Style) -> str:
    of = style.species(branch.site.label)
    each = style.plain("each " if branch.site.count > 1 else "")
    parts = _components(analysis, branch.crystal, style)
    if sum(part.count for part in branch.crystal) == 1:
        return fill(style, "makes {each}{of} {parts}", each=each, of=of, parts=parts)
    return fill(style, "splits {each}{of} into {parts}", each=each, of=of, parts=parts)


def _components(analysis: Analysis, parts: Iterable[Component], style: Style) -> str:
    """`Ag + B₁g (both Raman) + Au (silent) + B₁u (infrared E ∥ z)`: neighbours of like activity together."""
    runs = groupby(parts, lambda part: _rules_words(analysis, part))
    return " + ".join(_run(words, list(run), style) for words, run in runs)


def _run(words: str, run: Sequence[Component], style: Style) -> str:
    terms = [f"{part.count if part.count > 1 else ''}{style.species(part.label)}" for part in run]
    together = {1: "", 2: "both "}.get(len(run), "all ")
    return f"{' + '.join(terms)} ({style.plain(together + words)})"


def _rules_words(analysis: Analysis, part: Component) -> str:
    """`infrared E ∥ z`, `Raman`, `infrared E ∥ (x, y) and Raman`, `silent`."""
    rules = part.activity
    infrared = f"infrared {infrared_words(analysis.species_row(part.label))}" if rules.infrared else ""
    return " and ".join(filter(None, (infrared, "Raman" if rules.raman else ""))) or "silent"


def bands_words(found: Counts) -> str:
    """`one band in each`, `one Raman band`, `3 infrared and 4 Raman bands`, `no band`."""
    infrared, raman, both = found.infrared, found.raman, found.both
    if not infrared and not raman:
        return "no band in infrared or Raman"
    if not infrared or not raman:
        number = infrared or raman
        return f"{spelled(number)} {'infrared' if infrared else 'Raman'} band{'s' if number > 1 else ''}"
    if both == infrared == raman:
        return f"{spelled(both)} band{'s' if both > 1 else ''}, in infrared and Raman alike"
    if infrared == raman == 1:
        return "one band in each"
    shared = f", {spelled(both)} of them the same" if both else ""
    if raman == 1:
        return f"{spelled(infrared)} infrared bands and one Raman band{shared}"
    return f"{spelled(infrared)} infrared and {spelled(raman)} Raman bands{shared}"
