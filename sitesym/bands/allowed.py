"""Reasons for bands that have a place among the allowed fundamentals: as what are they allowed?"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from sitesym.bands.assignment import Placed
from sitesym.bands.inventory import Family
from sitesym.bands.measurement import Band
from sitesym.bands.reasons import Reason

_SITE_REACH, _FIELD_REACH = 110.0, 45.0
"""cm⁻¹ over which the score of a splitting halves: sites split by up to a hundred, units couple by some tens."""

_NAMED = 0.5
"""Weight of the splitting for the component that keeps the name of the fundamental: which one does is convention."""

_BY_COUNT = 0.62
"""Weight of a place that is had by count alone, with no wavenumber to compare."""

_WORDS = {"raman": "Raman", "infrared": "infrared"}


def reasons_of_place(placed: Placed, siblings: Sequence[Band]) -> list[Reason]:
    """Why a band stands in its family. `siblings` are all bands of that family and technique, itself included."""
    family, band = placed.family, placed.band
    assert family is not None
    technique = band.technique
    labels = tuple(one.label for one in family.active(technique))
    if not family.is_internal:
        return _by_count(placed, family, labels)
    if len(siblings) == 1:
        return [_single(placed, family, labels)]
    split = _split(placed, family, labels, siblings)
    if band != _first(family, siblings):
        return split
    return [_single(placed, family, labels), *(replace(one, score=_NAMED * one.score) for one in split)]


def _by_count(placed: Placed, family: Family, labels: tuple[str, ...]) -> list[Reason]:
    """External modes and modes of nets: they have a place by number only."""
    technique = placed.band.technique
    score = _BY_COUNT * _fit(placed)
    argument = (
        f"allowed as one of {family.capacity(technique)} {family.vibration} of the {family.unit} that "
        f"{_WORDS[technique]} can show; symmetry fixes no wavenumbers"
    )
    reasons = [Reason("fundamental", score, argument, (), labels, "polarized spectra tell the species")]
    if family.unit == "lattice" and family.capacity(technique) > 3:
        coupled = (
            "the equivalent units move with and against each other: each of their external motions gives several bands"
        )
        test = "polarized spectra tell the components; they draw together in a diluted crystal"
        reasons.append(Reason("correlation_splitting", 0.5 * score, coupled, (), labels, test))
    return reasons


def _fit(placed: Placed) -> float:
    """A score that falls with the cost of the place."""
    return 1 / (1 + 0.35 * placed.cost)


def _first(family: Family, siblings: Sequence[Band]) -> Band:
    """The band that keeps the name of the fundamental: the strongest, else the one nearest to its place."""
    if all(band.intensity for band in siblings):
        return max(siblings, key=lambda band: (band.intensity or 0.0, -band.wavenumber))
    centre = family.wavenumber or sum(band.wavenumber for band in siblings) / len(siblings)
    return min(siblings, key=lambda band: (abs(band.wavenumber - centre), band.wavenumber))


def _single(placed: Placed, family: Family, labels: tuple[str, ...]) -> Reason:
    technique = placed.band.technique
    near = f", near {family.wavenumber:g} cm⁻¹ in the free unit" if family.wavenumber else ""
    if family.free_allows(technique):
        argument = f"allowed as the fundamental {family.name} ({family.free_species}{near})"
        return Reason("fundamental", _fit(placed), argument, (), labels, "")
    argument = (
        f"{family.name} ({family.free_species}{near}) is forbidden in {_WORDS[technique]} for the free unit; its site "
        "has less symmetry and allows it, usually weakly"
    )
    return Reason("site_activation", _fit(placed), argument, (), labels, "compare with the salt in solution")


def _split(placed: Placed, family: Family, labels: tuple[str, ...], siblings: Sequence[Band]) -> list[Reason]:
    technique, seen, first = placed.band.technique, len(siblings), _first(family, siblings)
    apart, likeness = abs(placed.band.wavenumber - first.wavenumber), _likeness(placed.band, first)
    site, crystal = family.site_bands(technique), family.capacity(technique)
    reasons = []
    if site > 1:
        argument = (
            f"allowed as a further component of {family.name} ({family.free_species}): the site lifts its degeneracy "
            f"into {site} bands in {_WORDS[technique]}, {seen} are seen"
        )
        test = "isotopic dilution leaves site splitting and removes correlation-field splitting"
        score = likeness * _fit(placed) / (1 + (apart / _SITE_REACH) ** 2)
        reasons.append(Reason("site_splitting", score, argument, (), labels, test))
    if crystal > site:
        argument = (
            f"allowed as a further component of {family.name} ({family.free_species}): coupling of equivalent units "
            f"gives up to {crystal} bands in {_WORDS[technique]}, the site alone {site}"
        )
        test = "isotopic dilution removes correlation-field splitting; polarized spectra tell the components"
        share = 0.9 if site <= 1 or seen > site else 0.55
        score = likeness * share * _fit(placed) / (1 + (apart / _FIELD_REACH) ** 2)
        reasons.append(Reason("correlation_splitting", score, argument, (), labels, test))
    if not reasons:
        reasons.append(_single(placed, family, labels))
    return reasons


def _likeness(band: Band, first: Band) -> float:
    """Components of one vibration have comparable strength: close to 1, less for a band far weaker than the first."""
    if not band.intensity or not first.intensity:
        return 1.0
    return 1 / (1 + 0.09 * first.intensity / band.intensity)
