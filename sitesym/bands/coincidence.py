"""Bands at the same place in infrared and Raman: evidence for the loss of inversion, or an accident?"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import exp, hypot

from sitesym.analysis import Analysis
from sitesym.bands.inventory import Family
from sitesym.bands.measurement import INFRARED, RAMAN, Band


@dataclass(frozen=True, slots=True)
class Coincidences:
    """Pairs of bands within their uncertainties.

    pairs     (Raman, infrared) bands.
    expected  how many such pairs independent lists of these lengths would have by accident (mean).
    chance    the probability of at least as many pairs by accident, if bands were scattered evenly in each region.
    allowed   whether the assumed symmetry allows coincidences at all (False with inversion).
    """

    pairs: tuple[tuple[Band, Band], ...]
    expected: float
    chance: float
    allowed: bool


def coincidences(analysis: Analysis, families: Sequence[Family], bands: Sequence[Band]) -> Coincidences:
    """Count coincidences and estimate accidents.

    Both parities of a family lie near the same wavenumber, so accidents are counted within each family's spread: a band
    meets another of its region with the probability of the joint uncertainty over that spread (Poisson).
    """
    raman = [band for band in bands if band.technique == RAMAN]
    infrared = [band for band in bands if band.technique == INFRARED]
    pairs = tuple((one, two) for one in raman for two in infrared if _meet(one, two))
    expected = sum(_accident(one, two, families, bands) for one in raman for two in infrared)
    return Coincidences(pairs, expected, _at_least(len(pairs), expected), not analysis.factor_group.has_inversion)


def _meet(one: Band, two: Band) -> bool:
    return abs(one.wavenumber - two.wavenumber) <= hypot(one.uncertainty, two.uncertainty)


def _accident(one: Band, two: Band, families: Sequence[Family], bands: Sequence[Band]) -> float:
    """Probability that two bands meet by accident: within the narrowest region that both share, else anywhere."""
    reach = hypot(one.uncertainty, two.uncertainty)
    shared = [
        high - low
        for low, high in (family.window for family in families)
        if low <= one.wavenumber <= high and low <= two.wavenumber <= high
    ]
    values = [band.wavenumber for band in bands]
    width = min(shared) if shared else max(values) - min(values)
    return min(1.0, 2 * reach / max(width, 2 * reach))


def _at_least(count: int, mean: float) -> float:
    """Poisson probability of `count` or more."""
    term, below = exp(-mean), 0.0
    for k in range(count):
        below += term
        term *= mean / (k + 1)
    return max(0.0, 1 - below)
