"""Other solutions of a fit: those that give the same curves by symmetry, and those that fit about as well.

Intensities do not change when the sample is turned by 180°, when all letters change their sign, or when all phases do.
Beyond that a species may allow letters to be exchanged, single signs to be changed, or the offset to be moved by a
fraction of a turn together with either: each is tried, and kept where the curves agree at every angle.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import permutations, product

import numpy as np

from sitesym.experiment.angle_model import AngleModel, Minimum, is_near, letters_of, tidied, unknowns
from sitesym.groups.operation import Booleans, Floats

Complexes = np.typing.NDArray[np.complex128]
_TURNS = np.radians(np.arange(0.0, 180.0, 15.0))
_GRID = np.radians(np.arange(0.0, 180.0, 4.5))
_SAME_CURVE, _SAME_FIT = 1e-7, 1e-5
_DARK = 1e-3
_CLOSE = 4.0
"""Solutions whose χ² is larger by less than this (two standard deviations of one unknown) are reported."""


@dataclass(frozen=True, eq=False)
class Twin:
    """Unknowns of a solution; `exact` where its measured curves are those of the best minimum."""

    x: Floats
    exact: bool
    chi_square: float


def solutions(model: AngleModel, minima: Sequence[Minimum], free: Booleans, variance: float) -> list[Twin]:
    """The best minimum first, its exact twins, and other minima with its curves or such as the data hardly exclude.

    variance  of a point in units of its stated error.
    """
    best = minima[0]
    found = _rearrangements(model, best, free)
    limit = best.chi_square + _CLOSE * variance + model.slack
    for one in minima[1:]:
        if one.chi_square > limit or any(_is_same(model, one.x, twin.x, limit) for twin in found):
            continue
        gap = _gaps(model, one.x, best.x)
        found.append(Twin(one.x, bool((gap[_kinds(model)] < _SAME_FIT).all()), one.chi_square))
    return found


def _is_same(model: AngleModel, x: Floats, other: Floats, limit: float) -> bool:
    """Whether two solutions are one: about equal, or in one flat valley, with nothing between them that fits worse."""
    between = other + np.array([[0.25], [0.5], [0.75]]) * (x - other)
    return is_near(x, other) or bool((np.sum(model.residuals(between) ** 2, axis=-1) <= limit).all())


def _rearrangements(model: AngleModel, best: Minimum, free: Booleans) -> list[Twin]:
    """Turns and rearrangements of letters with the same measured curves, the solution itself first; held ones stay."""
    turns = _TURNS if free[-2] else _TURNS[:1]
    letters = list(_rearranged(letters_of(best.x), free))
    tried = np.array([unknowns(one, best.x[-2] + turn, best.x[-1]) for turn in turns for one in letters])
    gaps = _gaps(model, tried, best.x)
    twins = [Twin(best.x, True, best.chi_square)]
    for x, gap in zip(tried, gaps, strict=True):
        if (gap[_kinds(model)] < _SAME_CURVE).all():
            candidate = tidied(x)
            if not any(np.allclose(candidate, twin.x, atol=1e-9) for twin in twins):
                twins.append(Twin(candidate, True, best.chi_square))
    return twins


def _kinds(model: AngleModel) -> Booleans:
    """(2,) whether parallel and crossed intensities were measured."""
    return np.array([not model.crossed.all(), bool(model.crossed.any())])


def is_same_everywhere(model: AngleModel, x: Floats, other: Floats) -> bool:
    """Whether two solutions have the same parallel and crossed curves, measured or not."""
    return bool((_gaps(model, x, other) < _SAME_FIT).all())


def _gaps(model: AngleModel, x: Floats, other: Floats) -> Floats:
    """(..., 2) largest differences of parallel and crossed curves with background, in units of the largest value."""
    first, second = _curves(model, x), _curves(model, other)
    return np.asarray(np.abs(first - second).max(axis=-1) / max(float(np.abs(second).max()), 1e-300))


def _curves(model: AngleModel, x: Floats) -> Floats:
    """(..., 2, n) parallel and crossed intensities on a grid of angles."""
    both = [AngleModel(model.elements, _GRID, np.full(len(_GRID), which), _GRID, _GRID) for which in (False, True)]
    return np.stack([one.intensities(x) for one in both], axis=-2)


def _rearranged(letters: Complexes, free: Booleans) -> Iterator[Complexes]:
    """Letters exchanged and with single signs changed; a letter that is held stays where it is."""
    k = len(letters)
    places = list(np.flatnonzero(free[:k])) if k <= 4 else []
    for order in permutations(places):
        moved = letters.copy()
        moved[places] = letters[list(order)]
        for signs in product((1.0, -1.0), repeat=k - 1):
            yield moved * np.concatenate([[1.0], signs])


def preferred(twins: Sequence[Twin]) -> Twin:
    """The one to report: no negative background, then the smallest offset, then the fewest negative letters."""

    def cost(twin: Twin) -> tuple[bool, float, bool, int, tuple[float, ...]]:
        letters = letters_of(twin.x)
        offset = round(float(twin.x[-2]), 7)
        return (
            bool(twin.x[-1] < -_DARK),
            abs(offset),
            offset < 0,
            int(np.sum(letters.real < 0)),
            tuple(-np.abs(letters).round(9)),
        )

    return min((twin for twin in twins if twin.exact), key=cost)
