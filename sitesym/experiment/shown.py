"""What one scattering geometry shows of every species."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.analysis import Analysis, SpeciesRow
from sitesym.experiment.expressions import from_form
from sitesym.experiment.phonons import branches
from sitesym.geometry.intensity import quadratic_form
from sitesym.geometry.notation import Geometry

Complexes = np.typing.NDArray[np.complex128]
_VISIBLE = 1e-9


@dataclass(frozen=True, eq=False)
class Shown:
    """One species, or one kind of its phonons, in one geometry.

    phonon      "LO", "TO", "oblique", or None for species that are not polar.
    form        (k, k) Hermitian: intensity = letters^H form letters.
    expression  the same in letters; "0" where it is forbidden.
    """

    label: str
    phonon: str | None
    letters: tuple[str, ...]
    form: Complexes
    expression: str

    @property
    def allowed(self) -> bool:
        """Whether the intensity is not zero by symmetry."""
        return bool(np.abs(self.form).max(initial=0.0) > _VISIBLE)

    @property
    def name(self) -> str:
        """`E(LO)`, `A1g`."""
        return f"{self.label}({self.phonon})" if self.phonon else self.label


@dataclass(frozen=True, eq=False)
class GeometryResult:
    """A geometry and all that it shows; one entry for each kind of phonon of every Raman-active species with modes."""

    geometry: Geometry
    shown: tuple[Shown, ...]

    @property
    def allowed(self) -> tuple[Shown, ...]:
        """Only what the geometry shows."""
        return tuple(one for one in self.shown if one.allowed)

    def __repr__(self) -> str:
        return f"GeometryResult({self.geometry.notation}: {', '.join(one.name for one in self.allowed) or 'nothing'})"


def raman_rows(analysis: Analysis) -> tuple[SpeciesRow, ...]:
    """Raman-active species that have optic modes in this crystal."""
    return tuple(row for row in analysis.species if row.activity.raman and row.optic)


def what_it_shows(analysis: Analysis, geometry: Geometry) -> GeometryResult:
    """Selection rules of a geometry for every Raman-active species with optic modes."""
    shown = [one for row in raman_rows(analysis) for one in _of_species(row, geometry)]
    return GeometryResult(geometry, tuple(shown))


def _of_species(row: SpeciesRow, geometry: Geometry) -> list[Shown]:
    letters = row.tensor.letters
    result = []
    for branch in branches(row.tensor, geometry.phonon):
        form = quadratic_form(geometry, list(branch.bases))
        result.append(Shown(row.label, branch.kind, letters, form, from_form(form, letters)))
    return result
