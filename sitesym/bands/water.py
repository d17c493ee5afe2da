"""Water that the structure does not hold: a hydrate in place of the compound, or moisture on the sample."""

from __future__ import annotations

from sitesym.analysis import Analysis
from sitesym.bands.measurement import INFRARED, Band
from sitesym.bands.reasons import Reason
from sitesym.known_units import composition_of

_REGIONS = ((1590.0, 1690.0, "bending"), (3000.0, 3700.0, "stretching"))
"""cm⁻¹. Where crystal water and adsorbed water absorb (Nakamoto, Infrared and Raman Spectra; from memory)."""

_WATER = composition_of("H2O")


def water_reasons(analysis: Analysis, band: Band) -> list[Reason]:
    """Bending and stretching of water, for crystals in which no water stands; stronger in infrared."""
    if analysis.molecular is None or any(composition_of(row.formula) == _WATER for row in analysis.molecular.molecules):
        return []
    for low, high, kind in _REGIONS:
        if low <= band.wavenumber <= high:
            argument = (
                f"allowed as O-H {kind} of water, of which the structure has none: a hydrate of the compound, or "
                "moisture on the sample"
            )
            test = "dry the sample and look at the other region of water, 1640 and 3000 to 3700 cm⁻¹; weigh it"
            score = 0.15 if band.technique == INFRARED else 0.1
            return [Reason("second_phase", score, argument, (), (), test)]
    return []
