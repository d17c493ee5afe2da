"""Least squares of angle-resolved intensities in tensor letters, offset and background: the numbers behind a fit.

    I(θ) = Σ over modes |Σ over letters of h · w(θ - offset)|² + background

Letters h carry the square root of the scale. For a given offset the intensity is linear in the products of two letters,
so each start solves a linear problem first. Many starts go down together (Levenberg-Marquardt; Press et al., Numerical
Recipes, 2007, section 15.5), and the different minima they reach are refined one by one. Nothing is drawn at random:
the same data give the same answer.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import product

import numpy as np

from sitesym.groups.operation import Booleans, Floats, Integers

Complexes = np.typing.NDArray[np.complex128]
_OFFSETS = np.radians(np.arange(0.0, 180.0, 7.5))
_NULL = 1e-6
"""A singular value below this part of the largest one, columns scaled to length one, is a direction without effect."""
_FLOOR = 0.01
_KEPT, _STEPS, _REFINED = 4, 15, 8
_SAME_RATIO, _SAME_ANGLE = 0.02, np.radians(1.0)


@dataclass(frozen=True, eq=False)
class AngleModel:
    """Data and tensors of one fit.

    elements  (m, 3, k) uu, vv, uv of m modes in k letters; angles (n,) in radians, crossed (n,) which analyser.
    values    (n,) intensities, errors (n,) their standard errors (all one where not known).

    Unknowns x are (..., 2k + 2): real parts of the letters, imaginary parts, offset in radians, background.
    """

    elements: Floats
    angles: Floats
    crossed: Booleans
    values: Floats
    errors: Floats

    @property
    def letters(self) -> int:
        """How many letters there are."""
        return int(self.elements.shape[2])

    @property
    def slack(self) -> float:
        """A sum of squared residuals that is nothing but rounding."""
        return 1e-12 * float(np.sum((self.values / self.errors) ** 2))

    def intensities(self, x: Floats) -> Floats:
        """(..., n) computed intensities."""
        amplitudes = _weights(self._turned(x), self.crossed) @ self._tensors(x)
        return np.asarray(np.sum(np.abs(amplitudes) ** 2, axis=-1) + x[..., -1:])

    def residuals(self, x: Floats) -> Floats:
        """(..., n) computed minus measured, over the standard error."""
        return np.asarray((self.intensities(x) - self.values) / self.errors)

    def derivatives(self, x: Floats) -> Floats:
        """(..., n, 2k + 2) of the residuals by the unknowns."""
        tensors, angles = self._tensors(x), self._turned(x)
        weights = _weights(angles, self.crossed)
        amplitudes = weights @ tensors
        slopes = _slopes(angles, self.crossed) @ tensors
        by_letter = weights @ self.elements.transpose(1, 0, 2).reshape(3, -1)
        single = by_letter.reshape(*by_letter.shape[:-1], *self.elements.shape[::2])
        real, imaginary = (
            2 * np.einsum("...m,...mk->...k", part, single) for part in (amplitudes.real, amplitudes.imag)
        )
        offset = -2 * np.sum((amplitudes.conj() * slopes).real, axis=-1)[..., None]
        columns = np.concatenate([real, imaginary, offset, np.ones_like(offset)], axis=-1)
        return np.asarray(columns / self.errors[:, None])

    def _turned(self, x: Floats) -> Floats:
        return np.asarray(self.angles - x[..., -2:-1])

    def _tensors(self, x: Floats) -> Complexes:
        """(..., 3, m) elements in the face of each mode's tensor."""
        return np.asarray(np.tensordot(letters_of(x), self.elements, axes=(-1, 2)).swapaxes(-1, -2))


def letters_of(x: Floats) -> Complexes:
    """(..., k) complex letters of the unknowns."""
    k = (x.shape[-1] - 2) // 2
    return np.asarray(x[..., :k] + 1j * x[..., k : 2 * k])


def unknowns(letters: Complexes, offset: float, background: float) -> Floats:
    """Letters, offset and background as one row."""
    return np.concatenate([letters.real, letters.imag, [offset, background]])


def tidied(x: Floats) -> Floats:
    """The same solution with the largest letter real and positive and the offset from -90 (not included) to 90°."""
    letters = letters_of(x)
    largest = letters[np.abs(letters).argmax()]
    turned = letters * (abs(largest) / largest) if abs(largest) else letters
    turned = np.where(np.abs(turned.imag) < 1e-12 * abs(largest), turned.real + 0j, turned)
    offset = np.pi / 2 - (np.pi / 2 - x[-2]) % np.pi
    return unknowns(turned, float(offset), float(x[-1]))


