"""Sentences of a comparison of two structures, ready for a style: the paragraph for a draft, lattice, notes."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from fractions import Fraction
from typing import TYPE_CHECKING

from sitesym.views.labels import TEXT, Style, decomposition
from sitesym.views.layout import NO_BREAK
from sitesym.views.sentences import factor_group_words, fill, space_group_words

if TYPE_CHECKING:
    import numpy as np
    import numpy.typing as npt

    from sitesym.analysis import Analysis
    from sitesym.comparison import Comparison
    from sitesym.comparison.relation import Embedding
    from sitesym.comparison.result import ActiveModes, FoldedRow
    from sitesym.comparison.wavevectors import Star

    Floats = npt.NDArray[np.float64]

NAMES = {"infrared": "infrared", "raman": "Raman"}
_SIGNS = {
    Fraction(1, 2): "½", Fraction(1, 3): "⅓", Fraction(2, 3): "⅔", Fraction(1, 4): "¼", Fraction(3, 4): "¾",
    Fraction(1, 6): "⅙", Fraction(5, 6): "⅚", Fraction(1, 8): "⅛", Fraction(3, 8): "⅜", Fraction(5, 8): "⅝",
    Fraction(7, 8): "⅞",
}  # fmt: skip


def number(value: float) -> str:
    """`2`, `−½`, `3/2`; a value that is no simple fraction with three decimals."""
    exact = Fraction(float(value)).limit_denominator(24)
    sign = "−" if value < 0 and exact else ""
    if abs(float(exact) - value) > 1e-4:
        return f"{value:.3f}".replace("-", "−")
    return sign + _SIGNS.get(abs(exact), str(abs(exact)))


def place(values: Iterable[float | Fraction]) -> str:
    """`(½, ½, 0)`, not to be broken at the end of a line."""
    return f"({f',{NO_BREAK}'.join(number(float(value)) for value in values)})"


def vector(row: Iterable[float]) -> str:
    """A vector by a, b and c: `a − b`, `2c`, `½a + ½b`."""
    words = ""
    for value, letter in zip(row, "abc", strict=True):
        if abs(value) < 1e-6:
            continue
        size = number(abs(value))
        term = (f"{size} " if "/" in size or "." in size else size.replace("1", "") if size == "1" else size) + letter
        joint = (" − " if value < 0 else " + ") if words else ("−" if value < 0 else "")
        words += joint + term
    return words


def name_of(analysis: Analysis, style: Style) -> str:
    """Formula and space group: `SrTiO₃, Pm3̄m`."""
    return f"{style.formula(analysis.formula)}, {style.symbol(analysis.space_group)}"


def title(result: Comparison, style: Style = TEXT) -> str:
    """`SrTiO₃, Pm3̄m → I4/mcm`; both compounds where they differ."""
    first, second = result.parent, result.child
    arrow = style.plain({"none": "and"}.get(result.relation, "→"))
    other = style.symbol(second.space_group) if first.formula == second.formula else name_of(second, style)
    return f"{name_of(first, style)} {arrow} {other}"


# The paragraph for a draft


def paragraph(result: Comparison, style: Style = TEXT) -> str:
    """The answer as one paragraph that can be pasted into a paper's draft."""
    embedding = result.embedding
    if embedding is None:
        parts = [_unrelated(result, style), _counts(result, style)]
    elif result.relation == "same":
        parts = [_same(result, embedding, style), _counts(result, style)]
    else:
        parts = [_subgroup(result, embedding, style), _closeness(embedding, style), _folding(result, style)]
        parts += [new_words(one, result, style) for one in result.active] or [_counts(result, style)]
    return " ".join(part for part in parts if part)


def _subgroup(result: Comparison, embedding: Embedding, style: Style) -> str:
    return fill(
        style,
        "The space group of {child} is a subgroup of that of {parent}, of index "
        f"{index_words(embedding)}; its axes are {axes_words(embedding)} of the parent, its origin "
        f"{origin_words(embedding)}.",
        child=name_of(result.child, style),
        parent=name_of(result.parent, style),
    )


def _same(result: Comparison, embedding: Embedding, style: Style) -> str:
    what = "isotypic: they have the same symmetry" if embedding.substitutions else "the same by symmetry"
    changed = [(row.label, next(iter(row.child))) for row in result.centre if [row.label] != list(row.child)]
    renamed = ", ".join(f"{style.species(old)} {style.plain('→')} {style.species(new)}" for old, new in changed)
    return fill(
        style,
        f"{{parent}} and {{child}} are {what}. The axes of the second are {axes_words(embedding)} of the first, its "
        f"origin {origin_words(embedding)}. Lengths differ by at most {strain_words(embedding)}, atoms are at most "
        f"{embedding.match.largest:.2f} Å apart. "
        + ("Labels change with the axes: {renamed}." if changed else "All species keep their labels."),
        parent=name_of(result.parent, style),
        child=name_of(result.child, style),
        renamed=renamed,
    )


