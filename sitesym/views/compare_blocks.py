"""A comparison of two structures as blocks of fields, tables and notes."""

from __future__ import annotations

from typing import TYPE_CHECKING

from sitesym.comparison.result import formula_units
from sitesym.views import compare_words as words
from sitesym.views.blocks import Block, Table
from sitesym.views.labels import TEXT, Style, decomposition
from sitesym.views.layout import NO_BREAK
from sitesym.views.molecule_sentences import units_words
from sitesym.views.sentences import CHANGES_COUNTS

if TYPE_CHECKING:
    from sitesym.analysis import SiteRow
    from sitesym.comparison import Comparison
    from sitesym.comparison.result import ActiveModes, CentreRow, SiteChange
    from sitesym.selection import Activity

_SERIOUS = CHANGES_COUNTS | {"substitution", "mirrored", "average_parent"}
_COUNTS = (
    ("infrared", "infrared"), ("raman", "Raman"), ("infrared_and_raman", "both"), ("silent", "silent"),
    ("optic", "all"),
)  # fmt: skip


def blocks(result: Comparison, style: Style = TEXT) -> tuple[Block, ...]:
    """All sections after the paragraph, in reading order; those that do not apply are empty."""
    folded = tuple(words.site_words(row, style) for row in result.folded or ())
    return (
        Block("", _fields(result, style), cautions=cautions(result, style, serious=True)),
        Block("Distinct frequencies, and the primitive cell", table=counts_table(result, style)),
        Block("Where the child's active modes come from", table=active_table(result, style)),
        Block("Zone-centre species", table=centre_table(result, style)),
        Block("Wavevectors that fold to the zone centre", table=folded_table(result, style), notes=folded),
        Block("Sites", table=sites_table(result, style)),
        Block("Notes", notes=words.notes(result, style)),
        Block("Cautions", cautions=cautions(result, style, serious=False)),
        Block("Method", notes=(style.plain(words.METHOD),)),
    )


def cautions(result: Comparison, style: Style, serious: bool) -> tuple[str, ...]:
    """Those under which the comparison itself may be wrong, or the others."""
    return tuple(style.plain(one.message) for one in result.cautions if (one.code in _SERIOUS) == serious)


def _fields(result: Comparison, style: Style) -> tuple[tuple[str, str], ...]:
    pair = (("Parent", result.parent), ("Child", result.child))
    made = [(name, words.who(one, style)) for name, one in pair]
    embedding = result.embedding
    if embedding is not None:
        stretches = ", ".join(f"{one:.4f}" for one in embedding.lattice.stretches)
        made += [
            ("Relation", style.plain(_relation(result))),
            ("Axes", style.plain(f"{words.axes_words(embedding)}; origin {words.origin_words(embedding)}")),
            ("Stretches", style.plain(f"{stretches} (principal, child over parent)")),
        ]
    if any(one.molecular and one.molecular.molecules for _, one in pair):
        made += [(f"{name} units", style.plain("; ").join(units_words(one, style))) for name, one in pair]
    return tuple((style.plain(name), text) for name, text in made if text)


def _relation(result: Comparison) -> str:
    assert result.embedding is not None
    if result.relation == "same":
        return "the same symmetry"
    return f"group and subgroup, index {words.index_words(result.embedding)}"


def _header(style: Style, *names: str) -> tuple[str, ...]:
    return tuple(map(style.plain, names))


def counts_table(result: Comparison, style: Style) -> Table:
    """Distinct optic frequencies of both, and what is in their primitive cells."""
    pair = (result.parent, result.child)
    rows = [(name, *(str(getattr(one.totals, key)) for one in pair)) for key, name in _COUNTS]
    rows += [
        ("formula units", *(str(formula_units(one) or "no whole number") for one in pair)),
        ("atoms", *(str(one.totals.atoms_primitive) for one in pair)),
        ("inversion", *("yes" if one.factor_group.has_inversion else "no" for one in pair)),
    ]
    cells = tuple(tuple(map(style.plain, row)) for row in rows)
    return Table(_header(style, "", "parent", "child"), cells, "<>>")


