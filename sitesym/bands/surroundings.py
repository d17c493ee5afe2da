"""Reasons outside the ideal crystal: instrument and room, disorder, another phase, loss of symmetry, or none."""

from __future__ import annotations

import tomllib
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from importlib.resources import files
from typing import Any

from sitesym.analysis import Analysis
from sitesym.bands.inventory import Family
from sitesym.bands.lowering import Lowering
from sitesym.bands.measurement import Band
from sitesym.bands.reasons import Reason


@dataclass(frozen=True, eq=False)
class Suspect:
    """Another phase that the user suspects: its name and what it would show."""

    name: str
    families: tuple[Family, ...]


@lru_cache(maxsize=1)
def _room() -> tuple[dict[str, Any], ...]:
    text = files("sitesym").joinpath("data", "room_bands.toml").read_text(encoding="utf-8")
    return tuple(tomllib.loads(text)["band"])


def room_reasons(band: Band) -> list[Reason]:
    """Lines of the instrument, the substrate and the air near a band."""
    reasons = []
    for entry in _room():
        if entry["technique"] != band.technique or "wavenumber" not in entry:
            continue
        window = float(entry.get("window", 4.0)) + band.uncertainty
        off = abs(band.wavenumber - entry["wavenumber"])
        if off > window:
            continue
        cause = "atmosphere" if entry["kind"] == "atmosphere" else "instrument"
        argument = f"near {entry['wavenumber']:g} cm⁻¹: {entry['words']}"
        score = 0.62 * (1 - 0.6 * off / window)
        reasons.append(
            Reason(cause, score, argument, (), (), "measure without the sample, or with another laser line")
        )
    return reasons


def disorder_reasons(analysis: Analysis, band: Band, families: Sequence[Family]) -> list[Reason]:
    """Partial or mixed occupancy lets fundamentals show that the average structure forbids."""
    if analysis.is_ordered:
        return []
    inside = [family.name for family in families if family.window[0] <= band.wavenumber <= family.window[1]]
    if not inside:
        return []
    argument = (
        "the structure is an average over disordered sites; locally the symmetry is lower, so that "
        f"{', '.join(inside[:3])} may show forbidden components, usually broad"
    )
    return [Reason("disorder", 0.4, argument, (), (), "the band is broad and does not sharpen on cooling")]


def phase_reasons(band: Band, suspects: Sequence[Suspect]) -> list[Reason]:
    """Fundamentals of suspected phases near the band, compared on the same terms as those of the crystal itself."""
    reasons = []
    for suspect in suspects:
        for family in suspect.families:
            if family.wavenumber is None or not family.capacity(band.technique):
                continue
            off = abs(band.wavenumber - family.wavenumber) / (12 + 0.012 * family.wavenumber)
            if off > 3:
                continue
            argument = f"allowed as {family.name} of {suspect.name}, near {family.wavenumber:g} cm⁻¹"
            test = f"other bands of {suspect.name} must be there too; its share varies from place to place"
            reasons.append(Reason("second_phase", 0.45 * (1 - off / 4), argument, (), (), test))
    return reasons


def lowering_reasons(band: Band, lowerings: Sequence[Lowering]) -> list[Reason]:
    """Loss of the assumed symmetry, for bands that the highest such groups would give a place."""
    reasons = []
    for rank, one in enumerate(lowerings):
        if band not in one.explains:
            continue
        argument = (
            f"would need the symmetry to be lowered to {one.name}, which allows {one.infrared} infrared and {one.raman} "
            f"Raman bands and gives {len(one.explains)} of the bands left over a place"
        )
        score = (0.34 + 0.08 * min(len(one.explains) - 1, 4)) / (1 + 0.5 * rank)
        test = "further bands must split or appear; diffraction or second-harmonic generation can confirm it"
        reasons.append(Reason("symmetry_lowering", score, argument, (), (), test))
    return reasons


def unexplained(band: Band) -> Reason:
    """What is left when nothing else fits."""
    argument = f"no fundamental, overtone or combination that was tried accounts for {band.words}"
    return Reason("unexplained", 0.08, argument, (), (), "measure another sample, laser line or temperature")
