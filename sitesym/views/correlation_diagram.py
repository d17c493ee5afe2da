"""The correlation diagram of a unit as a text drawing: free unit, site group, factor group, with lines between.

Every species stands once in its column. A line that meets another at a corner or crossing is joined to it; where one
line passes under another without meeting it, the other is drawn through. A number in the place of a joint tells how
often the one species goes over into the other.

Layout: the species of the site divide the drawing into blocks, one below the other. A species of the free unit or of
the crystal stands in the block of the first species of the site that it belongs to, that one in the block's first line.
Each species of the site has an upright line on either side unless it only meets species in its own line; on the left
later blocks have theirs further out, on the right as well. So no two lines ever run along each other.

A species of the site shares its line with one of the free unit only where all that belong to it stand in its block.
Else its line begins at its upright line, with nothing on the left of it, and all other joints of the upright are ways
in. So every drawing can be read in one way only. The same holds for the crystal, mirrored.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from sitesym.views.fate_sentences import letters
from sitesym.views.labels import TEXT
from sitesym.views.layout import WIDTH, clip, pad, width
from sitesym.views.sentences import infrared_words

if TYPE_CHECKING:
    from sitesym.analysis import Analysis
    from sitesym.fate import Fate
    from sitesym.groups.irreps import Representation
    from sitesym.molecular import MoleculeRow
    from sitesym.selection import Activity

Links = dict[tuple[int, int], int]
"""(row of a species, number of a species of the site) -> how often the one goes over into the other."""

_ARMS = {
    "LR": "─", "UD": "│", "LD": "┐", "LU": "┘", "RD": "┌", "RU": "└", "LUD": "┤", "RUD": "├", "LRD": "┬", "LRU": "┴",
    "LRUD": "┼", "L": "─", "R": "─",
}  # fmt: skip
_LONGEST_NAMES = 16


@dataclass(frozen=True, slots=True)
class _Column:
    """The species of one stage in reading order: label -> cells of its line."""

    labels: tuple[str, ...]
    cells: Mapping[str, tuple[str, ...]]


@dataclass(frozen=True, slots=True)
class _Plan:
    """Lines of the drawing: which species of each stage stands where, and how they are linked."""

    height: int
    free: dict[int, str]
    site: dict[int, str]
    crystal: dict[int, str]
    left: Links
    right: Links


def correlation_diagram(analysis: Analysis, row: MoleculeRow, size: int = WIDTH) -> list[str]:
    """The drawing in lines of at most `size` places, headings first."""
    fates = [*row.fates, *row.librations, *row.translations]
    columns = _free_column(row, fates), _site_column(row, fates), _crystal_column(analysis, fates)
    plan = _planned(fates, *(column.labels for column in columns))
    sizes = [[max(map(width, parts)) for parts in zip(*column.cells.values(), strict=True)] for column in columns]
    taken = sum(sum(each) + len(each) - 1 for each in sizes) + 4
    left, right = _fitted_buses(plan, size - taken)
    blocks = [_block(plan.free, columns[0], sizes[0], plan.height), left, _block(plan.site, columns[1], sizes[1],
              plan.height), right, _block(plan.crystal, columns[2], sizes[2], plan.height)]  # fmt: skip
    lines = [" ".join(parts).rstrip() for parts in zip(*blocks, strict=True)]
    return [_heading(analysis, row, [width(block[0]) for block in blocks]), *lines]


def _heading(analysis: Analysis, row: MoleculeRow, sizes: Sequence[int]) -> str:
    group = row.units.site_group
    assert group is not None
    names = [TEXT.schoenflies(one.schoenflies) for one in (row.free.group, group, analysis.factor_group)]
    first = pad(f"free {names[0]}", sizes[0] + 1 + sizes[1])
    second = pad(f"site {names[1]}", sizes[2] + 1 + sizes[3])
    return f"{first} {second} crystal {names[2]}"


# Columns


def _free_column(row: MoleculeRow, fates: Sequence[Fate]) -> _Column:
    found = _in_group_order(row.free.group.species, {fate.free.label: fate.free.activity for fate in fates})
    cells = {
        label: (TEXT.species(label), clip(_contents(row, label), _LONGEST_NAMES), letters(activity))
        for label, activity in found.items()
    }
    return _Column(tuple(found), cells)


def _contents(row: MoleculeRow, label: str) -> str:
    """`ν3 ν4 T`: the motions of one species of the free unit; a number where they have no names or too many."""
    vibrations = row.correlation.vibrations
    chosen = [k for k, one in enumerate(vibrations) if one.species == label]
    names = [known.name for k in chosen for known in row.names[k] if known.name]
    total = sum(vibrations[k].count for k in chosen)
    rigid = ["L"] * any(fate.free.label == label for fate in row.librations)
    rigid += ["T"] * any(fate.free.label == label for fate in row.translations)
    if total and (len(names) != total or width(" ".join([*names, *rigid])) > _LONGEST_NAMES):
        names = [f"{total} internal"]
    return " ".join([*names, *rigid])


def _site_column(row: MoleculeRow, fates: Sequence[Fate]) -> _Column:
    group = row.units.site_group
    assert group is not None
    found = _in_group_order(group.species, {part.label: part.activity for fate in fates for part in fate.site})
    return _Column(tuple(found), {label: (TEXT.species(label), letters(rule)) for label, rule in found.items()})


def _crystal_column(analysis: Analysis, fates: Sequence[Fate]) -> _Column:
    parts = {part.label: part.activity for fate in fates for part in fate.crystal}
    found = _in_group_order(analysis.factor_group.species, parts)
    cells = {
        label: (TEXT.species(label), letters(rule), infrared_words(analysis.species_row(label)))
        for label, rule in found.items()
    }
    return _Column(tuple(found), cells)


def _in_group_order(species: Sequence[Representation], found: Mapping[str, Activity]) -> dict[str, Activity]:
    return {one.label: found[one.label] for one in species if one.label in found}


# Where everything stands


def _planned(fates: Sequence[Fate], free: Sequence[str], site: Sequence[str], crystal: Sequence[str]) -> _Plan:
    down = {(fate.free.label, part.label): part.count for fate in fates for part in fate.site}
    up = {
        (part.label, branch.site.label): part.count for fate in fates for branch in fate.branches
        for part in branch.crystal
    }  # fmt: skip
    blocks_left, blocks_right = _by_first(free, site, down), _by_first(crystal, site, up)
    rows: tuple[dict[int, str], dict[int, str], dict[int, str]] = ({}, {}, {})
    height = 0
    for number, label in enumerate(site):
        rows[1][height] = label
        late = [
            _reaches_back(label, block, links)
            for block, links in ((blocks_left[number], down), (blocks_right[number], up))
        ]
        rows[0].update(enumerate(blocks_left[number], start=height + late[0]))
        rows[2].update(enumerate(blocks_right[number], start=height + late[1]))
        height += max(len(blocks_left[number]) + late[0], len(blocks_right[number]) + late[1], 1)
    left = {(r, k): down[one, two] for r, one in rows[0].items() for k, two in enumerate(site) if (one, two) in down}
    right = {(r, k): up[one, two] for r, one in rows[2].items() for k, two in enumerate(site) if (one, two) in up}
    return _Plan(height, *rows, left, right)


def _by_first(labels: Sequence[str], site: Sequence[str], links: Mapping[tuple[str, str], int]) -> list[list[str]]:
    """The species of an outer column, each in the block of the first species of the site that it is linked to."""
    blocks: list[list[str]] = [[] for _ in site]
    for label in labels:
        blocks[next(k for k, one in enumerate(site) if (label, one) in links)].append(label)
    return blocks


def _reaches_back(label: str, block: Sequence[str], links: Mapping[tuple[str, str], int]) -> bool:
    """Whether a species of the site is linked to one that stands in an earlier block."""
    return any(site == label and outer not in block for outer, site in links)


# Lines between


def _fitted_buses(plan: _Plan, room: int) -> tuple[list[str], list[str]]:
    """The lines left and right of the site column, as widely spaced as the room allows."""
    for spacing in (3, 2, 1):
        left, right = _bus(plan, plan.left, spacing, mirrored=False), _bus(plan, plan.right, spacing, mirrored=True)
        if width(left[0]) + width(right[0]) <= room:
            break
    return left, right


def _bus(plan: _Plan, links: Links, spacing: int, mirrored: bool) -> list[str]:
    """One line of the drawing for each row: what joins an outer column to the site column.

    It is drawn with the outer column on the left; `mirrored` turns it round.
    """
    places = {row: number for number, row in enumerate(sorted(plan.site))}
    home = {number: row for row, number in places.items()}
    ends = {k: [home[k], *(row for row, number in links if number == k)] for k in home}
    upright = [k for k in sorted(home, reverse=True) if min(ends[k]) != max(ends[k])]
    tracks = {k: 2 + spacing * place for place, k in enumerate(upright)}
    size = 4 + spacing * max(len(upright) - 1, 0) + (1 if upright else 0)
    rows = [_bus_row(row, places.get(row), links, tracks, ends, size) for row in range(plan.height)]
    return [_turned(row) if mirrored else row for row in rows]


def _bus_row(
    row: int, own: int | None, links: Links, tracks: Mapping[int, int], ends: Mapping[int, list[int]], size: int
) -> str:
    """Outer column on the left: its line runs to the last track it joins, the site's from its own track onwards."""
    joined = {k: count for (at, k), count in links.items() if at == row}
    reach = max((tracks.get(k, size) for k in joined), default=-1)
    start = size if own is None else tracks.get(own, size)
    cells = ["─" if place <= reach or place >= start else " " for place in range(size)]
    for k, place in tracks.items():
        up, down = min(ends[k]) < row, max(ends[k]) > row
        if not (up or down) or not min(ends[k]) <= row <= max(ends[k]):
            continue
        if k in joined or k == own:
            arms = "L" * (k in joined) + "R" * (reach > place or start <= place) + "U" * up + "D" * down
            cells[place] = _ARMS[arms]
        else:
            cells[place] = "│"
    for k, count in joined.items():
        if count > 1:
            cells[tracks.get(k, size - 2)] = str(count)
    return "".join(cells)


_MIRROR = str.maketrans("┐┘┌└┤├", "┌└┐┘├┤")


def _turned(line: str) -> str:
    return line[::-1].translate(_MIRROR)


def _block(rows: Mapping[int, str], column: _Column, sizes: Sequence[int], height: int) -> list[str]:
    """The lines of a column, empty ones included, all of one width."""
    empty = " " * (sum(sizes) + len(sizes) - 1)
    return [" ".join(map(pad, column.cells[rows[row]], sizes)) if row in rows else empty for row in range(height)]