def active_table(result: Comparison, style: Style) -> Table | None:
    """For infrared and Raman how many of the child's frequencies come from where."""
    if not result.active:
        return None
    rows = tuple(row for one in result.active for row in _active_rows(one, result, style))
    return Table(_header(style, "", "from", "number", "species"), rows, "<<><")


def _active_rows(one: ActiveModes, result: Comparison, style: Style) -> list[tuple[str, ...]]:
    name = words.NAMES[one.technique]
    parts = (
        (f"species seen in the parent ({one.parent})", one.kept),
        ("species not seen there: new", one.zone_centre),
        ("other wavevectors: new", one.folding),
    )
    order = [row.label for row in result.child.species]
    return [
        (
            style.plain(name), style.plain(source), str(sum(part.values())),
            decomposition({label: part[label] for label in order if label in part}, style) if part else "",
        )
        for source, part in parts
    ]  # fmt: skip


def centre_table(result: Comparison, style: Style) -> Table | None:
    """What one mode of each species of the parent becomes, and which parts a technique sees that it did not see."""
    if not result.centre:
        return None
    rows = tuple(_centre_row(row, result, style) for row in result.centre if row.optic)
    names = ("parent", "modes", "seen in", "becomes", "new in infrared", "new in Raman")
    return Table(_header(style, *names), rows, "<><<<<")


def _centre_row(row: CentreRow, result: Comparison, style: Style) -> tuple[str, ...]:
    new = [
        {} if one.seen(row.activity) else {label: n for label, n in row.child.items() if label in one.zone_centre}
        for one in result.active
    ]
    return (
        style.species(row.label), str(row.optic), style.plain(activity_words(row.activity)),
        decomposition(row.child, style), *(decomposition(part, style) if part else "" for part in new or ({}, {})),
    )  # fmt: skip


def activity_words(activity: Activity) -> str:
    """`infrared, Raman`; `silent`."""
    seen = (("infrared", activity.infrared), ("Raman", activity.raman))
    return ", ".join(name for name, present in seen if present) or "silent"


def folded_table(result: Comparison, style: Style) -> Table | None:
    """Stars that fold: arms, how far the atoms moved along them, how many of the modes are seen."""
    embedding = result.embedding
    if embedding is None or embedding.klassengleiche == 1:
        return None
    rows = []
    for star, amplitude in zip(embedding.stars, embedding.amplitudes, strict=True):
        arms = words.reciprocal_words(star) if len(star.arms) == 1 else ""
        cells = (star.name, words.place(star.conventional), arms, words.arm_words(star), f"{amplitude:.2f}")
        rows.append(tuple(style.plain(cell.replace(NO_BREAK, " ")) for cell in cells))
    header = _header(style, "point", "a*, b*, c*", "primitive", "arms", "moved (Å)")
    return Table(header, tuple(rows), "<<<<>")


def sites_table(result: Comparison, style: Style) -> Table:
    """Which sites of the child come from which of the parent; without relation the sites of both."""
    if result.embedding is None:
        pair = (("parent", result.parent), ("child", result.child))
        rows = [
            (style.plain(name), *_site(row, style), str(row.count)) for name, one in pair for row in one.sites
        ]  # fmt: skip
        return Table(_header(style, "", "atom", "site", "group", "in primitive cell"), tuple(rows), "<<<<>", (1,))
    names = ("parent", "site", "group", "child", "site", "group", "moved (Å)")
    return Table(_header(style, *names), tuple(_change(one, style) for one in result.sites), "<<<<<<>", (0, 3))


def _change(one: SiteChange, style: Style) -> tuple[str, ...]:
    return (*_site(one.parent, style), *_site(one.child, style), f"{one.displacement:.3f}")


def _site(row: SiteRow, style: Style) -> tuple[str, ...]:
    name = row.label if row.element in row.label else f"{row.label} ({row.element})"
    where = f"{row.multiplicity}{row.wyckoff}"
    return (style.plain(name), style.plain(where), style.schoenflies(row.group.schoenflies))
