"""The background under a spectrum, and the noise on it.

Asymmetric least squares smoothing (Eilers and Boelens, Baseline correction with asymmetric least squares smoothing,
Leiden University Medical Centre report, 2005; after Whittaker 1923): the smooth curve z that makes
Σ wᵢ(yᵢ − zᵢ)² + λ Σ (Δ²zᵢ)² least, where points above z weigh p and points below 1 − p.
"""

from __future__ import annotations

import numpy as np

from sitesym.groups.operation import Floats

LENGTHS = {"raman": 800.0, "infrared": 10000.0}
"""cm⁻¹. The background follows what varies over longer distances only: fluorescence, and the far broader bands of
infrared spectra must stay."""

_ASYMMETRY = 0.005
_ROUNDS = 30
_POINTS_PER_LENGTH = 250
_LAGS = (1, 2, 4)
_LEAST_NOISE = 1e-4
"""Share of the range of a signal; no detector is better."""


def baseline(wavenumbers: Floats, signal: Floats, length: float) -> Floats:
    """The background (n,) of a signal (n,) in which bands point upwards.

    length  in the unit of the axis: λ is chosen so that waves of this length are halved by the smoothing where points
            weigh least, above the background.
    """
    span = float(wavenumbers[-1] - wavenumbers[0])
    length = min(length, 3 * span)
    bins = min(len(signal), max(20, round(_POINTS_PER_LENGTH * span / length)))
    edges = np.linspace(wavenumbers[0], wavenumbers[-1], bins + 1)
    place = np.clip(np.searchsorted(edges, wavenumbers, side="right") - 1, 0, bins - 1)
    order = np.argsort(place, kind="stable")
    starts = np.flatnonzero(np.diff(place, prepend=-1))
    centres = np.array([wavenumbers[part].mean() for part in np.split(order, starts[1:])])
    levels = np.array([np.median(signal[part]) for part in np.split(order, starts[1:])])
    smooth = _asymmetric(levels, length / (span / max(len(levels), 1)))
    rough = np.interp(wavenumbers, centres, smooth)
    return rough + _bias(signal - rough, noise(signal))


def _asymmetric(levels: Floats, points: float) -> Floats:
    """The curve for evenly spaced levels; `points` is the length in steps."""
    from scipy.linalg import solveh_banded

    n = len(levels)
    stiffness = _ASYMMETRY * (points / (2 * np.pi)) ** 4
    bands = np.zeros((3, n))
    bands[2] = np.convolve(np.ones(n - 2), [1, 4, 1])
    bands[1, 1:] = np.convolve(np.ones(n - 2), [-2, -2])
    bands[0, 2:] = 1
    weights = np.ones(n)
    for _ in range(_ROUNDS):
        matrix = stiffness * bands
        matrix[2] += weights
        curve = np.asarray(solveh_banded(matrix, weights * levels))
        again = np.where(levels > curve, _ASYMMETRY, 1 - _ASYMMETRY)
        if (again == weights).all():
            break
        weights = again
    return curve


def _bias(rest: Floats, sigma: float) -> float:
    """How far the curve lies below the middle of the noise: the median of what is no band."""
    quiet = rest[np.abs(rest) < 3 * sigma]
    return float(np.median(quiet)) if len(quiet) > 20 else 0.0


def noise(signal: Floats) -> float:
    """Standard deviation of the noise, from second differences, over which bands and background vanish.

    Lags up to four points are tried, for smoothing and zero filling tie neighbours together.
    """
    found = [_deviation(signal[2 * lag :] - 2 * signal[lag:-lag] + signal[: -2 * lag]) for lag in _LAGS]
    return max(*found, _LEAST_NOISE * float(np.ptp(signal)))


def _deviation(differences: Floats) -> float:
    """Robust standard deviation of single values from second differences, whose variance is six times as large."""
    return float(1.4826 * np.median(np.abs(differences - np.median(differences))) / np.sqrt(6))
