"""The least set of measurements that shows and separates all species: an exact search.

Every demand (see this species; tell these two apart) must be met by one of the measurements that meet it: a set cover.
It is solved to the end by branching on the demand that fewest measurements meet, for one measurement, then two, and so
on, with what cannot be better left out. Among plans of equally few measurements the one with fewer faces wins, then the
easier one, then the first in order, so the answer is reproducible.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import combinations

from sitesym.experiment.candidates import Candidate
from sitesym.experiment.phonons import LONGITUDINAL, OBLIQUE, TRANSVERSE
from sitesym.experiment.shown import GeometryResult


@dataclass(frozen=True, slots=True)
class Demand:
    """Something a plan should achieve: to see a species (`second` empty) or to tell two apart.

    Names are those of species, `A1g`, or of one kind of their phonons, `E(LO)`.
    """

    first: str
    second: str = ""

    @property
    def words(self) -> str:
        """`see A1g`, `tell A1g from Eg`."""
        return f"tell {self.first} from {self.second}" if self.second else f"see {self.first}"


@dataclass(frozen=True, slots=True)
class Cover:
    """The least plan: indices of the chosen candidates, and the demands met and not met by any candidate."""

    chosen: tuple[int, ...]
    met: tuple[Demand, ...]
    unmet: tuple[Demand, ...]


@dataclass(frozen=True, slots=True)
class _Column:
    """One candidate in the search: the demands that it meets, as bits, and what it costs."""

    index: int
    meets: int
    faces: frozenset[str]
    ease: int

    def is_no_worse_than(self, other: _Column) -> bool:
        """Whether this candidate can always stand in the place of the other."""
        return (
            self.meets | other.meets == self.meets
            and self.faces <= other.faces
            and (self.ease, self.index) <= (other.ease, other.index)
        )


def targets_of(results: Sequence[GeometryResult]) -> dict[str, tuple[str, ...]]:
    """What is to be seen of each species: the names of its longitudinal and transverse phonons where they occur.

    Oblique phonons, whose wavenumber moves with the direction, and the polaritons of forward scattering count only
    where a species shows nothing else. A species that no geometry shows has no target.
    """
    names: dict[str, dict[str, str | None]] = {}
    for result in results:
        for one in result.shown:
            kinds = names.setdefault(one.label, {})
            if one.allowed:
                kinds[one.name] = one.phonon
    return {label: _targets(kinds) for label, kinds in names.items()}


def _targets(kinds: dict[str, str | None]) -> tuple[str, ...]:
    for wanted in ((LONGITUDINAL, TRANSVERSE), (None,), (OBLIQUE,)):
        found = tuple(sorted(name for name, kind in kinds.items() if kind in wanted))
        if found:
            return found
    return ()


def demands_of(results: Sequence[GeometryResult]) -> tuple[Demand, ...]:
    """See every species, and where they occur both its LO and TO phonons; tell all that is seen apart.

    Species are told apart twice: by their phonons, and without regard to LO and TO, which may be too close to count.
    """
    targets = targets_of(results)
    demands = [Demand(name) for label, found in targets.items() for name in (found or (label,))]
    demands += _told_apart([label for label, found in targets.items() if found])
    demands += _told_apart([name for found in targets.values() for name in found])
    return tuple(dict.fromkeys(demands))


def _told_apart(names: Sequence[str]) -> list[Demand]:
    return [Demand(first, second) for first, second in combinations(names, 2)]


def meets(result: GeometryResult, demand: Demand) -> bool:
    """Whether one measurement meets a demand: shows the species, or shows just one of the two."""
    seen = {one.name for one in result.allowed} | {one.label for one in result.allowed}
    if not demand.second:
        return demand.first in seen
    return (demand.first in seen) != (demand.second in seen)


def least_cover(candidates: Sequence[Candidate], results: Sequence[GeometryResult]) -> Cover:
    """Choose the fewest candidates that meet every demand that can be met at all."""
    demands = demands_of(results)
    table = [[meets(result, demand) for result in results] for demand in demands]
    met = tuple(demand for demand, row in zip(demands, table, strict=True) if any(row))
    unmet = tuple(demand for demand, row in zip(demands, table, strict=True) if not any(row))
    rows = [row for row in table if any(row)]
    bits = [sum(row[k] << place for place, row in enumerate(rows)) for k in range(len(results))]
    columns = [_Column(index, bits[index], frozenset(one.faces), one.ease) for index, one in enumerate(candidates)]
    return Cover(_best(_needed(columns), (1 << len(rows)) - 1), met, unmet)


def _needed(columns: list[_Column]) -> list[_Column]:
    """Candidates in whose place no other can stand."""
    return [
        one
        for one in columns
        if one.meets and not any(other is not one and other.is_no_worse_than(one) for other in columns)
    ]


def _best(columns: list[_Column], wanted: int) -> tuple[int, ...]:
    """The best of all covers of the smallest size."""
    for size in range(len(columns) + 1):
        best = min((_cost(cover) for cover in _covers(columns, wanted, size)), default=None)
        if best is not None:
            return best[2]
    raise AssertionError("each of the demands is met by some candidate")


def _cost(cover: tuple[_Column, ...]) -> tuple[int, int, tuple[int, ...]]:
    faces = frozenset(face for one in cover for face in one.faces)
    return len(faces), sum(one.ease for one in cover), tuple(sorted(one.index for one in cover))


def _covers(columns: list[_Column], wanted: int, size: int) -> Iterator[tuple[_Column, ...]]:
    """All covers of `wanted` by `size` candidates of which none could be left out at its turn."""
    if not wanted:
        yield ()
        return
    useful = [one for one in columns if one.meets & wanted]
    most = max(((one.meets & wanted).bit_count() for one in useful), default=0)
    if size * most < wanted.bit_count():
        return
    options = _rarest(useful, wanted)
    for place, one in enumerate(options):
        tried = set(options[:place])
        rest = [other for other in useful if other is not one and other not in tried]
        for others in _covers(rest, wanted & ~one.meets, size - 1):
            yield (one, *others)


def _rarest(columns: list[_Column], wanted: int) -> list[_Column]:
    """The candidates for the demand that fewest of them meet; none where one is met by nobody."""
    best: list[_Column] | None = None
    for place in range(wanted.bit_length()):
        if wanted >> place & 1:
            options = [one for one in columns if one.meets >> place & 1]
            if best is None or len(options) < len(best):
                best = options
    return best or []
