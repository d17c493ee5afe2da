"""The confrontation of measured bands with what symmetry allows: one result that all views read."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import hypot

from sitesym.analysis import Analysis
from sitesym.bands.allowed import reasons_of_place
from sitesym.bands.assignment import Placed, assign
from sitesym.bands.coincidence import Coincidences, coincidences
from sitesym.bands.companions import isotope_reasons, leakage_reasons, longitudinal_reasons, shown_species
from sitesym.bands.inventory import Family, inventory
from sitesym.bands.levels import level_reasons, parents_of, resonance_reasons
from sitesym.bands.lowering import Lowering, lowerings
from sitesym.bands.measurement import TECHNIQUES, Band
from sitesym.bands.missing import Missing, missing_bands
from sitesym.bands.reasons import Reason, ranked
from sitesym.bands.surroundings import (
    Suspect,
    disorder_reasons,
    lowering_reasons,
    phase_reasons,
    room_reasons,
    site_reasons,
    unexplained,
)
from sitesym.bands.water import water_reasons
from sitesym.errors import UsageError


@dataclass(frozen=True, eq=False)
class BandResult:
    """One band: where it was put, and every reason found, the best first."""

    placed: Placed
    reasons: tuple[Reason, ...]

    @property
    def band(self) -> Band:
        """The band itself."""
        return self.placed.band

    @property
    def is_allowed(self) -> bool:
        """Whether it has a place among the allowed fundamentals."""
        return self.placed.family is not None


@dataclass(frozen=True, eq=False)
class Explanation:
    """A whole spectrum explained.

    families      what symmetry predicts; bands what was measured, in rising wavenumber within each technique.
    missing       allowed but unseen, with reasons.
    lowerings     lower symmetries that would account for what is left over.
    coincidences  bands seen in both techniques, and how likely that is by accident.
    """

    analysis: Analysis
    families: tuple[Family, ...]
    bands: tuple[BandResult, ...]
    missing: tuple[Missing, ...]
    lowerings: tuple[Lowering, ...]
    coincidences: Coincidences

    def __repr__(self) -> str:
        left = sum(not one.is_allowed for one in self.bands)
        return f"Explanation({self.analysis.formula}: {len(self.bands)} bands, {left} without a place)"


def explain(
    analysis: Analysis,
    bands: Sequence[Band],
    *,
    suspects: Sequence[tuple[str, Analysis]] = (),
    pinned: Sequence[tuple[float, str]] = (),
    forbidden: Sequence[tuple[float, str]] = (),
    laser: float | None = None,
) -> Explanation:
    """Explain measured bands.

    suspects            names and analyses of other phases that may be there.
    pinned, forbidden   (wavenumber, family name) pairs that the user insists on or rules out.
    laser               wavelength in nm (air) of the Raman spectra, for lines of the room at fixed wavelengths.

    Raises UsageError when there are no bands.
    """
    if not bands:
        raise UsageError("There are no bands to explain.", "Give a list of bands or a spectrum.")
    ordered = sorted(bands, key=lambda band: (TECHNIQUES.index(band.technique), band.wavenumber))
    families = inventory(analysis)
    same = same_bands(ordered)
    distinct = [ordered[k] for k in dict.fromkeys(same)]
    others = tuple(Suspect(name, inventory(other)) for name, other in suspects)
    rivals = [family for suspect in others for family in suspect.families]
    placed = assign(distinct, families, pinned=pinned, forbidden=forbidden, rivals=rivals)
    lower = lowerings(analysis, families, distinct, placed, rivals)
    by_first = dict(zip(dict.fromkeys(same), placed, strict=True))
    results = tuple(
        _result(analysis, families, placed, band, by_first[first], lower, others, laser)
        for band, first in zip(ordered, same, strict=True)
    )
    return Explanation(
        analysis, families, results, missing_bands(families, placed), lower, coincidences(analysis, families, distinct)
    )


def same_bands(ordered: Sequence[Band]) -> list[int]:
    """For each band the index of the first that is the same one, seen in another geometry of the same technique.

    Bands within their joint uncertainty are one where each states a geometry and no two state the same.
    """
    first: list[int] = []
    for index, band in enumerate(ordered):
        twins = [
            k
            for k in dict.fromkeys(first)
            if ordered[k].technique == band.technique
            and abs(ordered[k].wavenumber - band.wavenumber) <= hypot(ordered[k].uncertainty, band.uncertainty)
            and band.geometry
            and band.geometry not in {ordered[m].geometry for m, start in enumerate(first) if start == k} | {""}
            and ordered[k].geometry
        ]
        first.append(twins[0] if twins else index)
    return first


def _result(
    analysis: Analysis, families: Sequence[Family], placed: Sequence[Placed], band: Band, place: Placed,
    lower: Sequence[Lowering], suspects: Sequence[Suspect], laser: float | None,
) -> BandResult:  # fmt: skip
    """One band as it was measured: its place is that of the mode, its reasons are those of its own geometry."""
    own = replace(place, band=band)
    others = [other for other in placed if other is not place]
    return BandResult(own, _reasons(analysis, families, [*others, own], own, lower, suspects, laser))


_BESIDE_PLACE = 0.6
"""Weight of companions and of lines of the room for a band that has a place of its own."""

_BEYOND = 0.5
"""Weight of a place that a band would have, were it not taken by others."""


def _reasons(
    analysis: Analysis, families: Sequence[Family], placed: Sequence[Placed], one: Placed,
    lower: Sequence[Lowering], suspects: Sequence[Suspect], laser: float | None,
) -> tuple[Reason, ...]:  # fmt: skip
    band = one.band
    others = [other for other in placed if other is not one]
    parents = parents_of(others)
    beside = [
        *room_reasons(analysis, band, [other.band for other in placed], laser),
        *longitudinal_reasons(band, others),
    ]
    found = [
        *resonance_reasons(analysis, band, others, parents),
        *leakage_reasons(analysis, band, families, one.family),
        *isotope_reasons(band, others),
        *phase_reasons(one, suspects),
    ]
    if one.family is not None:
        own = _of_place(analysis, one, others)
        return ranked([*own, *found, *_weighed(beside, _BESIDE_PLACE)])
    found += [
        *level_reasons(analysis, band, parents),
        *disorder_reasons(analysis, band, families),
        *lowering_reasons(analysis, band, lower, families),
        *site_reasons(analysis, band, families),
        *water_reasons(analysis, band),
        *_beyond(one, families, others),
        unexplained(band),
    ]
    return ranked([*found, *beside])


def _weighed(reasons: Sequence[Reason], weight: float) -> list[Reason]:
    return [replace(reason, score=weight * reason.score) for reason in reasons]


def _siblings(family: Family | None, one: Placed, others: Sequence[Placed]) -> list[Band]:
    """Bands of a family in the technique of one band, itself included."""
    return [
        *(other.band for other in others if other.family is family and other.band.technique == one.band.technique),
        one.band,
    ]


def _of_place(analysis: Analysis, one: Placed, others: Sequence[Placed]) -> list[Reason]:
    """Reasons of the band's own place and of places that cost little more; less where polarization is against them."""
    found = reasons_of_place(one, _siblings(one.family, one, others))
    for other in one.alternatives:
        moved = replace(one, family=other, cost=one.cost + 1.0)
        found += _weighed(reasons_of_place(moved, _siblings(other, one, others)), _BESIDE_PLACE)
    shown = shown_species(analysis, one.band)
    return [
        reason if shown is None or shown & set(reason.species) else replace(reason, score=0.3 * reason.score)
        for reason in found
    ]


def _beyond(one: Placed, families: Sequence[Family], others: Sequence[Placed]) -> list[Reason]:
    """Families in whose reach a band lies that has no place in them: one of their bands may be misassigned instead."""
    found = []
    for family in families:
        low, high = family.window
        if low <= one.band.wavenumber <= high and family.capacity(one.band.technique):
            moved = replace(one, family=family, cost=1.5)
            found += _weighed(reasons_of_place(moved, _siblings(family, one, others)), _BEYOND)
    return found