def _unrelated(result: Comparison, style: Style) -> str:
    assert result.refusal is not None
    if result.reversed:
        words = (
            "The two are related the other way round: the space group of {parent} is a subgroup of that of {child}. "
            "Give {child} first, to have species and folding."
        )
    else:
        words = (
            "No group-subgroup relation was found between {parent} and {child}: "
            f"{result.refusal.reason}. They are compared by their counts."
        )
    return fill(style, words, parent=name_of(result.parent, style), child=name_of(result.child, style))


def _closeness(embedding: Embedding, style: Style) -> str:
    match = embedding.match
    return style.plain(
        f"Lengths differ by at most {strain_words(embedding)}, and atoms lie within {match.largest:.2f} Å "
        f"(root mean square {match.root_mean_square:.2f} Å) of their places in the parent."
    )


def _folding(result: Comparison, style: Style) -> str:
    if result.embedding is None or result.embedding.klassengleiche == 1:
        return style.plain(
            "The primitive cell is not multiplied, so that no other wavevector folds to the zone centre."
        )
    stars = result.embedding.stars[1:]
    fold = "folds" if len(stars) == 1 and len(stars[0].arms) == 1 else "fold"
    times = {2: "twice", 3: "three times", 4: "four times"}.get(
        result.embedding.klassengleiche, f"{result.embedding.klassengleiche} times"
    )
    names = listed([star_words(star) for star in stars])
    return style.plain(f"The primitive cell is {times} as large: {names} of the parent {fold} to the zone centre.")


def listed(words: Sequence[str]) -> str:
    """`X, M and R`."""
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} and {words[-1]}"


def _counts(result: Comparison, style: Style) -> str:
    """Numbers of infrared and Raman frequencies of both, and whether they exclude each other."""
    first, second = (one.totals for one in (result.parent, result.child))
    centred = [one.factor_group.has_inversion for one in (result.parent, result.child)]
    lead = (
        f"The first has {first.infrared} infrared and {first.raman} Raman frequencies, the second "
        f"{second.infrared} and {second.raman}."
    )
    shared = f"{first.infrared_and_raman} and {second.infrared_and_raman}"
    if all(centred):
        return style.plain(f"{lead} In both, inversion keeps infrared and Raman apart.")
    if any(centred):
        which = "first" if centred[0] else "second"
        return style.plain(f"{lead} Of these, {shared} are seen in both; inversion forbids it in the {which}.")
    return style.plain(f"{lead} Of these, {shared} are seen in both.")


def new_words(one: ActiveModes, result: Comparison, style: Style = TEXT) -> str:
    """One technique: from how many frequencies to how many, and where the new ones come from."""
    name = NAMES[one.technique]
    count = f"{one.parent or 'no'} {name} frequenc{'y' if one.parent == 1 else 'ies'}"
    lead = style.plain(f"The parent allows {count}, the child {one.child or 'none'}")
    split = style.plain(f"{one.split} more as degenerate species split") if one.split else ""
    new = [
        _from(one.zone_centre, _dark(one, result, style), result, style),
        _from(one.folding, style.plain(_points(result)), result, style),
    ]
    told = style.plain(", and ").join(part for part in new if part)
    parts = [part for part in (split, told and style.plain("newly active ") + told) if part]
    return lead + (style.plain(": ") + style.plain("; ").join(parts) if parts else "") + style.plain(".")


def _from(parts: Mapping[str, int], source: str, result: Comparison, style: Style) -> str:
    """`B1 + 4E from T1u and T2u`; "" for nothing."""
    if not parts:
        return ""
    ordered = {one.label: parts[one.label] for one in result.child.species if parts.get(one.label)}
    return fill(style, "{species} from {source}", species=decomposition(ordered, style), source=source)


def _dark(one: ActiveModes, result: Comparison, style: Style) -> str:
    """The species of the parent that the technique does not see there, but in the child."""
    dark = [row for row in result.centre if row.optic and not one.seen(row.activity)]
    labels = [style.species(row.label) for row in dark if set(row.child) & set(one.zone_centre)]
    return listed(labels) if labels else ""


def _points(result: Comparison) -> str:
    stars = [row.star for row in result.folded or ()]
    return listed([star.name or place(star.conventional) for star in stars]) if stars else ""


# Lattice and operations


def index_words(embedding: Embedding) -> str:
    """`6 (translationengleiche 3, klassengleiche 2)`."""
    parts = f"translationengleiche {embedding.translationengleiche}, klassengleiche {embedding.klassengleiche}"
    return f"{embedding.index} ({parts})"


def axes_words(embedding: Embedding) -> str:
    """`a + b, −a + b, 2c`: the child's axes by those of the parent."""
    return ", ".join(map(vector, embedding.lattice.axes.tolist()))


def origin_words(embedding: Embedding) -> str:
    """`(0, 0, ½)`: where the child's origin lies."""
    return place(embedding.match.origin.tolist())


