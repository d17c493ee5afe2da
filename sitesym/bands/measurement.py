"""Measured bands: where they lie, how they were measured, and how sure their place is."""

from __future__ import annotations

from dataclasses import dataclass

RAMAN, INFRARED = "raman", "infrared"
TECHNIQUES = (RAMAN, INFRARED)

DEFAULT_UNCERTAINTY = 2.0
"""cm⁻¹, for a band whose uncertainty is not stated: the usual reading error of a dispersive instrument."""


@dataclass(frozen=True, slots=True)
class Band:
    """One measured band.

    wavenumber   cm⁻¹; uncertainty likewise, one standard deviation.
    technique    "raman" or "infrared".
    intensity    in any unit, width (full width at half maximum, cm⁻¹): None where not stated.
    geometry     a scattering geometry such as "z(xy)-z", or "" where not stated.
    """

    wavenumber: float
    technique: str
    uncertainty: float = DEFAULT_UNCERTAINTY
    intensity: float | None = None
    width: float | None = None
    geometry: str = ""
    note: str = ""

    @property
    def words(self) -> str:
        """`Raman 1086 cm⁻¹`."""
        name = "Raman" if self.technique == RAMAN else "infrared"
        return f"{name} {self.wavenumber:g} cm⁻¹"
