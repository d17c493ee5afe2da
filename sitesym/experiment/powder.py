"""Powders and random grains: rotational invariants of Raman tensors, depolarization ratios and their limits.

For a tensor T averaged over all orientations (Placzek 1934; Long, The Raman Effect, 2002, chapter 5 and appendix A14):

    a² = |xx + yy + zz|²/9                                                                  isotropic
    γ² = (|xx - yy|² + |yy - zz|² + |zz - xx|²)/2 + 3/4 (|xy + yx|² + |yz + zy|² + |zx + xz|²)    symmetric anisotropic
    δ² = 3/4 (|xy - yx|² + |yz - zy|² + |zx - xz|²)                                         antisymmetric
    parallel = (45 a² + 4 γ²)/45,   crossed = (3 γ² + 5 δ²)/45,   depolarization ratio ρ = crossed/parallel

for linearly polarized light; those of a degenerate species are added up over its components. The limits of ρ over all
values of the letters are eigenvalues of a pencil of quadratic forms made from the span of the tensors, so they are
exact and hold for complex letters too.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import inf

import numpy as np

from sitesym.analysis import Analysis, SpeciesRow
from sitesym.experiment.expressions import expanded
from sitesym.experiment.shown import raman_rows
from sitesym.groups.operation import Floats
from sitesym.tensors import TensorSpecies

Complexes = np.typing.NDArray[np.complex128]
_ZERO = 1e-9


@dataclass(frozen=True, slots=True)
class Invariants:
    """Rotational invariants a², γ² and δ² (see the module), in the square of the tensor's unit."""

    isotropic: float
    anisotropic: float
    antisymmetric: float

    @property
    def parallel(self) -> float:
        """Mean intensity with the analyser along the laser's polarization."""
        return (45 * self.isotropic + 4 * self.anisotropic) / 45

    @property
    def crossed(self) -> float:
        """Mean intensity with the analyser across the laser's polarization."""
        return (3 * self.anisotropic + 5 * self.antisymmetric) / 45

    @property
    def depolarization(self) -> float:
        """Crossed over parallel; infinity for a purely antisymmetric tensor, not a number for a zero one."""
        return _ratio(self.crossed, self.parallel)

    @property
    def natural_depolarization(self) -> float:
        """In unpolarized light at 90° (old tables): analyser parallel to over normal to the scattering plane."""
        return _ratio(6 * self.anisotropic + 10 * self.antisymmetric, 45 * (self.parallel + self.crossed))

    @property
    def circular_ratio(self) -> float:
        """Light turning against the laser's sense, in one fixed frame, over light turning with it; back or forward."""
        same = 45 * self.isotropic + self.anisotropic + 5 * self.antisymmetric
        return _ratio(6 * self.anisotropic, same)


def _ratio(above: float, below: float) -> float:
    if below > 0:
        return above / below
    return inf if above > 0 else float("nan")


def rotational_invariants(tensor: Complexes | Floats) -> Invariants:
    """Invariants of a (3, 3) tensor, or their sum over components (m, 3, 3); real or complex, in any axes."""
    tensors = np.asarray(tensor).reshape(-1, 3, 3)
    turned = tensors.transpose(0, 2, 1)
    trace = np.trace(tensors, axis1=1, axis2=2) / 3
    deviator = (tensors + turned) / 2 - trace[:, None, None] * np.eye(3)
    isotropic, anisotropic, antisymmetric = (
        float(np.sum(np.abs(part) ** 2)) for part in (trace, deviator, (tensors - turned) / 2)
    )
    return Invariants(isotropic, 1.5 * anisotropic, 1.5 * antisymmetric)


@dataclass(frozen=True, eq=False)
class PowderRow:
    """What random grains show of one Raman-active species.

    depolarization  (low, high): limits of the ratio over all values of the letters; equal where symmetry fixes it.
    resonance       the same when the antisymmetric part joins in (high is infinity), None where there is none.
    parallel, crossed            mean intensities in the letters, on one scale.
    parallel_form, crossed_form  (k, k) real: mean intensity = letters^H form letters.
    words           what the ratio can tell, in a plain sentence.
    """

    label: str
    letters: tuple[str, ...]
    depolarization: tuple[float, float]
    resonance: tuple[float, float] | None
    parallel: str
    crossed: str
    parallel_form: Floats
    crossed_form: Floats
    words: str

    def intensities(self, values: Complexes | Floats) -> tuple[float, float]:
        """Mean parallel and crossed intensity for values (k,) of the letters."""
        parallel, crossed = (
            float(np.real(np.conj(values) @ form @ values)) for form in (self.parallel_form, self.crossed_form)
        )
        return parallel, crossed

    def __repr__(self) -> str:
        low, high = self.depolarization
        return f"PowderRow({self.label}: {low:g} to {high:g})"