def strain_words(embedding: Embedding) -> str:
    """`0.3 %`: the largest change of a length."""
    return f"{100 * embedding.lattice.strain:.1f} %"


def turn_words(embedding: Embedding) -> str:
    """By what angle the child's Cartesian axes are turned against those of the parent; "" if they are not."""
    import numpy as np

    proper = embedding.rotation * np.sign(np.linalg.det(embedding.rotation))
    angle = float(np.degrees(np.arccos(np.clip((np.trace(proper) - 1) / 2, -1, 1))))
    return f"x, y, z of the child are turned by {angle:.0f}° against those of the parent" if angle > 0.5 else ""


def domain_words(embedding: Embedding) -> str:
    """How many kinds of domains a crystal may break into on the way from the parent."""
    turned, moved = embedding.translationengleiche, embedding.klassengleiche
    parts = [f"{turned} orientation state{'s' if turned > 1 else ''}"] if turned > 1 else []
    parts += [f"{moved} antiphase states"] if moved > 1 else []
    return " times ".join(parts)


def star_words(star: Star) -> str:
    """`R (½, ½, ½)`; with the number of arms where several fold: `3 arms of X (0, 0, 1)`."""
    point = " ".join(filter(None, (star.name or "q =", place(star.conventional))))
    return f"{len(star.arms)} arms of {point}" if len(star.arms) > 1 else point


def arm_words(star: Star) -> str:
    """`1 of 3`: arms that fold, of all."""
    return f"{len(star.arms)} of {star.size}"


def reciprocal_words(star: Star) -> str:
    """The arms in units of the reciprocal of the parent's primitive vectors."""
    return ", ".join(place(arm) for arm in star.arms)


def site_words(row: FoldedRow, style: Style = TEXT) -> str:
    """`R: A1g + 2B2g, of which Sr1 B2g`: what the modes at one star become, in all and by sites of the parent."""
    sites = style.plain("; ").join(f"{style.plain(label)} {decomposition(part, style)}" for label, part in row.sites)
    point = style.plain(row.star.name or place(row.star.conventional))
    return fill(
        style, "{point}: {whole}. By sites: {sites}.", point=point, whole=decomposition(row.child, style), sites=sites
    )


# Notes


def notes(result: Comparison, style: Style = TEXT) -> tuple[str, ...]:
    """What to bear in mind, ready for the style."""
    made = (_condensed(result, style), _weak(result), _domains(result), _frame(result))
    return tuple(one if index == 0 else style.plain(one) for index, one in enumerate(made) if one)


def _condensed(result: Comparison, style: Style) -> str:
    """Which parent modes can be those whose freezing in makes the child."""
    if result.embedding is None or result.relation == "same":
        return ""
    at_centre = result.becoming_symmetric
    parts = [style.species(label) for label in at_centre]
    folded = [row.star for row in result.folded or () if result.child.species[0].label in row.child]
    parts += [style.plain(f"modes at {star_words(star)}") for star in folded]
    if not parts:
        return ""
    return fill(
        style,
        "Modes of the parent that become totally symmetric in the child: {parts}. The one that drives a displacive "
        "transition is among them.",
        parts=style.plain(", ").join(parts),
    )


def _weak(result: Comparison) -> str:
    if result.relation != "group-subgroup" or not any(one.new for one in result.active):
        return ""
    return (
        "What is newly active grows with the distortion or the order: near the parent expect it weak (common practice)."
    )


def _domains(result: Comparison) -> str:
    words = domain_words(result.embedding) if result.embedding else ""
    if not words:
        return ""
    mixed = (
        " Orientation states mix polarizations."
        if result.embedding and result.embedding.translationengleiche > 1
        else ""
    )
    return f"A crystal cooled or ordered from the parent may hold domains: {words}.{mixed}"


def _frame(result: Comparison) -> str:
    words = turn_words(result.embedding) if result.embedding else ""
    return f"{words}: mind it when comparing polarized spectra." if words else ""


def who(analysis: Analysis, style: Style = TEXT) -> str:
    """`SrTiO₃, I4/mcm (number 140), D₄h (4/mmm), order 16`."""
    parts = (style.formula(analysis.formula), space_group_words(analysis, style), factor_group_words(analysis, style))
    return style.plain(", ").join(parts)


METHOD = (
    "The child's primitive lattice was laid onto a sublattice of the parent's within the strain allowed, its atoms "
    "onto the parent's by an optimal assignment, and every operation of its space group compared with the parent's, "
    "translations included. Zone-centre species were restricted to the operations that are kept. Displacements at the "
    "other wavevectors q with q·R whole for all lattice vectors R of the child were reduced by their characters; with "
    "the zone centre they add up to what the child's own atoms give. Translationengleiche: the factor by which the "
    "point group shrinks. Klassengleiche: the factor by which the primitive cell grows (International Tables A1)."
)
"""How it was done, for the end of the report."""
