"""Reasons outside the ideal crystal: instrument and room, disorder, another phase, loss of symmetry, or none."""

from __future__ import annotations

import tomllib
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from importlib.resources import files
from typing import Any

from sitesym.analysis import Analysis
from sitesym.bands.assignment import Placed
from sitesym.bands.inventory import Family
from sitesym.bands.lowering import Lowering
from sitesym.bands.measurement import Band
from sitesym.bands.reasons import Reason
from sitesym.bands.site_lowering import nearest_forbidden, site_lowerings


@dataclass(frozen=True, eq=False)
class Suspect:
    """Another phase that the user suspects: its name and what it would show."""

    name: str
    families: tuple[Family, ...]


@dataclass(frozen=True, slots=True)
class Feature:
    """One line of the instrument or the room.

    name, words, decide   what it is, when it is seen, and what tells it from the sample.
    wavenumber, window    cm⁻¹; strength 1 for the strongest lines of a feature, less for others.
    strongest             wavenumbers of the strong lines of the same feature, of which one must be seen first.
    """

    name: str
    technique: str
    cause: str
    words: str
    decide: str
    wavenumber: float
    window: float
    strength: float
    strongest: tuple[float, ...]


_WITHOUT_INVERSION = 0.7
"""Weight of a loss of symmetry where there is no inversion to lose: longitudinal companions come first."""

_STRENGTHS = {"strong": 1.0, "medium": 0.75, "weak": 0.5}
_SUBSTANCES = {"silicon": "Si", "diamond": "C"}
"""Features that are the sample itself where it has this formula."""


@lru_cache(maxsize=8)
def features(laser: float | None = None) -> tuple[Feature, ...]:
    """All lines of the table; those given as wavelengths only where the laser's wavelength (nm) is known."""
    text = files("sitesym").joinpath("data", "room_bands.toml").read_text(encoding="utf-8")
    return tuple(one for entry in tomllib.loads(text)["feature"] for one in _lines(entry, laser))


def _lines(entry: dict[str, Any], laser: float | None) -> list[Feature]:
    placed = [(one, _place(one, laser)) for one in entry["bands"]]
    strong = tuple(place[0] for one, place in placed if place and one["strength"] == "strong")
    return [
        Feature(
            entry["name"], entry["technique"], entry["cause"], entry["words"], entry["decide"], place[0], place[1],
            _STRENGTHS[one["strength"]], strong,
        )
        for one, place in placed
        if place is not None
    ]  # fmt: skip


def _place(one: dict[str, Any], laser: float | None) -> tuple[float, float] | None:
    """Wavenumber and window in cm⁻¹; for an emission line the Raman shift at which it appears."""
    if "wavenumber" in one:
        return float(one["wavenumber"]), float(one["window"])
    if laser is None:
        return None
    wavelength = float(one["wavelength"])
    return 1e7 / laser - 1e7 / wavelength, 1e7 * float(one["window"]) / wavelength**2


def _is_sample(one: Feature, analysis: Analysis) -> bool:
    """Whether a feature is the sample itself."""
    return any(name in one.name and formula == analysis.formula for name, formula in _SUBSTANCES.items())


def room_reasons(analysis: Analysis, band: Band, bands: Sequence[Band], laser: float | None = None) -> list[Reason]:
    """Lines of the instrument, the substrate and the air near a band. `bands` are all that were measured."""
    reasons = []
    for one in features(laser):
        window = one.window + band.uncertainty
        off = abs(band.wavenumber - one.wavenumber)
        if one.technique != band.technique or off > window or _is_sample(one, analysis):
            continue
        believed = one.strength == 1.0 or any(
            abs(other.wavenumber - place) <= 5 + other.uncertainty and other.technique == band.technique
            for other in bands
            for place in one.strongest
        )
        argument = f"near {one.wavenumber:.4g} cm⁻¹, where {one.name} has a line: {one.words}"
        score = 0.62 * one.strength * (1 - 0.6 * off / window) * (1.0 if believed else 0.4) * min(1.0, 16 / one.window)
        score *= 0.8 if one.cause == "second_phase" else 1.0
        reasons.append(Reason(one.cause, score, argument, (), (), one.decide))
    return reasons