def is_near(x: Floats, other: Floats) -> bool:
    """Whether ratios and offsets of two tidied solutions are about the same; all phases may be reversed."""
    first, second = (letters / max(float(np.abs(letters).max()), 1e-300) for letters in map(letters_of, (x, other)))
    turn = abs((x[-2] - other[-2] + np.pi / 2) % np.pi - np.pi / 2)
    away = min(float(np.abs(first - sign * one).max()) for one in (second, second.conj()) for sign in (1, -1))
    return bool(away < _SAME_RATIO and turn < _SAME_ANGLE)


def _weights(angles: Floats, crossed: Booleans) -> Floats:
    """(..., n, 3) of uu, vv, uv: those of `curves.parallel_weights` and `curves.crossed_weights` in one go."""
    sine, cosine = np.sin(2 * angles), np.cos(2 * angles)
    half = np.where(crossed, -sine, cosine) / 2
    mean = np.where(crossed, 0.0, 0.5)
    return np.stack([mean + half, mean - half, np.where(crossed, cosine, sine)], axis=-1)


def _slopes(angles: Floats, crossed: Booleans) -> Floats:
    """Derivatives of the weights by the angle."""
    sine, cosine = np.sin(2 * angles), np.cos(2 * angles)
    half = np.where(crossed, -cosine, -sine)
    return np.stack([half, -half, 2 * np.where(crossed, -sine, cosine)], axis=-1)


@dataclass(frozen=True, eq=False)
class Minimum:
    """Unknowns, tidied, and the sum of squared residuals."""

    x: Floats
    chi_square: float


def search(model: AngleModel, free: Booleans, held: Floats) -> list[Minimum]:
    """The different minima, the best first; unknowns that are not free keep the value in `held`."""
    offsets = _OFFSETS if free[-2] else held[-2:-1]
    starts = [start for offset in offsets for start in _starts(model, float(offset), free, held)]
    reached, squares = _descended(model, np.array(starts), free)
    limit = 2 * squares.min() + model.slack
    chosen: list[Floats] = []
    for place in np.argsort(squares, kind="stable"):
        x = tidied(reached[place])
        if len(chosen) == _REFINED or squares[place] > limit:
            break
        if not any(is_near(x, one) for one in chosen):
            chosen.append(x)
    return sorted((refine(model, x, free) for x in chosen), key=lambda one: (one.chi_square, abs(one.x[-2])))


def refine(model: AngleModel, start: Floats, free: Booleans) -> Minimum:
    """The minimum reached from a start when only the unknowns marked `free` may move."""
    from scipy.optimize import least_squares

    def whole(part: Floats) -> Floats:
        x = start.copy()
        x[free] = part
        return x

    found = least_squares(
        lambda part: model.residuals(whole(part)),
        start[free],
        jac=lambda part: model.derivatives(whole(part))[:, free],
        xtol=1e-13,
        ftol=1e-13,
        gtol=1e-13,
        max_nfev=200,
    )
    return Minimum(tidied(whole(found.x)), float(2 * found.cost))


def _descended(model: AngleModel, starts: Floats, free: Booleans) -> tuple[Floats, Floats]:
    """All starts (s, 2k + 2) some damped steps further down, and their sums of squared residuals (s,)."""
    x = starts.copy()
    squares = np.sum(model.residuals(x) ** 2, axis=-1)
    damping = np.full(len(x), 1e-2)
    for _ in range(_STEPS):
        residuals, slopes = model.residuals(x), model.derivatives(x)[..., free]
        turned = slopes.swapaxes(-1, -2)
        curvature, gradient = turned @ slopes, (turned @ residuals[..., None])[..., 0]
        diagonal = np.einsum("sii->si", curvature)
        floor = 1e-9 * diagonal.max(axis=1, keepdims=True) + 1e-300
        damped = curvature + np.einsum("si,ij->sij", damping[:, None] * diagonal + floor, np.eye(diagonal.shape[1]))
        trial = x.copy()
        trial[:, free] -= np.linalg.solve(damped, gradient[..., None])[..., 0]
        reached = np.sum(model.residuals(trial) ** 2, axis=-1)
        better = reached < squares
        damping = np.where(better, damping / 5, np.minimum(damping * 5, 1e8))
        x[better], squares[better] = trial[better], reached[better]
    return x, squares


