"""Measured bands put on families of components: the cheapest way to give each band a place of its own.

The cost of a band in a family grows with its distance from the expected wavenumber, with every further band of the
family, and where the free molecule forbids what the crystal allows; a band may stay without a place at a fixed price.
The whole is a linear assignment, solved exactly (Kuhn 1955; scipy). The weights below are common practice, not physics.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from sitesym.bands.inventory import Family
from sitesym.bands.measurement import TECHNIQUES, Band

UNPLACED = 6.0
"""Cost of leaving a band without a place: that of a shift of three and a half standard deviations."""

_FURTHER, _FORBIDDEN_FREE, _UNKNOWN, _BY_COUNT = 0.7, 1.2, 1.6, 0.9
_LOWER_FIRST = 0.1
"""Of bands that are placed by count alone the lower come first: longitudinal companions lie above."""

_RIVAL = 1.0
"""Another phase must first be there: a little dearer than the crystal itself."""

_IMPOSSIBLE = 1e6


@dataclass(frozen=True, slots=True)
class Placed:
    """A band, the family it was given (None: no place), the cost, and families that cost little more.

    rival  the family of another phase that took the band, or None.
    """

    band: Band
    family: Family | None
    cost: float
    alternatives: tuple[Family, ...]
    rival: Family | None = None


def assign(
    bands: Sequence[Band],
    families: Sequence[Family],
    *,
    pinned: Sequence[tuple[float, str]] = (),
    forbidden: Sequence[tuple[float, str]] = (),
    rivals: Sequence[Family] = (),
) -> tuple[Placed, ...]:
    """Give every band its family, in the order of the bands.

    pinned, forbidden  (wavenumber, family name) that the user insists on or rules out.
    rivals             families of other phases that may be there: on the same terms, at a small cost more.
    """
    placed: dict[int, Placed] = {}
    for technique in TECHNIQUES:
        chosen = [index for index, band in enumerate(bands) if band.technique == technique]
        mine = [bands[index] for index in chosen]
        results = _assign_one(mine, families, technique, pinned, forbidden, rivals)
        placed.update(zip(chosen, results, strict=True))
    return tuple(placed[index] for index in range(len(bands)))


def _assign_one(
    bands: Sequence[Band], families: Sequence[Family], technique: str,
    pinned: Sequence[tuple[float, str]], forbidden: Sequence[tuple[float, str]], rivals: Sequence[Family],
) -> list[Placed]:  # fmt: skip
    from scipy.optimize import linear_sum_assignment

    if not bands:
        return []
    shown = {family.name for family in families if family.capacity(technique)}
    pinned = [pin for pin in pinned if pin[1] in shown]  # others speak of a band of the other technique
    base = np.array([[_cost(band, family, technique, pinned, forbidden) for family in families] for band in bands])
    base = base.reshape(len(bands), len(families)) + np.array([[_weakness(band, bands)] for band in bands])
    slots = [(k, n) for k, family in enumerate(families) for n in range(min(family.capacity(technique), len(bands)))]
    columns = [base[:, k] + _FURTHER * n * families[k].is_internal for k, n in slots]
    stay = np.full((len(bands), len(bands)), _IMPOSSIBLE)
    np.fill_diagonal(stay, UNPLACED)
    others = [(rival, n) for rival in rivals for n in range(min(rival.capacity(technique), len(bands)))]
    foreign = [[_cost(band, rival, technique, (), ()) + _RIVAL + _FURTHER * n for band in bands] for rival, n in others]
    matrix = np.column_stack([*columns, *(np.array(column) for column in foreign), stay])
    _, taken = linear_sum_assignment(matrix)
    results = []
    for row, (band, column) in enumerate(zip(bands, taken.tolist(), strict=True)):
        place = slots[column][0] if column < len(slots) else None
        result = _placed(band, families, base[row], place, technique)
        beyond = column - len(slots)
        results.append(replace(result, rival=others[beyond][0]) if 0 <= beyond < len(others) else result)
    return results


def _placed(
    band: Band, families: Sequence[Family], costs: np.typing.NDArray[np.float64], chosen: int | None, technique: str
) -> Placed:
    cost = UNPLACED if chosen is None else float(costs[chosen])
    near = [
        k for k in np.argsort(costs, kind="stable").tolist()
        if k != chosen and costs[k] < min(cost + 2, UNPLACED) and families[k].capacity(technique)
    ]  # fmt: skip
    family = None if chosen is None else families[chosen]
    return Placed(band, family, cost, tuple(families[k] for k in near[:3]))


def _cost(
    band: Band, family: Family, technique: str,
    pinned: Sequence[tuple[float, str]], forbidden: Sequence[tuple[float, str]],
) -> float:  # fmt: skip
    wanted = [name for wavenumber, name in pinned if _is(band, wavenumber)]
    if wanted:
        return 0.0 if family.name in wanted else _IMPOSSIBLE
    if any(_is(band, wavenumber) and name == family.name for wavenumber, name in forbidden):
        return _IMPOSSIBLE
    low, high = family.window
    if not low <= band.wavenumber <= high:
        return _IMPOSSIBLE
    extra = 0.0 if family.free_allows(technique) else _FORBIDDEN_FREE
    if family.wavenumber is None:
        return extra + (_UNKNOWN if family.is_internal else _BY_COUNT + _LOWER_FIRST * band.wavenumber / high)
    return extra + _shift_cost(band.wavenumber - family.wavenumber, family.wavenumber)


def _shift_cost(shift: float, wavenumber: float) -> float:
    """Half the square of the shift in standard deviations: 12 cm⁻¹ and one per cent; stretches of hydrogen go down."""
    if wavenumber > 2500:
        return float(0.5 * ((shift + 200) / 300) ** 2)
    return float(0.5 * (shift / (12 + 0.012 * wavenumber)) ** 2)


def _weakness(band: Band, bands: Sequence[Band]) -> float:
    """Weak bands come second: a little for every factor of ten below the strongest, where intensities are stated."""
    strongest = max((other.intensity or 0.0 for other in bands), default=0.0)
    if not band.intensity or not strongest:
        return 0.0
    return min(1.5, 0.6 * float(np.log10(strongest / band.intensity)))


def _is(band: Band, wavenumber: float) -> bool:
    return abs(band.wavenumber - wavenumber) <= max(0.5, band.uncertainty)
