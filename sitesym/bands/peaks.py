"""Bands picked from a spectrum: found as narrow humps of any width, then fitted with profiles.

A hump is found where the spectrum, filtered with the negative second derivative of a Gaussian (a matched filter that
straight backgrounds do not pass), rises above the noise of the filter, from narrow to wide Gaussians. So shoulders,
which have no maximum of their own, are found too. A doubtful band stays if Schwarz's criterion (Ann. Stat. 6, 461,
1978) prefers the fit with it.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from sitesym.bands.baseline import LENGTHS, baseline, noise
from sitesym.bands.measurement import Band
from sitesym.bands.profiles import SHAPES, Fit, Profile, curve, fit
from sitesym.bands.spectrum import Spectrum
from sitesym.errors import UsageError
from sitesym.groups.operation import Floats

Indices = npt.NDArray[np.intp]

CALIBRATION = 1.0
"""cm⁻¹, standard deviation of the scale of an instrument that was not calibrated for the day: common practice."""

LEAST = 0.01
"""Height of the weakest band that is picked, as a share of the strongest."""

MOST = 250
_RIPPLE = 0.04
"""A narrow hump that makes up less of the height than this is noise on a strong band, which often grows with it."""

_SIGNIFICANT = 6.0
"""By how many standard deviations a hump must rise in the matched filter; 1e6 places of white noise give none."""

_WIDEST = {"raman": 60.0, "infrared": 400.0}
"""cm⁻¹, full width; wider humps of Raman spectra are fluorescence or glass (common practice)."""

_BETTER = 12.0
"""By how much Schwarz's criterion must fall for a doubtful band; 10 is called very strong (Kass and Raftery 1995)."""

_REACH, _FLANK, _TOGETHER = 2.5, 0.15, 7
"""Bands are fitted together within so many widths, or where a flank has this share of the other's height; at most so
many at a time."""

_HELD = 0.98
"""A band whose width the fit had to hold below the widest allowed is background."""

_LIKENESS = 0.005
"""How well model profiles describe bands: share of the height that may be left over, and of the width in the centre."""


@dataclass(frozen=True, slots=True)
class Peak:
    """One picked band.

    profile             centre, height above the background, width, share of the Lorentzian.
    uncertainty         standard deviation of the centre in the fit, cm⁻¹; height_uncertainty that of the height.
    is_shoulder         it has no maximum of its own.
    is_spike            no wider than the distance of points: a cosmic ray or a line of the electronics, perhaps.
    """

    profile: Profile
    uncertainty: float
    height_uncertainty: float
    is_shoulder: bool
    is_spike: bool

    @property
    def wavenumber(self) -> float:
        """Its centre, cm⁻¹."""
        return self.profile.centre

    @property
    def height(self) -> float:
        """Above the background, in the unit of the spectrum."""
        return self.profile.height

    @property
    def note(self) -> str:
        """What to mind."""
        spike = "as narrow as the step, check for a spike" if self.is_spike else ""
        return ", ".join(filter(None, ("shoulder" if self.is_shoulder else "", spike)))


@dataclass(frozen=True, eq=False)
class Picks:
    """All bands of a spectrum.

    background  (n,) under the bands, fitted (n,) background and bands together, noise its standard deviation.
    """

    spectrum: Spectrum
    peaks: tuple[Peak, ...]
    background: Floats
    fitted: Floats
    noise: float

    def bands(self, calibration: float = CALIBRATION) -> tuple[Band, ...]:
        """The picked bands for `explain`; the uncertainty of the scale is added to that of the fit."""
        return tuple(
            Band(
                round(peak.wavenumber, 2), self.spectrum.technique,
                round(float(np.hypot(peak.uncertainty, calibration)), 2),
                float(f"{peak.height:.4g}"), round(peak.profile.width, 2), "", peak.note,
            )
            for peak in self.peaks
        )  # fmt: skip


