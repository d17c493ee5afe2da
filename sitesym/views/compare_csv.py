"""A comparison as comma-separated values: what becomes of the species, counts of both, and the sites.

The first table has one row for each species of the parent and species of the child that comes from it, and likewise for
each star of wavevectors that folds. Where there is no relation it has no rows.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

from sitesym.comparison.result import sees
from sitesym.views.csv import Cell, table

if TYPE_CHECKING:
    from sitesym.analysis import SiteRow
    from sitesym.comparison import Comparison

SPECIES_COLUMNS = (
    "point", "wavevector", "parent_species", "parent_modes", "parent_infrared", "parent_raman", "child_species",
    "child_modes", "child_infrared", "child_raman", "new_infrared", "new_raman",
)  # fmt: skip
COUNT_COLUMNS = (
    "structure", "path", "formula", "space_group", "factor_group", "atoms_primitive", "optic", "infrared", "raman",
    "infrared_and_raman", "silent",
)  # fmt: skip
SITE_COLUMNS = ("parent_site", "parent_wyckoff", "parent_group", "child_site", "child_wyckoff", "child_group", "moved")
BOTH_COLUMNS = ("structure", "site", "wyckoff", "group", "count_primitive")


def render(result: Comparison) -> str:
    """All tables as one text, an empty line between two."""
    return "\n".join([species_table(result), counts_table(result), sites_table(result)])


def species_table(result: Comparison) -> str:
    """What becomes of what."""
    return table(SPECIES_COLUMNS, [*_centre_rows(result), *_folded_rows(result)])


def _centre_rows(result: Comparison) -> Iterator[tuple[Cell, ...]]:
    for row in result.centre:
        seen = (row.activity.infrared, row.activity.raman)
        for label, count in row.all_modes.items():
            yield (
                "Gamma", "0 0 0", row.label, row.optic, *map(_yes, seen), label, count, *_child(result, label, seen)
            )  # fmt: skip


def _folded_rows(result: Comparison) -> Iterator[tuple[Cell, ...]]:
    for row in result.folded or ():
        where = " ".join(map(str, row.star.conventional))
        for label, count in row.child.items():
            yield (row.star.name, where, "", "", "", "", label, count, *_child(result, label, (False, False)))


def _child(result: Comparison, label: str, before: tuple[bool, bool]) -> tuple[str, ...]:
    """Activity in the child, and whether it is new."""
    rules = result.child.species_row(label).activity
    now = sees(rules, "infrared"), sees(rules, "raman")
    return (*map(_yes, now), *(_yes(here and not there) for here, there in zip(now, before, strict=True)))


def counts_table(result: Comparison) -> str:
    """One row for each of the two structures."""
    rows: list[tuple[Cell, ...]] = []
    for name, one in (("parent", result.parent), ("child", result.child)):
        totals = one.totals
        rows.append((
            name, one.structure.source, one.formula, one.space_group, one.factor_group.schoenflies,
            totals.atoms_primitive, totals.optic, totals.infrared, totals.raman, totals.infrared_and_raman,
            totals.silent,
        ))  # fmt: skip
    return table(COUNT_COLUMNS, rows)


def sites_table(result: Comparison) -> str:
    """Which site of the child comes from which of the parent; without relation the sites of both."""
    if result.embedding is not None:
        rows = [(*_site(one.parent), *_site(one.child), round(one.displacement, 4)) for one in result.sites]
        return table(SITE_COLUMNS, rows)
    pair = (("parent", result.parent), ("child", result.child))
    return table(BOTH_COLUMNS, [(name, *_site(row), row.count) for name, one in pair for row in one.sites])


def _site(row: SiteRow) -> tuple[Cell, ...]:
    return (row.label, f"{row.multiplicity}{row.wyckoff}", row.group.schoenflies)


def _yes(answer: bool) -> str:
    return "yes" if answer else "no"
