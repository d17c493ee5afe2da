"""What a correlation diagram shows: species in three columns, and which of them become which.

Species are the boxes: all vibrations of one species of the free molecule stand in one box, for they share their fate.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from sitesym.views.figures.crossings import fewest_crossings

if TYPE_CHECKING:
    from sitesym.analysis import Analysis
    from sitesym.fate import Component, Fate
    from sitesym.known_units import KnownVibration
    from sitesym.molecular import MoleculeRow
    from sitesym.selection import Activity

Lines = tuple[tuple[str, ...], ...]
"""Lines of text, each of parts to be joined by commas."""

_NUMBERED = re.compile(r"ν(\d+)((?: ×\d+)?)")
_LONG_RUN = 3


@dataclass(frozen=True, slots=True)
class Box:
    """One species: `count` motions of it, with its selection rules.

    lines  what stands below the species.
    """

    count: int
    activity: Activity
    lines: Lines

    @property
    def label(self) -> str:
        """The species, in plain ASCII."""
        return self.activity.label


@dataclass(frozen=True, slots=True)
class Tie:
    """Box `start` of one column becomes box `end` of the next, `times` times for each motion."""

    start: int
    end: int
    times: int


@dataclass(frozen=True, slots=True)
class Layers:
    """Three columns of boxes from the top, with the ties between the first two and between the last two."""

    title: str
    free: tuple[Box, ...]
    site: tuple[Box, ...]
    crystal: tuple[Box, ...]
    down: tuple[Tie, ...]
    up: tuple[Tie, ...]


def layers_of(analysis: Analysis, row: MoleculeRow) -> tuple[Layers, ...]:
    """Internal vibrations, librations and translations of one kind of unit; those it lacks are left out."""
    kinds = [one.kind for one in row.correlation.vibrations]
    internal = [
        (_internal_line(kind, fate, names),) for kind, fate, names in zip(kinds, row.fates, row.names, strict=True)
    ]
    names = [_short_names(fate, known) for fate, known in zip(row.fates, row.names, strict=True)]
    turns, shifts = _axes("about", row.librations), _axes("along", row.translations)
    shared = _acoustic_words(analysis)
    found = [
        _layers("Internal vibrations", row.fates, internal, names, row, analysis),
        _layers("Librations", row.librations, turns, [()] * len(turns), row, analysis),
        _layers("Translations", row.translations, shifts, [()] * len(shifts), row, analysis, shared),
    ]
    return tuple(one for one in found if one.free)


def _internal_line(kind: str, fate: Fate, names: Sequence[KnownVibration]) -> tuple[str, ...]:
    """`ν6, ν9 bending`, or `2 bending` where there are no short names."""
    short = _short_names(fate, names)
    if not short:
        return (f"{fate.free.count} {kind}",)
    *first, last = _in_runs(short)
    return (*first, f"{last} {kind}")


def _short_names(fate: Fate, names: Sequence[KnownVibration]) -> tuple[str, ...]:
    """The usual names, where all have one that is more than a number behind the species."""
    short = tuple(one.name for one in names if one.name and not one.name.startswith(fate.free.label))
    return short if len(short) == fate.free.count else ()


def _axes(word: str, fates: Sequence[Fate]) -> list[Lines]:
    """`about z` or `about x, y`: which axes of the molecule, where its main axis tells them apart."""
    sizes = [fate.free.activity.dimension for fate in fates]
    if 2 not in sizes:
        return [()] * len(fates)
    return [((f"{word} {'z' if size == 1 else 'x, y'}",),) for size in sizes]


def _acoustic_words(analysis: Analysis) -> Callable[[str, int], str]:
    """What to say of a species of the crystal that has acoustic modes: how many of these translations are acoustic."""
    molecular = analysis.molecular
    kinds = len(molecular.molecules) + len(molecular.atoms) + len(molecular.nets) if molecular else 0

    def words(label: str, count: int) -> str:
        acoustic = analysis.species_row(label).acoustic
        if not acoustic:
            return ""
        if kinds > 1:
            return "acoustic share"
        return "acoustic" if count == acoustic else f"{acoustic} acoustic"

    return words


def _layers(
    title: str, fates: Sequence[Fate], lines: Sequence[Lines], names: Sequence[tuple[str, ...]],
    row: MoleculeRow, analysis: Analysis, remark: Callable[[str, int], str] = lambda label, count: "",
) -> Layers:  # fmt: skip
    site_group = row.units.site_group
    assert site_group is not None
    free = _free_boxes(fates, lines)
    site = _target_boxes(fates, names, lambda fate: fate.site, [one.label for one in site_group.species])
    crystal = _target_boxes(fates, names, lambda fate: fate.crystal, [row.label for row in analysis.species], remark)
    down, up = _ties(fates, free, site, crystal)
    return _ordered(Layers(title, free, site, crystal, down, up))


def _free_boxes(fates: Sequence[Fate], lines: Sequence[Lines]) -> tuple[Box, ...]:
    """One box for each species of the free molecule; each kind of vibration has its line in it."""
    labels = dict.fromkeys(fate.free.label for fate in fates)
    boxes = []
    for label in labels:
        mine = [(fate, line) for fate, line in zip(fates, lines, strict=True) if fate.free.label == label]
        count = sum(fate.free.count for fate, _ in mine)
        boxes.append(Box(count, mine[0][0].free.activity, tuple(line for _, few in mine for line in few)))
    return tuple(boxes)


def _target_boxes(
    fates: Sequence[Fate], names: Sequence[tuple[str, ...]], parts_of: Callable[[Fate], Iterable[Component]],
    order: Sequence[str], remark: Callable[[str, int], str] = lambda label, count: "",
) -> tuple[Box, ...]:  # fmt: skip
    """One box for each species of the site or of the crystal, with all that becomes it."""
    activities: dict[str, Activity] = {}
    counts: dict[str, int] = {}
    inside: dict[str, list[str]] = {}
    nameless: set[str] = set()
    for fate, short in zip(fates, names, strict=True):
        for part in parts_of(fate):
            activities[part.label] = part.activity
            counts[part.label] = counts.get(part.label, 0) + part.count * fate.free.count
            inside.setdefault(part.label, []).extend(f"{one} ×{part.count}" if part.count > 1 else one for one in short)
            if not short:
                nameless.add(part.label)
    return tuple(
        Box(
            counts[label],
            activities[label],
            _target_lines(inside[label], label in nameless, remark(label, counts[label])),
        )
        for label in order
        if label in counts
    )


def _target_lines(names: Sequence[str], nameless: bool, remark: str) -> Lines:
    """The names of what is in the box, unless some of it has none; and the remark."""
    lines = [] if nameless or not names else [_in_runs(names)]
    return tuple(lines + ([(remark,)] if remark else []))


def _in_runs(names: Sequence[str]) -> tuple[str, ...]:
    """`ν1–ν4, ν6, ν7 ×2`: in the order of their numbers, three and more that follow each other as a run."""
    numbered = sorted((int(found[1]), found[2], name) for name in names if (found := _NUMBERED.fullmatch(name)))
    others = [name for name in names if not _NUMBERED.fullmatch(name)]
    runs: list[list[tuple[int, str, str]]] = []
    for one in numbered:
        if runs and runs[-1][-1][:2] == (one[0] - 1, one[1]):
            runs[-1].append(one)
        else:
            runs.append([one])
    return tuple(words for run in runs for words in _run_words(run)) + tuple(others)


def _run_words(run: Sequence[tuple[int, str, str]]) -> list[str]:
    if len(run) < _LONG_RUN:
        return [name for _, _, name in run]
    return [f"ν{run[0][0]}–ν{run[-1][0]}{run[0][1]}"]


def _ties(
    fates: Sequence[Fate], free: Sequence[Box], site: Sequence[Box], crystal: Sequence[Box]
) -> tuple[tuple[Tie, ...], tuple[Tie, ...]]:
    down: dict[tuple[int, int], int] = {}
    up: dict[tuple[int, int], int] = {}
    for start, middle, times, ends in _steps(fates):
        i, j = _index(free, start), _index(site, middle)
        down[i, j] = times
        for end in ends:
            up[j, _index(crystal, end.label)] = end.count
    return tuple(Tie(*ends, times) for ends, times in down.items()), tuple(Tie(*ends, n) for ends, n in up.items())


def _steps(fates: Sequence[Fate]) -> Iterator[tuple[str, str, int, tuple[Component, ...]]]:
    """Species of the free molecule, species of the site, how often, and what that becomes in the crystal."""
    for fate in fates:
        for branch in fate.branches:
            yield fate.free.label, branch.site.label, branch.site.count, branch.crystal


def _index(boxes: Sequence[Box], label: str) -> int:
    return next(number for number, box in enumerate(boxes) if box.label == label)


def _ordered(found: Layers) -> Layers:
    """The same with as few crossings as possible."""
    sizes = len(found.free), len(found.site), len(found.crystal)
    left, right = [(one.start, one.end) for one in found.down], [(one.start, one.end) for one in found.up]
    orders = fewest_crossings(sizes, left, right)
    first, second, third = ({member: place for place, member in enumerate(order)} for order in orders)
    return Layers(
        found.title,
        tuple(found.free[member] for member in orders[0]),
        tuple(found.site[member] for member in orders[1]),
        tuple(found.crystal[member] for member in orders[2]),
        tuple(Tie(first[one.start], second[one.end], one.times) for one in found.down),
        tuple(Tie(second[one.start], third[one.end], one.times) for one in found.up),
    )