def powder_rows(analysis: Analysis) -> tuple[PowderRow, ...]:
    """One row for every Raman-active species that has optic modes in this crystal."""
    return tuple(_row(row) for row in raman_rows(analysis))


def _row(row: SpeciesRow) -> PowderRow:
    isotropic, anisotropic = invariant_forms(row.tensor)
    parallel, crossed = isotropic + anisotropic * (4 / 45), anisotropic * (3 / 45)
    low, high = _limits(parallel, crossed)
    resonance = (low, inf) if row.tensor.antisymmetric else None
    letters = row.tensor.letters
    return PowderRow(
        row.label,
        letters,
        (low, high),
        resonance,
        expanded(parallel, letters),
        expanded(crossed, letters),
        parallel,
        crossed,
        _words(low, high, resonance is not None),
    )


def invariant_forms(species: TensorSpecies) -> tuple[Floats, Floats]:
    """Real (k, k) forms of a² and γ² in the k letters of a species, added up over its components."""
    bases = np.array([component.basis for component in species.components])
    trace = np.trace(bases, axis1=2, axis2=3) / 3
    deviator = bases - trace[..., None, None] * np.eye(3)
    return np.einsum("mk,ml->kl", trace, trace), 1.5 * np.einsum("mkij,mlij->kl", deviator, deviator)


def _limits(parallel: Floats, crossed: Floats) -> tuple[float, float]:
    """Least and greatest eigenvalue of crossed x = ρ parallel x; the form of the parallel one is positive definite."""
    inverse = np.linalg.inv(np.linalg.cholesky(parallel))
    found = np.linalg.eigvalsh(inverse @ crossed @ inverse.T)
    low, high = (round(float(value), 12) + 0.0 for value in (found[0], found[-1]))
    return low, high


def _words(low: float, high: float, resonance: bool) -> str:
    if high < _ZERO:
        said = "completely polarized: it vanishes in the crossed spectrum"
    elif high - low < _ZERO:
        said = (
            f"always {_figure(low)}: a ratio below it excludes this species, and species of the same ratio cannot be "
            "told apart in a powder"
        )
    else:
        said = (
            f"anything from {_figure(low)} to {_figure(high)}, by its tensor: a ratio below {_figure(high)} points to "
            f"it, {_figure(high)} proves nothing"
        )
    return said + ("; near resonance an antisymmetric part may raise the ratio without limit" if resonance else "")


def _figure(value: float) -> str:
    return "3/4" if abs(value - 0.75) < _ZERO else f"{value:.3g}"


def antisymmetric_only(analysis: Analysis) -> tuple[str, ...]:
    """Species with optic modes whose only Raman tensor is antisymmetric: seen in resonance alone, crossed alone."""
    return tuple(
        row.label for row in analysis.species if row.activity.resonance and not row.activity.raman and row.optic
    )


def powder_words(analysis: Analysis) -> tuple[str, ...]:
    """What parallel and crossed spectra of a powder of this crystal can tell, in plain sentences."""
    rows = powder_rows(analysis)
    if not rows:
        return ()
    said = [_comparison(rows)]
    inverse = antisymmetric_only(analysis)
    if inverse:
        said.append(
            f"{_listed(inverse)} may appear in resonance only, in the crossed spectrum alone (inverse polarization)."
        )
    said.append(
        "These ratios hold for light scattered once. Grains of an opaque powder scatter it many times, which drives "
        "every measured ratio towards 1, so that a ratio above 3/4 proves no antisymmetric part. A single clear grain "
        "or an index-matching liquid helps; texture and grains larger than the focus need turning and averaging."
    )
    if any(row.activity.raman and row.activity.infrared and row.optic for row in analysis.species):
        said.append(
            "The wavevector lies at random in the grains: modes that are both Raman and infrared active are spread "
            "from the TO to the LO wavenumber, and lines of theirs are broad or double."
        )
    return tuple(said)


def _comparison(rows: tuple[PowderRow, ...]) -> str:
    polarized = [row.label for row in rows if row.depolarization[0] < 0.75 - _ZERO]
    gone = [row.label for row in rows if row.depolarization[1] < _ZERO]
    rest = [row.label for row in rows if row.label not in polarized]
    if not polarized:
        return f"Every Raman-active species ({_listed(rest)}) has the ratio 3/4: polarization tells no two apart."
    seen = f"Bands weaker in the crossed spectrum than 3/4 of the parallel one belong to {_listed(polarized)}"
    if gone:
        seen = f"Bands that vanish in the crossed spectrum belong to {_listed(gone)}"
    if not rest:
        return f"{seen}, the only Raman-active species with modes here; the ratios tell about their tensors."
    return f"{seen}; {_listed(rest)} always {_has(rest)} the ratio 3/4 and cannot be told apart by it."


def _has(names: list[str]) -> str:
    return "has" if len(names) == 1 else "have"


def _listed(names: tuple[str, ...] | list[str]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"