def pick(spectrum: Spectrum, *, shape: str = SHAPES[0], least: float = LEAST, length: float | None = None) -> Picks:
    """Find and fit the bands of a spectrum.

    shape   "pseudo-voigt" or "lorentzian".
    least   height of the weakest band as a share of the strongest.
    length  cm⁻¹ over which the background varies; None: as usual for the technique.

    Raises UsageError where an argument makes no sense.
    """
    if shape not in SHAPES or not 0 <= least < 1 or (length is not None and not length > 0):
        raise UsageError(
            f"Bands cannot be picked with {shape}, {least:g}, {length}.", f"Shapes are {', '.join(SHAPES)}."
        )
    x = spectrum.wavenumbers
    background = baseline(x, spectrum.signal, length or LENGTHS[spectrum.technique])
    signal = spectrum.signal - background
    sigma = noise(signal)
    step = float(np.median(np.diff(x)))
    rules = _Rules(step, sigma, shape, _WIDEST[spectrum.technique])
    groups = _grouped(_humps(x, signal, rules, least))
    peaks = [peak for group in groups for peak in _peaks(x, _pruned(x, signal, group, rules), step)]
    top = max((peak.height for peak in peaks), default=0.0)
    real = [peak for peak in peaks if peak.height >= least * top and peak.profile.width < _HELD * rules.widest]
    kept = sorted(real, key=lambda peak: peak.wavenumber)
    fitted = background + sum((curve(x, peak.profile) for peak in kept), np.zeros(len(x)))
    return Picks(spectrum, tuple(kept), background, fitted, sigma)


@dataclass(frozen=True, slots=True)
class _Rules:
    """Distance of points, noise, kind of profile, and the widest band (cm⁻¹)."""

    step: float
    sigma: float
    shape: str
    widest: float


# Finding


def _humps(x: Floats, signal: Floats, rules: _Rules, least: float) -> list[Profile]:
    """First guesses of all bands, the narrow ones first; wide ones only where no narrower one lies in their core."""
    from scipy.ndimage import gaussian_filter1d

    step, sigma, widest = rules.step, rules.sigma, rules.widest
    even = np.arange(x[0], x[-1] + step / 2, step)
    level = np.interp(even, x, signal)
    smallest = max(_SIGNIFICANT * sigma / 2, 0.5 * least * float(level.max()))
    found: list[tuple[Profile, float]] = []
    for spread in _spreads(step, len(even), widest):
        response, gain, unit = _filtered(level, spread)
        smooth = gaussian_filter1d(level, spread / 2)
        core = 2.4 * spread * step
        for place in _maxima(response, _SIGNIFICANT * sigma * gain):
            centre, height = float(even[place]), float(smooth[place])
            is_ripple = response[place] < _RIPPLE * unit * height
            if height > smallest and not is_ripple and _is_apart(centre, core, found):
                width = _width(smooth, place, spread, step, core, widest)
                found.append((Profile(centre, height, width, 0.7), core))
    return sorted((one for one, _ in found), key=lambda one: -one.height)[:MOST]


def _is_apart(centre: float, core: float, found: Sequence[tuple[Profile, float]]) -> bool:
    """Whether no band that was found lies within the core of this one."""
    return all(abs(one.centre - centre) > 0.6 * max(core, other) for one, other in found)


def _spreads(step: float, points: int, widest: float) -> list[float]:
    """Standard deviations of the Gaussians, in points, from narrow to wide."""
    spreads, spread = [], 1.2
    while spread * step < widest / 2.4 and 8 * spread < points:
        spreads.append(spread)
        spread *= 1.6
    return spreads


def _filtered(level: Floats, spread: float) -> tuple[Floats, float, float]:
    """The filtered spectrum, the deviation of white noise of 1 after the filter, and the height of a Gaussian of 1."""
    from scipy.signal import fftconvolve

    half = int(np.ceil(4 * spread))
    t = np.arange(-half, half + 1) / spread
    kernel = (1 - t**2) * np.exp(-(t**2) / 2)
    kernel -= kernel.mean()
    padded = np.pad(level, half, mode="reflect", reflect_type="odd")
    response = np.asarray(fftconvolve(padded, kernel, mode="valid"))
    return response, float(np.sqrt((kernel**2).sum())), float((kernel * np.exp(-(t**2) / 2)).sum())


def _maxima(response: Floats, threshold: float) -> Iterable[int]:
    """Places of local maxima above the threshold, the highest first, ends left out."""
    inner = response[1:-1]
    places = np.flatnonzero((inner > response[:-2]) & (inner >= response[2:]) & (inner > threshold)) + 1
    return [int(place) for place in places[np.argsort(-response[places], kind="stable")]]


def _width(level: Floats, place: int, spread: float, step: float, guess: float, widest: float) -> float:
    """Full width where the band has fallen by half its prominence; the guess where it has no maximum of its own."""
    from scipy.signal import peak_widths

    reach = max(1, round(spread))
    first = max(0, place - reach)
    top = first + int(np.argmax(level[first : place + reach + 1]))
    if top in (first, place + reach) or top in (0, len(level) - 1):
        return guess
    width = float(peak_widths(level, [top], rel_height=0.5)[0][0]) * step
    return float(np.clip(width, guess / 2, widest))


