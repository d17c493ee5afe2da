"""Sums of band profiles fitted to a piece of a spectrum.

A pseudo-Voigt profile is the sum of a Lorentzian and a Gaussian of one width with shares η and 1 − η (Wertheim, Butler,
West and Buchanan, Rev. Sci. Instrum. 45, 1369, 1974). Uncertainties are those of least squares: the square roots of the
diagonal of s²(JᵀJ)⁻¹, s² the variance of what is left over.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from sitesym.groups.operation import Floats

SHAPES = ("pseudo-voigt", "lorentzian")
_PER_BAND = 4
_MOST_EVALUATIONS = 200
_POINTS = 3000


@dataclass(frozen=True, slots=True)
class Profile:
    """One band: centre and full width at half maximum in cm⁻¹, height, share of the Lorentzian (0 to 1)."""

    centre: float
    height: float
    width: float
    share: float = 1.0


@dataclass(frozen=True, eq=False)
class Fit:
    """Profiles with the uncertainties of their centres and heights, and the value of Schwarz's criterion.

    rest        root of the mean square of what is left over.
    background  (2,) level at the middle of the piece, and slope per cm⁻¹.
    """

    profiles: tuple[Profile, ...]
    centre_errors: tuple[float, ...]
    height_errors: tuple[float, ...]
    background: Floats
    criterion: float
    rest: float


def curve(x: Floats, profile: Profile) -> Floats:
    """A profile (n,) at wavenumbers (n,)."""
    return _values(x, profile.height, profile.centre, profile.width, profile.share)


def _values(x: Floats, height: float, centre: float, width: float, share: float) -> Floats:
    square = (2 * (x - centre) / width) ** 2
    return np.asarray(height * (share / (1 + square) + (1 - share) * np.exp(-np.log(2) * square)))


def fit(
    x: Floats, y: Floats, guesses: Sequence[Profile], step: float, shape: str = SHAPES[0], widest: float = np.inf
) -> Fit:
    """Fit profiles and a straight background to y (n,) at x (n,); `step` is the distance of points in cm⁻¹.

    widest  upper bound of all widths, cm⁻¹.
    """
    from scipy.optimize import least_squares

    every = max(1, len(x) // _POINTS)
    x, y, step = x[::every], y[::every], step * every
    scale = max(float(np.ptp(y)), 1e-300)
    start, low, high = _limits(guesses, step, scale, shape, widest)
    middle, half = (x[0] + x[-1]) / 2, (x[-1] - x[0]) / 2

    def rest(p: Floats) -> Floats:
        return _sum(x, p, middle, half) - y / scale

    def slopes(p: Floats) -> Floats:
        return _slopes(x, p, middle, half)

    found = least_squares(
        rest, np.clip(start, low + 1e-9, high - 1e-9), bounds=(low, high), x_scale=np.maximum(np.abs(start), 1e-3),
        jac=slopes, max_nfev=_MOST_EVALUATIONS,
    )  # fmt: skip
    return _fit(found.x, found.jac, found.fun, scale, half)


def _sum(x: Floats, p: Floats, middle: float, half: float) -> Floats:
    total = p[-2] + p[-1] * (x - middle) / half
    for height, centre, width, share in p[:-2].reshape(-1, _PER_BAND):
        total = total + _values(x, height, centre, width, share)
    return np.asarray(total)


def _slopes(x: Floats, p: Floats, middle: float, half: float) -> Floats:
    """Derivatives (n, parameters) of `_sum`."""
    columns = []
    for height, centre, width, share in p[:-2].reshape(-1, _PER_BAND):
        away = x - centre
        square = (2 * away / width) ** 2
        lorentzian, gaussian = 1 / (1 + square), np.exp(-np.log(2) * square)
        along = -height * (share * lorentzian**2 + (1 - share) * np.log(2) * gaussian)
        columns += [
            share * lorentzian + (1 - share) * gaussian,
            along * -8 * away / width**2,
            along * -2 * square / width,
            height * (lorentzian - gaussian),
        ]
    return np.column_stack([*columns, np.ones(len(x)), (x - middle) / half])


def _limits(
    guesses: Sequence[Profile], step: float, scale: float, shape: str, widest: float
) -> tuple[Floats, Floats, Floats]:
    start, low, high = [], [], []
    for one in guesses:
        share = (1.0 - 1e-6, 1.0) if shape == "lorentzian" else (0.0, 1.0)
        first = share[1] if share[0] else min(one.share, 0.7)
        start += [max(one.height / scale, 1e-6), one.centre, one.width, first]
        low += [0.0, one.centre - one.width, max(0.7 * step, 0.15 * one.width), share[0]]
        high += [np.inf, one.centre + one.width, max(min(6 * one.width, widest), 1.1 * one.width) + step, share[1]]
    return np.array([*start, 0.0, 0.0]), np.array([*low, -np.inf, -np.inf]), np.array([*high, np.inf, np.inf])


def _fit(p: Floats, jacobian: Floats, rest: Floats, scale: float, half: float) -> Fit:
    points, free = jacobian.shape
    variance = float(rest @ rest) / max(points - free, 1)
    errors = np.sqrt(np.clip(variance * np.diagonal(np.linalg.pinv(jacobian.T @ jacobian)), 0, None))
    rows, sigmas = p[:-2].reshape(-1, _PER_BAND), errors[:-2].reshape(-1, _PER_BAND)
    profiles = tuple(Profile(float(c), float(h) * scale, float(w), float(s)) for h, c, w, s in rows)
    criterion = points * np.log(max(float(rest @ rest) / points, 1e-300)) + free * np.log(points)
    return Fit(
        profiles, tuple(float(one) for one in sigmas[:, 1]), tuple(float(one) * scale for one in sigmas[:, 0]),
        np.array([p[-2] * scale, p[-1] * scale / half]), float(criterion),
        float(np.sqrt(rest @ rest / points)) * scale,
    )  # fmt: skip