def _starts(model: AngleModel, offset: float, free: Booleans, held: Floats) -> list[Floats]:
    """The best few at this offset: letters from the products that fit best, with every choice of signs or phases."""
    products, background = _linear(model, offset, bool(free[-1]), float(held[-1]))
    with_phases = bool(free[model.letters : -2].any())
    rows = [unknowns(one, offset, background) for one in _trial_letters(model, products, with_phases)]
    trials = np.where(free, np.array(rows), held)
    order = np.argsort(np.sum(model.residuals(trials) ** 2, axis=-1), kind="stable")
    return list(trials[order[:_KEPT]])


def _trial_letters(model: AngleModel, products: Floats, with_phases: bool) -> Iterator[Complexes]:
    k = model.letters
    least = _FLOOR * max(float(np.diag(products).max()), _FLOOR * float(np.abs(model.values).max()))
    modulus = np.sqrt(np.maximum(np.diag(products), least))
    for signs in product((1.0, -1.0), repeat=k - 1):
        letters = modulus * np.concatenate([[1.0], signs])
        for turn in (np.pi / 6, np.pi / 3) if with_phases else (0.0,):
            yield letters * np.exp(1j * turn * np.arange(k))


def _linear(model: AngleModel, offset: float, with_background: bool, background: float) -> tuple[Floats, float]:
    """(k, k) real parts of the products of letters that fit best as free numbers, and the background."""
    weights = _weights(model.angles - offset, model.crossed)
    coefficients = np.tensordot(weights, model.elements, axes=(1, 1))
    i, j = np.triu_indices(model.letters)
    products = np.sum(coefficients[:, :, i] * coefficients[:, :, j], axis=1) * np.where(i == j, 1.0, 2.0)
    columns = np.column_stack([products, np.ones(len(products))]) if with_background else products
    wanted = model.values if with_background else model.values - background
    solution = np.linalg.lstsq(columns / model.errors[:, None], wanted / model.errors, rcond=_NULL)[0]
    matrix = np.zeros((model.letters, model.letters))
    matrix[i, j] = matrix[j, i] = solution[: len(i)]
    return matrix, float(solution[-1]) if with_background else background


@dataclass(frozen=True, eq=False)
class Undecided:
    """An unknown that the data leave open, held at a value: its index, and those of all that could make up for it."""

    index: int
    partners: tuple[int, ...]


def undecided(derivatives: Floats, free: Booleans, order: list[int]) -> list[Undecided]:
    """Which free unknowns to hold so that the data decide all others; `order` says which to hold rather.

    derivatives  (n, 2k + 2) at the minimum. A direction in which no intensity changes is a null vector of them.
    """
    columns = np.flatnonzero(free)
    lengths = np.linalg.norm(derivatives[:, columns], axis=0)
    silent = lengths <= 1e-9 * float(lengths.max(initial=0.0))
    scaled = derivatives[:, columns] / np.where(silent, 1.0, lengths)
    scaled[:, silent] = 0.0
    rank = _rank(scaled)
    kept = list(range(len(columns)))
    held: list[int] = []
    for index in order:
        if len(kept) == rank:
            break
        place = int(np.searchsorted(columns, index))
        if place >= len(columns) or columns[place] != index:
            continue
        rest = [one for one in kept if one != place]
        if _rank(scaled[:, rest]) == rank:
            kept, held = rest, [*held, place]
    return [Undecided(int(columns[place]), _partners(scaled, kept, place, columns)) for place in held]


def _rank(scaled: Floats) -> int:
    if not scaled.shape[1]:
        return 0
    sizes = np.linalg.svd(scaled, compute_uv=False)
    return int(np.sum(sizes > _NULL * max(float(sizes[0]), _NULL)))


def _partners(scaled: Floats, kept: list[int], place: int, columns: Integers) -> tuple[int, ...]:
    """The unknowns whose change makes up for a change of the one held."""
    if not kept or np.linalg.norm(scaled[:, place]) < _NULL:
        return ()
    weights = np.linalg.lstsq(scaled[:, kept], -scaled[:, place], rcond=None)[0]
    return tuple(int(columns[one]) for one, weight in zip(kept, weights, strict=True) if abs(weight) > 0.01)