# Fitting


def _grouped(guesses: list[Profile]) -> list[list[Profile]]:
    """Bands whose flanks overlap, together, but not more than a few at a time."""
    groups: list[list[Profile]] = []
    for one in sorted(guesses, key=lambda guess: guess.centre):
        if groups and len(groups[-1]) < _TOGETHER and any(_overlap(one, other) for other in groups[-1]):
            groups[-1].append(one)
        else:
            groups.append([one])
    return groups


def _overlap(one: Profile, other: Profile) -> bool:
    """Whether two bands lie within some widths, or the flank of one still counts at the height of the other."""
    apart = abs(one.centre - other.centre)
    if apart < _REACH * (one.width + other.width) / 2:
        return True
    pairs = ((one, other), (other, one))
    return any(first.height * (first.width / 2 / apart) ** 2 > _FLANK * second.height for first, second in pairs)


def _piece(x: Floats, group: Sequence[Profile]) -> Indices:
    """The points that some bands and their surroundings take."""
    step = float(np.median(np.diff(x)))
    low = min(one.centre - max(_REACH * one.width, 6 * step) for one in group)
    high = max(one.centre + max(_REACH * one.width, 6 * step) for one in group)
    return np.flatnonzero((x >= low) & (x <= high))


def _pruned(x: Floats, signal: Floats, group: Sequence[Profile], rules: _Rules) -> Fit:
    """The fit without those bands whose absence Schwarz's criterion hardly minds, the weakest tried first."""
    inside = _piece(x, group)
    x, y = x[inside], signal[inside]
    best = fit(x, y, group, rules.step, rules.shape, rules.widest)
    while len(best.profiles) > 1:
        for k in _doubtful(best, rules.sigma):
            fewer = [one for number, one in enumerate(best.profiles) if number != k]
            other = fit(x, y, fewer, rules.step, rules.shape, rules.widest)
            if _as_good(other, best, k) or _cannot_be_told(best.profiles, k):
                best = other
                break
        else:
            break
    return best


def _doubtful(found: Fit, sigma: float) -> list[int]:
    """Bands that hardly rise above their uncertainty, and those that cannot be told from others, the weakest first."""
    errors = zip(found.profiles, found.height_errors, strict=True)
    strength = [one.height / max(error, sigma / 4) for one, error in errors]
    order = np.argsort(strength, kind="stable").tolist()
    return [*order[:2], *(k for k in order[2:] if _cannot_be_told(found.profiles, k))]


def _as_good(fewer: Fit, more: Fit, k: int) -> bool:
    """Whether the bands without band k do as well: by Schwarz's criterion or, on a flank, as well as profiles can."""
    one = more.profiles[k]
    others = (other for other in more.profiles if other is not one and abs(other.centre - one.centre) < other.width)
    top = max((other.height for other in others), default=0.0)
    return fewer.criterion < more.criterion + _BETTER or fewer.rest < _LIKENESS * top


def _cannot_be_told(profiles: Sequence[Profile], k: int) -> bool:
    """Whether a stronger band lies nearer than half the smaller width."""
    one = profiles[k]
    return any(
        other is not one and other.height >= one.height
        and abs(other.centre - one.centre) < 0.5 * min(other.width, one.width)
        for other in profiles
    )  # fmt: skip


def _peaks(x: Floats, found: Fit, step: float) -> list[Peak]:
    near = x[_piece(x, found.profiles)]
    total = sum((curve(near, one) for one in found.profiles), np.zeros(len(near)))
    return [
        Peak(one, float(np.hypot(error, _LIKENESS * one.width)), above, not _has_maximum(near, total, one),
             one.width < 1.6 * step)
        for one, error, above in zip(found.profiles, found.centre_errors, found.height_errors, strict=True)
    ]  # fmt: skip


def _has_maximum(x: Floats, total: Floats, one: Profile) -> bool:
    """Whether the fitted curve has a maximum within half a width of the band's centre."""
    near = np.flatnonzero(np.abs(x - one.centre) <= one.width / 2)
    if len(near) < 3:
        return True
    top = near[int(np.argmax(total[near]))]
    return bool(near[0] < top < near[-1])
