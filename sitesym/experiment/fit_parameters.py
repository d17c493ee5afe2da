"""The numbers that a fit reports: scale, ratios and phases of letters, offset, background, and their standard errors.

The unknowns of `angle_model` (real and imaginary parts that carry the scale) are good to search with; these are the
ones to report. Letter l is h_l = √scale · ratio · exp(i phase), with ratio one and phase zero for the reference letter,
the largest.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from sitesym.experiment.angle_model import AngleModel, letters_of
from sitesym.experiment.fitted import FittedValue
from sitesym.groups.operation import Booleans, Floats

_RADIAN = np.pi / 180
_NO_PHASE = 1e-3
SCALE, RATIO, PHASE, OFFSET, BACKGROUND = "scale", "ratio", "phase", "offset", "background"


@dataclass(frozen=True, slots=True)
class Parameter:
    """One reported number; `letter` is the index of its letter, -1 where it has none."""

    kind: str
    letter: int
    name: str


@dataclass(frozen=True, eq=False)
class Parameters:
    """All reported numbers at one solution x of `angle_model`, whose reference letter is real and positive."""

    x: Floats
    reference: int
    items: tuple[Parameter, ...]

    def values(self) -> Floats:
        """(p,) scale in the model's unit, ratios, phases in degrees, offset in degrees, background."""
        letters = letters_of(self.x)
        ratios = letters / letters[self.reference]
        found = {SCALE: abs(letters[self.reference]) ** 2, OFFSET: self.x[-2] / _RADIAN, BACKGROUND: self.x[-1]}
        phased = self._phased
        return np.array([
            found[one.kind] if one.kind in found
            else np.angle(ratios[one.letter], deg=True) if one.kind == PHASE
            else abs(ratios[one.letter]) if phased else ratios[one.letter].real
            for one in self.items
        ])  # fmt: skip

    @property
    def _phased(self) -> bool:
        return any(one.kind == PHASE for one in self.items)

    def derivatives(self, model: AngleModel) -> Floats:
        """(n, p) of the residuals by the reported numbers."""
        slopes = model.derivatives(self.x)
        return np.column_stack([slopes @ self._direction(one) for one in self.items])

    def _direction(self, one: Parameter) -> Floats:
        """(2k + 2,) how the unknowns move with one reported number."""
        k = (len(self.x) - 2) // 2
        letters = letters_of(self.x)
        moved = np.zeros(k, dtype=complex)
        if one.kind == SCALE:
            moved = letters / (2 * abs(letters[self.reference]) ** 2)
        if one.kind == RATIO:
            size = abs(letters[one.letter])
            turn = letters[one.letter] / size if self._phased and size > 0 else 1.0
            moved[one.letter] = abs(letters[self.reference]) * turn
        if one.kind == PHASE:
            moved[one.letter] = 1j * letters[one.letter] * _RADIAN
        offset = _RADIAN if one.kind == OFFSET else 0.0
        return np.concatenate([moved.real, moved.imag, [offset, float(one.kind == BACKGROUND)]])

    def elsewhere(self) -> Parameters:
        """The same at a point nearby where no ratio, phase or offset has a special value by chance."""
        letters = letters_of(self.x)
        k = np.arange(len(letters)) - self.reference
        size = 0.1 * abs(letters[self.reference]) * np.sign(k)
        moved = (letters + size * (1 + 0.1 * np.abs(k))) * (np.exp(0.3j * k) if self._phased else 1.0)
        x = np.concatenate([moved.real, moved.imag, [self.x[-2] + 0.1, self.x[-1]]])
        return Parameters(x, self.reference, self.items)

    @property
    def order(self) -> list[int]:
        """Which to hold rather when the data cannot decide them all: the background first, the scale never."""
        preference = (BACKGROUND, OFFSET, PHASE, RATIO)
        places = [place for place, one in enumerate(self.items) if one.kind in preference]
        return sorted(places, key=lambda place: (preference.index(self.items[place].kind), -place))

    def unknowns_of(self, places: Sequence[int]) -> Booleans:
        """(2k + 2,) which unknowns stand still when these numbers are held."""
        k = (len(self.x) - 2) // 2
        mask = np.zeros(len(self.x), dtype=bool)
        for one in (self.items[place] for place in places):
            if one.kind == OFFSET:
                mask[-2] = True
            elif one.kind == BACKGROUND:
                mask[-1] = True
            elif one.kind == PHASE:
                mask[[k + one.letter, k + self.reference]] = True
            else:
                mask[[one.letter, k + one.letter]] = True
        return mask


def parameters_of(
    x: Floats, letters: Sequence[str], *, phases: bool, background: bool, reference: int | None = None
) -> Parameters:
    """What to report of a solution; `reference` is the largest letter if it is not given."""
    chosen = int(np.abs(letters_of(x)).argmax()) if reference is None else reference
    first, others = letters[chosen], [k for k in range(len(letters)) if k != chosen]
    items = [Parameter(SCALE, -1, "scale")]
    for k in others:
        ratio = f"{letters[k]}/{first}"
        items.append(Parameter(RATIO, k, f"|{ratio}|" if phases else ratio))
    if phases:
        items += [Parameter(PHASE, k, f"phase of {letters[k]}/{first}") for k in others]
    items.append(Parameter(OFFSET, -1, "offset"))
    if background:
        items.append(Parameter(BACKGROUND, -1, "background"))
    return Parameters(x, chosen, tuple(items))


def with_errors(
    parameters: Parameters, model: AngleModel, held: Sequence[int], top: float, variance: float
) -> tuple[tuple[FittedValue, ...], Floats]:
    """Values with standard errors, and the correlations of those not held.

    top  unit of the model's intensities in that of the data; variance of a point in units of its stated error.
    """
    numbers, items = parameters.values(), parameters.items
    free = [place for place in range(len(items)) if place not in held]
    errors, correlations = _errors(parameters.derivatives(model)[:, free])
    found = []
    for place, (one, number) in enumerate(zip(items, numbers, strict=True)):
        unit = top if one.kind in (SCALE, BACKGROUND) else 1.0
        error = None if place in held else float(errors[free.index(place)] * np.sqrt(variance) * unit)
        value = 0.0 if one.kind == PHASE and abs(number) < _NO_PHASE else float(number * unit) + 0.0
        found.append(FittedValue(one.name, value, error, "°" if one.kind in (PHASE, OFFSET) else ""))
    return tuple(found), correlations


def _errors(slopes: Floats) -> tuple[Floats, Floats]:
    """(p,) standard errors for points of variance one, infinite for columns that vanish, and (p, p) correlations."""
    lengths = np.linalg.norm(slopes, axis=0)
    there = lengths > 1e-9 * lengths.max(initial=0.0)
    scaled = slopes[:, there] / lengths[there]
    weights, axes = np.linalg.eigh(scaled.T @ scaled)
    inverse = (axes / np.maximum(weights, 1e-14)) @ axes.T
    sizes = np.sqrt(np.diag(inverse))
    errors = np.full(len(lengths), np.inf)
    errors[there] = sizes / lengths[there]
    correlations = np.eye(len(lengths))
    correlations[np.ix_(there, there)] = inverse / np.outer(sizes, sizes)
    return errors, correlations