def disorder_reasons(analysis: Analysis, band: Band, families: Sequence[Family]) -> list[Reason]:
    """Disorder lets fundamentals show that the average structure forbids; it may be in the file, or be hidden."""
    test = "the band is broad and does not sharpen on cooling"
    inside = [family.name for family in families if family.window[0] <= band.wavenumber <= family.window[1]]
    if analysis.is_ordered or not inside:
        argument = (
            "atoms displaced at random, strain or defects would relax the selection rules of the average structure; "
            "nothing in the file says that they are there"
        )
        return [Reason("disorder", 0.07, argument, (), (), test)]
    argument = (
        "the structure is an average over disordered sites; locally the symmetry is lower, so that "
        f"{', '.join(inside[:3])} may show forbidden components, usually broad"
    )
    return [Reason("disorder", 0.55, argument, (), (), test)]


def phase_reasons(placed: Placed, suspects: Sequence[Suspect]) -> list[Reason]:
    """Fundamentals of suspected phases near a band, first the one that took it."""
    band = placed.band
    reasons = [_taken(placed.rival, suspect) for suspect in suspects if placed.rival in suspect.families]
    for suspect in suspects:
        for family in suspect.families:
            if family.wavenumber is None or not family.capacity(band.technique):
                continue
            off = abs(band.wavenumber - family.wavenumber) / (12 + 0.012 * family.wavenumber)
            if off > 3:
                continue
            argument = f"allowed as {family.name} of {suspect.name}, near {family.wavenumber:g} cm⁻¹"
            test = f"other bands of {suspect.name} must be there too; its share varies from place to place"
            reasons.append(Reason("second_phase", 0.6 * (1 - off / 4), argument, (), (), test))
    return reasons


def _taken(rival: Family | None, suspect: Suspect) -> Reason:
    assert rival is not None
    argument = f"allowed as {rival.name} of {suspect.name}, which accounts for it better than the crystal assumed"
    test = f"other bands of {suspect.name} must be there too; its share varies from place to place"
    return Reason("second_phase", 0.75, argument, (), (), test)


def lowering_reasons(
    analysis: Analysis, band: Band, lowerings: Sequence[Lowering], families: Sequence[Family]
) -> list[Reason]:
    """Loss of the assumed symmetry, for bands that the highest such groups would give a place."""
    reasons = []
    family, closeness = nearest_forbidden(band, families)
    for rank, one in enumerate(lowerings):
        if band not in one.explains:
            continue
        argument = (
            f"would need the symmetry to be lowered to {one.name}, which allows {one.infrared} infrared and "
            f"{one.raman} Raman bands and gives {len(one.explains)} of the bands left over a place"
            + (f"; {family.name} is forbidden in this technique and lies here" if family else "")
        )
        score = (0.34 + 0.08 * min(len(one.explains) - 1, 4) + 0.24 * closeness) / (1 + 0.5 * rank)
        score *= 1.0 if analysis.factor_group.has_inversion else _WITHOUT_INVERSION
        test = "further bands must split or appear; diffraction or second-harmonic generation can confirm it"
        reasons.append(Reason("symmetry_lowering", score, argument, (), (), test))
    return reasons


def site_reasons(analysis: Analysis, band: Band, families: Sequence[Family]) -> list[Reason]:
    """Loss of symmetry at the site of one unit, for the forbidden fundamental that lies at the band."""
    family, closeness = nearest_forbidden(band, families)
    if family is None:
        return []
    reasons = []
    for one in site_lowerings(analysis, family, band.technique):
        argument = (
            f"would need some {family.unit} on a site of lower symmetry, {one.left} in place of {one.assumed}, "
            f"which allows {family.vibration}: an impurity, a vacancy or a surface would do, the rest kept as it is"
        )
        test = "the band is weak, and its strength follows the impurity or the treatment of the sample"
        reasons.append(Reason("symmetry_lowering", 0.3 * closeness, argument, (), (), test))
    return reasons


def unexplained(band: Band) -> Reason:
    """What is left when nothing else fits."""
    argument = f"no fundamental, overtone or combination that was tried accounts for {band.words}"
    return Reason("unexplained", 0.08, argument, (), (), "measure another sample, laser line or temperature")
