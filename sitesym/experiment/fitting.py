"""Fit of measured angle-resolved curves: ratios and phases of tensor letters, in-plane offset, scale and background.

The model is that of `curves`: light falls straight on the face and keeps its polarization in the crystal. Complex
letters take up some absorption and birefringence (Kranert, Sturm, Schmidt-Grund and Grundmann, Phys. Rev. Lett. 116,
127401, 2016). One scale and one background serve both curves, so they must have been measured on one scale.

Standard errors come from the curvature at the minimum: square roots of the diagonal of the inverse of JᵀJ, J the
derivatives of intensities over their standard errors (Press et al., Numerical Recipes, 2007, section 15.6). Stated
errors are taken as they are; without any, χ² over the degrees of freedom sets the scale, which assumes that the model
is right.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.analysis import Analysis
from sitesym.errors import UsageError
from sitesym.experiment.angle_data import AngleData, measured
from sitesym.experiment.angle_model import AngleModel, Minimum, Undecided, letters_of, search, undecided
from sitesym.experiment.curves import FaceAxes, FaceTensors, face_axes, tensors_on_face
from sitesym.experiment.fit_others import Twin, is_same_everywhere, preferred, solutions
from sitesym.experiment.fit_parameters import PHASE, Parameters, parameters_of, with_errors
from sitesym.experiment.fit_words import doubts, undecided_sentence
from sitesym.experiment.fitted import CurveFit, OtherSolution
from sitesym.experiment.shown import raman_rows
from sitesym.geometry.directions import Direction
from sitesym.groups.operation import Booleans, Floats

Complexes = np.typing.NDArray[np.complex128]
_ZERO, _REAL = 1e-9, 1e-3
_STATED = "from the curvature of χ² at the minimum, with the errors stated for the points"
_ESTIMATED = (
    "from the curvature of the sum of squares at the minimum, with the scatter of the points about the fit as their "
    "error (none was stated), which assumes that the model is right"
)


def fit_curves(
    analysis: Analysis,
    face: str,
    data: AngleData,
    *,
    reference: Direction | None = None,
    complex_letters: bool = False,
    background: bool = True,
    mount: str = "backscattering",
) -> CurveFit:
    """Fit the curves of one band, assigned to one species, measured on a face while the sample was turned.

    reference        direction to which the angles of `data` refer but for the offset that is sought.
    complex_letters  also fit phases, for crystals that absorb. background: fit a constant beside the band.

    Raises UsageError for a face, species or mount that cannot be, a band that the face does not show, too few points.
    """
    axes = face_axes(analysis, face, reference)
    seen = _assigned(analysis, axes, data.species, mount)
    task = _task(seen, data, complex_letters, background)
    return _result(task, axes, _solved(task))


def _assigned(analysis: Analysis, axes: FaceAxes, name: str, mount: str) -> FaceTensors:
    """The kind of phonon that is meant by `E`, `E(TO)`."""
    label = name.split("(")[0].strip()
    rows = {row.label: row for row in raman_rows(analysis)}
    if label not in rows:
        raise UsageError(
            f"'{name}' is no Raman-active species with modes in this crystal.", f"Choose from {', '.join(rows)}."
        )
    kinds = {one.name: one for one in tensors_on_face(rows[label], axes, mount)}
    shown = [one for one in kinds.values() if one.allowed]
    if name in kinds:
        shown = [one for one in (kinds[name],) if one.allowed]
    elif name != label:
        raise UsageError(f"This face has no {name}.", f"Choose from {', '.join(kinds)}.")
    if not shown:
        raise UsageError(
            f"The face {axes.face} shows nothing of {name} at any angle.", "Choose another species or another face."
        )
    if len(shown) > 1:
        names = " and ".join(one.name for one in shown)
        raise UsageError(f"{name} shows as {names} on this face.", "Name the one that was measured.")
    return shown[0]


@dataclass(frozen=True, eq=False)
class _Task:
    """A fit to be made: intensities divided by the largest one, `top`; `visible` marks letters that the data show."""

    seen: FaceTensors
    data: AngleData
    model: AngleModel
    visible: Booleans
    free: Booleans
    top: float
    phases: bool
    background: bool

    @property
    def letters(self) -> list[str]:
        return [letter for letter, there in zip(self.seen.letters, self.visible, strict=True) if there]

    def parameters(self, x: Floats, reference: int | None = None) -> Parameters:
        return parameters_of(x, self.letters, phases=self.phases, background=self.background, reference=reference)


def _task(seen: FaceTensors, data: AngleData, complex_letters: bool, background: bool) -> _Task:
    angles, crossed, values, errors = _points(data)
    visible = _visible(seen.elements, crossed)
    if not visible.any():
        raise UsageError(
            f"The curves that were measured vanish for {seen.name} on this face.", "Choose another species or curve."
        )
    top = float(np.abs(values).max())
    if not values.max() > 0:
        raise UsageError("No intensity is positive.", "Check the columns of the data.")
    k = int(visible.sum())
    phases = complex_letters and k > 1
    free = np.concatenate([np.ones(k), np.full(k, phases), [1.0, background]]).astype(bool)
    count = int(free.sum()) - int(phases)
    if len(np.unique(np.column_stack([angles % np.pi, crossed]).round(9), axis=0)) <= count:
        raise UsageError(
            f"{len(values)} points at too few angles cannot fix {count} unknowns.", "Measure at more angles."
        )
    scaled = np.ones(len(values)) if errors is None else errors / top
    model = AngleModel(seen.elements[:, :, visible], angles, crossed, values / top, scaled)
    return _Task(seen, data, model, visible, free, top, phases, background)


def _points(data: AngleData) -> tuple[Floats, Booleans, Floats, Floats | None]:
    """Angles in radians, which analyser, intensities and errors of all that was measured."""
    rows = []
    for crossed, values, errors in (
        (False, data.parallel, data.parallel_error), (True, data.crossed, data.crossed_error)
    ):  # fmt: skip
        if values is not None:
            there = measured(values)
            error = errors[there] if errors is not None else np.ones(int(there.sum()))
            rows.append((np.radians(data.degrees[there]), np.full(int(there.sum()), crossed), values[there], error))
    angles, which, values, errors = (np.concatenate(column) for column in zip(*rows, strict=True))
    if not len(values):
        raise UsageError("There are no intensities.", "Give parallel or crossed intensities, or both.")
    return angles, which, values, errors if data.has_errors else None


def _visible(elements: Floats, crossed: Booleans) -> Booleans:
    """(k,) which letters change one of the measured curves."""
    uu, vv, uv = elements.transpose(1, 0, 2)
    found = np.zeros(elements.shape[2], dtype=bool)
    if not crossed.all():
        found |= np.abs(elements).max(axis=(0, 1)) > _ZERO
    if crossed.any():
        found |= (np.abs(uu - vv).max(axis=0) > _ZERO) | (np.abs(uv).max(axis=0) > _ZERO)
    return found


@dataclass(frozen=True, eq=False)
class _Solved:
    """Minima, the best first, and what was held since the data leave it open (of the parameters of `asked`)."""

    minima: list[Minimum]
    asked: Parameters
    open: list[Undecided]
    free: Booleans

    def kept_reference(self) -> int | None:
        """The reference letter where the phases of others were held against it."""
        kinds = {self.asked.items[one.index].kind for one in self.open}
        return self.asked.reference if PHASE in kinds else None

    def place(self, index: int, final: Parameters) -> int:
        """Where a parameter of `asked` stands in the final ones, whose reference letter may be another."""
        one = self.asked.items[index]
        letter = self.asked.reference if one.letter == final.reference else one.letter
        pairs = [(item.kind, item.letter) for item in final.items]
        return pairs.index((one.kind, letter))


def _solved(task: _Task) -> _Solved:
    minima = search(task.model, task.free, np.zeros(len(task.free)))
    asked = task.parameters(minima[0].x)
    places = np.ones(len(asked.items), dtype=bool)
    open_ = undecided(asked.elsewhere().derivatives(task.model), places, asked.order)
    if not open_:
        return _Solved(minima, asked, [], task.free)
    free = task.free & ~asked.unknowns_of([one.index for one in open_])
    again = search(task.model, free, np.zeros(len(free)))
    if again[0].chi_square > minima[0].chi_square * (1 + 1e-6) + task.model.slack:
        again = [Minimum(asked.x, minima[0].chi_square)]
    return _Solved(again, asked, open_, free)


def _result(task: _Task, axes: FaceAxes, solved: _Solved) -> CurveFit:
    model, data = task.model, task.data
    freedom = len(model.values) - len(solved.asked.items) + len(solved.open)
    variance = 1.0 if data.has_errors else solved.minima[0].chi_square / freedom
    found = solutions(model, solved.minima, solved.free, variance)
    best = preferred(found)
    final = task.parameters(best.x, solved.kept_reference())
    held = [solved.place(one.index, final) for one in solved.open]
    chi_square = float(np.sum(model.residuals(best.x) ** 2))
    values, correlations = with_errors(final, model, held, task.top, variance)
    probability = _probability(chi_square, freedom) if data.has_errors else None
    open_words = [
        undecided_sentence(
            values[place].name,
            [final.items[solved.place(other, final)].name for other in one.partners],
            values[place],
        )
        for place, one in zip(held, solved.open, strict=True)
    ]
    unit = 1.0 if data.has_errors else task.top**2
    letters = _all_letters(task, best.x)
    phased = task.phases and bool(np.abs(letters.imag).max() > _REAL)
    parallel, crossed = _fitted(task, best.x)
    return CurveFit(
        task.seen, axes, data, letters, _unseen(task), values, parallel, crossed, chi_square * unit, freedom,
        probability, _STATED if data.has_errors else _ESTIMATED, tuple(open_words),
        doubts(values, correlations, probability, phases=phased),
        tuple(_other(task, twin, best.x, unit) for twin in found if twin is not best),
    )  # fmt: skip


def _probability(chi_square: float, freedom: int) -> float:
    """Of a χ² at least so large."""
    from scipy.special import gammaincc

    return float(gammaincc(freedom / 2, chi_square / 2))


def _all_letters(task: _Task, x: Floats) -> Complexes:
    """(k,) all letters of the species relative to the largest, zero where they are not seen."""
    letters = letters_of(x)
    whole = np.zeros(len(task.visible), dtype=complex)
    whole[task.visible] = letters / letters[np.abs(letters).argmax()]
    return whole


def _unseen(task: _Task) -> tuple[str, ...]:
    return tuple(letter for letter, there in zip(task.seen.letters, task.visible, strict=True) if not there)


def _fitted(task: _Task, x: Floats) -> tuple[Floats | None, Floats | None]:
    """Fitted intensities at all angles of the data, of the curves that were measured."""
    values = letters_of(x) * np.sqrt(task.top)
    whole = np.zeros(len(task.visible), dtype=complex)
    whole[task.visible] = values
    both = task.seen.intensities(task.data.degrees - np.degrees(x[-2]), whole)
    given = (task.data.parallel, task.data.crossed)
    first, second = (
        None if data is None else curve + x[-1] * task.top for data, curve in zip(given, both, strict=True)
    )
    return first, second


def _other(task: _Task, twin: Twin, best: Floats, unit: float) -> OtherSolution:
    letters = _all_letters(task, twin.x)
    offset = float(np.degrees(twin.x[-2]))
    chi_square = twin.chi_square * unit
    words = f"offset {offset:.1f}°{_ratios(task, twin.x)}"
    if not twin.exact:
        words += f" fits about as well (χ² {chi_square:.4g})"
    elif is_same_everywhere(task.model, twin.x, best):
        words += " gives the same curves"
    else:
        unmeasured = "crossed" if task.data.crossed is None else "parallel"
        words += f" gives the same curve; the {unmeasured} one would tell"
    return OtherSolution(twin.exact, offset, letters, chi_square, words)


def _ratios(task: _Task, x: Floats) -> str:
    letters = letters_of(x)
    first = int(np.abs(letters).argmax())
    parts = []
    for k, letter in enumerate(task.letters):
        ratio = letters[k] / letters[first]
        if k == first:
            continue
        if abs(ratio.imag) < _ZERO:
            parts.append(f"{letter}/{task.letters[first]} = {ratio.real:.3g}")
        else:
            parts.append(f"{letter}/{task.letters[first]} = {abs(ratio):.3g} at {np.angle(ratio, deg=True):.0f}°")
    return "".join(f", {part}" for part in parts)
