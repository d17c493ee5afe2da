"""Reasons that follow a fundamental which was seen: longitudinal companions, isotopologues, leakage."""

from __future__ import annotations

import tomllib
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from importlib.resources import files
from math import exp, log
from typing import Any

from sitesym.analysis import Analysis
from sitesym.bands.assignment import Placed
from sitesym.bands.inventory import Family
from sitesym.bands.measurement import RAMAN, Band
from sitesym.bands.reasons import Reason
from sitesym.geometry.intensity import visible_species
from sitesym.geometry.notation import parse_geometry
from sitesym.known_units import composition_of

_LONGITUDINAL_REACH = 0.45
"""Largest (LO − TO) / TO considered; the strongest polar modes of oxides and sulfides come near."""


def longitudinal_reasons(band: Band, placed: Sequence[Placed]) -> list[Reason]:
    """Longitudinal companions lie above the transverse mode of a polar species; Raman shows them without inversion."""
    reasons = []
    for one in placed:
        family = one.family
        if family is None or one.band is band or one.band.technique != band.technique:
            continue
        ratio = band.wavenumber / one.band.wavenumber - 1
        polar = [part.label for part in family.active(band.technique) if part.activity.infrared]
        if not 0.005 < ratio < _LONGITUDINAL_REACH or not polar or not family.free_infrared:
            continue
        argument = (
            f"allowed as the longitudinal companion of {family.name} at {one.band.wavenumber:g} cm⁻¹: "
            f"{', '.join(polar)} is polar, and longitudinal modes lie above the transverse ones"
        )
        test = (
            "a geometry with the phonon's wavevector along the dipole shows LO, across it TO"
            if band.technique == RAMAN
            else "it appears in p polarization at oblique incidence, or in reflectance, not at normal incidence"
        )
        weak = band.intensity and one.band.intensity and band.intensity < 0.3 * one.band.intensity
        strong = 1.0 if weak else 1.25
        score = strong * (0.42 * (1 - (ratio / _LONGITUDINAL_REACH) ** 2) + 0.05)
        reasons.append(Reason("longitudinal_companion", score, argument, (one.band.wavenumber,), tuple(polar), test))
    return reasons


def shown_species(analysis: Analysis, band: Band) -> frozenset[str] | None:
    """Species that the stated geometry shows; None where none is stated.

    Raises UsageError for a geometry that cannot be read or cannot be.
    """
    if not band.geometry or band.technique != RAMAN:
        return None
    geometry = parse_geometry(band.geometry, analysis.symmetry.lattice)
    return visible_species([row.tensor for row in analysis.species], geometry)


def leakage_reasons(analysis: Analysis, band: Band, families: Sequence[Family], own: Family | None) -> list[Reason]:
    """Families of which the stated geometry forbids every component, but misalignment lets some through.

    own  the family that the band was given to, for which the argument is the strongest.
    """
    shown = shown_species(analysis, band)
    if shown is None:
        return []
    reasons = []
    for family in families:
        low, high = family.window
        labels = [part.label for part in family.active(RAMAN)]
        if not labels or shown & set(labels) or not low <= band.wavenumber <= high:
            continue
        argument = (
            f"{', '.join(labels)} of {family.name} is forbidden in {band.geometry}; tilt, aperture or birefringence "
            "may let some of it through"
        )
        score = 0.85 if family is own else 0.5 if family.wavenumber else 0.25
        test = "turn the crystal by 90° or close the aperture: leakage changes, allowed bands stay"
        reasons.append(Reason("leakage", score, argument, (), tuple(labels), test))
    return reasons


@dataclass(frozen=True, slots=True)
class Isotope:
    """A rare isotope: element, name (`13C`), natural abundance (0 to 1), its mass and that of the main one (u)."""

    element: str
    name: str
    abundance: float
    mass: float
    main_mass: float


@lru_cache(maxsize=1)
def rare_isotopes() -> tuple[Isotope, ...]:
    """All isotopes but the most abundant of each element, from the table of the data folder."""
    text = files("sitesym").joinpath("data", "isotopes.toml").read_text(encoding="utf-8")
    found = []
    for entry in tomllib.loads(text)["element"]:
        main = max(entry["isotopes"], key=lambda one: float(one["abundance"]))
        found += [_isotope(entry["symbol"], one, main["mass"]) for one in entry["isotopes"] if one is not main]
    return tuple(found)


def _isotope(symbol: str, entry: dict[str, Any], main_mass: float) -> Isotope:
    return Isotope(symbol, f"{entry['number']}{symbol}", entry["abundance"] / 100, entry["mass"], main_mass)


def isotope_reasons(band: Band, placed: Sequence[Placed]) -> list[Reason]:
    """Weak satellites of strong internal fundamentals: between no shift and that of an atom moving alone."""
    reasons = []
    for one in placed:
        if one.band is band or one.band.technique != band.technique:
            continue
        places = (one.family, *one.alternatives)
        family = next((place for place in places if place is not None and place.is_internal), None)
        if family is not None:
            reasons += [reason for isotope in rare_isotopes() for reason in _satellite(band, one.band, family, isotope)]
    return reasons


def _satellite(band: Band, main: Band, family: Family, isotope: Isotope) -> list[Reason]:
    number = dict(composition_of(family.unit)).get(isotope.element, 0)
    share = number * isotope.abundance
    if share < 0.003:
        return []
    farthest = main.wavenumber * (isotope.main_mass / isotope.mass) ** 0.5
    low, high = sorted((farthest, main.wavenumber))
    if not low - band.uncertainty <= band.wavenumber <= high + band.uncertainty or abs(
        band.wavenumber - main.wavenumber
    ) < max(3.0, band.uncertainty):
        return []
    if band.intensity and main.intensity and band.intensity > 6 * share * main.intensity:
        return []
    argument = (
        f"allowed as {family.name} of units with {isotope.name} ({100 * share:.1f} % of them): between "
        f"{main.wavenumber:g} cm⁻¹ and {farthest:.0f} cm⁻¹, where the atom would move alone"
    )
    test = f"its intensity against {main.wavenumber:g} cm⁻¹ is the abundance; enriched material settles it"
    score = 0.3 + 0.6 * min(share, 0.3)
    if band.intensity and main.intensity:
        score = 0.2 + 0.62 * exp(-(log(band.intensity / (share * main.intensity)) ** 2))
    return [Reason("isotopologue", score, argument, (main.wavenumber,), (), test)]
