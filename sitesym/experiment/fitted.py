"""What a fit of angle-resolved curves found: values with standard errors, other solutions, and what stays open."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.experiment.angle_data import AngleData
from sitesym.experiment.curves import FaceAxes, FaceTensors
from sitesym.groups.operation import Floats

Complexes = np.typing.NDArray[np.complex128]


@dataclass(frozen=True, slots=True)
class FittedValue:
    """One number that was fitted, or held because the data leave it open.

    name   "scale", "b/a", "|b/a|" and "phase of b/a" for complex letters, "offset", "background".
    value  in `unit`: "°", or "" for ratios and for intensities, which are in the unit of the data.
    error  standard error, infinite where the data say nothing at this point; None for a value that was held.
    """

    name: str
    value: float
    error: float | None
    unit: str = ""

    @property
    def held(self) -> bool:
        """Whether it was not fitted."""
        return self.error is None

    @property
    def words(self) -> str:
        """`b/a = -0.42 ± 0.03`, with as many figures as the error allows."""
        if self.error is None:
            return f"{self.name} = {self.value:.4g}{self.unit} (held)"
        if not np.isfinite(self.error) or self.error == 0:
            return f"{self.name} = {self.value:.4g}{self.unit} ± {'?' if self.error else '0'}{self.unit}"
        places = max(0, 1 - int(np.floor(np.log10(self.error))))
        return f"{self.name} = {self.value:.{places}f} ± {self.error:.{places}f}{self.unit}"


@dataclass(frozen=True, eq=False)
class OtherSolution:
    """Another answer that the data allow.

    exact    the measured curves are the same for every angle, by symmetry; else only the fit is about as good.
    offset   degrees; letters (k,) complex, relative to the largest; chi_square of this solution.
    """

    exact: bool
    offset: float
    letters: Complexes
    chi_square: float
    words: str


@dataclass(frozen=True, eq=False)
class CurveFit:
    """Result of `fit_curves`.

    seen         the species and its kind of phonon as the face shows it; `axes` the directions angles refer to.
    letters      (k,) complex values relative to the largest, zero for those that the curves do not show (`unseen`).
    values       scale, ratios, phases, offset, background, each with its standard error.
    parallel, crossed  fitted intensities at the angles of `data`; None for a curve that was not measured.
    chi_square   sum of squares of (fitted - measured)/error; without stated errors that of fitted - measured.
    freedom      points less fitted values. probability of a χ² at least so large, None without stated errors.
    error_words  how standard errors were found.
    undecided    what the data cannot decide, in plain sentences; doubts, what else to know before believing it.
    others       other solutions, those that are equal by symmetry first.
    """

    seen: FaceTensors
    axes: FaceAxes
    data: AngleData
    letters: Complexes
    unseen: tuple[str, ...]
    values: tuple[FittedValue, ...]
    parallel: Floats | None
    crossed: Floats | None
    chi_square: float
    freedom: int
    probability: float | None
    error_words: str
    undecided: tuple[str, ...]
    doubts: tuple[str, ...]
    others: tuple[OtherSolution, ...]

    def value(self, name: str) -> FittedValue:
        """One of `values` by its name. Raises KeyError for a name that is not among them."""
        return {one.name: one for one in self.values}[name]

    @property
    def offset(self) -> float:
        """Degrees, -90 to 90, to be taken from the angles of the data; 180° more is the same, as light has no arrow."""
        return self.value("offset").value

    @property
    def residuals(self) -> tuple[Floats | None, Floats | None]:
        """Measured less fitted intensities of the parallel and the crossed curve."""
        pairs = ((self.data.parallel, self.parallel), (self.data.crossed, self.crossed))
        first, second = (None if a is None or b is None else a - b for a, b in pairs)
        return first, second

    def intensities(self, degrees: Floats) -> tuple[Floats, Floats]:
        """Fitted parallel and crossed intensity, each (n,), at any angles in degrees."""
        parallel, crossed = self.seen.intensities(degrees - self.offset, self.letters)
        scale = self.value("scale").value
        background = next((one.value for one in self.values if one.name == "background"), 0.0)
        return scale * parallel + background, scale * crossed + background

    def __repr__(self) -> str:
        return f"CurveFit({self.seen.name} on {self.axes.face}: {'; '.join(one.words for one in self.values)})"
