"""The least set of measurements that shows and separates all species: an exact integer program.

Every demand (see this species; tell these two apart) must be met by one of the measurements that meet it: a set cover.
It is solved to proven optimality by branch and bound (HiGHS through scipy). Among plans of equally few measurements the
one with fewer faces wins, then the easier one, then the first in order, so the answer is reproducible.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations

import numpy as np

from sitesym.errors import InconsistencyError
from sitesym.experiment.candidates import Candidate
from sitesym.experiment.shown import GeometryResult

_MEASUREMENT, _FACE, _EASE = 1e6, 1e4, 1e2


@dataclass(frozen=True, slots=True)
class Demand:
    """Something a plan should achieve: to see a species (`second` empty) or to tell two apart."""

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


def demands_of(results: Sequence[GeometryResult]) -> tuple[Demand, ...]:
    """See every species, tell every two apart, and tell LO from TO where both kinds of a species occur."""
    labels = list(dict.fromkeys(one.label for result in results for one in result.shown))
    demands = [Demand(label) for label in labels]
    demands += [Demand(first, second) for first, second in combinations(labels, 2)]
    for label in labels:
        kinds = {one.phonon for result in results for one in result.allowed if one.label == label}
        if {"LO", "TO"} <= kinds:
            demands.append(Demand(f"{label}(LO)", f"{label}(TO)"))
    return tuple(demands)


def meets(result: GeometryResult, demand: Demand) -> bool:
    """Whether one measurement meets a demand: shows the species, or shows just one of the two."""
    seen = {one.label for one in result.allowed} | {one.name for one in result.allowed}
    if not demand.second:
        return demand.first in seen
    return (demand.first in seen) != (demand.second in seen)


def least_cover(candidates: Sequence[Candidate], results: Sequence[GeometryResult]) -> Cover:
    """Choose the fewest candidates that meet every demand that can be met at all.

    Raises InconsistencyError if the solver does not prove its answer best.
    """
    demands = demands_of(results)
    table = np.array([[meets(result, demand) for result in results] for demand in demands]).reshape(len(demands), -1)
    possible = [bool(row.any()) for row in table]
    met = tuple(demand for demand, can in zip(demands, possible, strict=True) if can)
    unmet = tuple(demand for demand, can in zip(demands, possible, strict=True) if not can)
    if not met:
        return Cover((), (), unmet)
    return Cover(_solve(table[possible], candidates), met, unmet)


def _solve(table: np.typing.NDArray[np.bool_], candidates: Sequence[Candidate]) -> tuple[int, ...]:
    from scipy.optimize import Bounds, LinearConstraint, milp

    count = table.shape[1]
    faces = sorted({face for one in candidates for face in one.faces})
    cost = [_MEASUREMENT + _EASE * one.ease + index for index, one in enumerate(candidates)]
    cost += [_FACE] * len(faces)
    cover = np.hstack([table.astype(float), np.zeros((len(table), len(faces)))])
    uses = np.zeros((count * len(faces), count + len(faces)))
    for row, (index, face) in enumerate((i, f) for i in range(count) for f in range(len(faces))):
        uses[row, count + face] = 1
        uses[row, index] = -float(faces[face] in candidates[index].faces)
    solved = milp(
        np.array(cost),
        constraints=[LinearConstraint(cover, lb=1), LinearConstraint(uses, lb=0)],
        integrality=np.ones(len(cost)),
        bounds=Bounds(0, 1),
        options={"mip_rel_gap": 0.0},
    )
    if solved.status != 0:
        raise InconsistencyError(f"The least plan was not found: {solved.message}.", "Give fewer faces or mounts.")
    return tuple(int(index) for index in np.flatnonzero(np.round(solved.x[:count]) == 1))
