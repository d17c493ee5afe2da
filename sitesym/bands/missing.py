"""Fundamentals that the crystal allows and no band was given to, with the usual reasons."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from sitesym.bands.assignment import Placed
from sitesym.bands.inventory import Family
from sitesym.bands.measurement import TECHNIQUES


@dataclass(frozen=True, slots=True)
class Missing:
    """Components of one family that a technique allows and did not show.

    allowed, seen  numbers of bands; reasons in words, the most telling first.
    """

    family: Family
    technique: str
    allowed: int
    seen: int
    reasons: tuple[str, ...]


def missing_bands(families: Sequence[Family], placed: Sequence[Placed]) -> tuple[Missing, ...]:
    """All families with fewer bands than allowed, for the techniques that were measured."""
    measured = [technique for technique in TECHNIQUES if any(one.band.technique == technique for one in placed)]
    found = []
    for family in families:
        for technique in measured:
            mine = [one for one in placed if one.family is family and one.band.technique == technique]
            allowed = family.capacity(technique)
            if len(mine) < allowed:
                span = _span(placed, technique)
                words = _reasons(family, technique, len(mine), allowed, span)
                found.append(Missing(family, technique, allowed, len(mine), words))
    return tuple(found)


def _span(placed: Sequence[Placed], technique: str) -> tuple[float, float]:
    values = [one.band.wavenumber for one in placed if one.band.technique == technique]
    return min(values), max(values)


def _reasons(family: Family, technique: str, seen: int, allowed: int, span: tuple[float, float]) -> tuple[str, ...]:
    words = []
    low, high = family.window
    if high < span[0] or low > span[1]:
        words.append(f"outside the range in which bands were reported ({span[0]:g} to {span[1]:g} cm⁻¹)")
    if not family.free_allows(technique):
        words.append("forbidden in the free unit, so weak by parentage")
    if seen and allowed > family.site_bands(technique):
        words.append("components of the correlation field may lie closer than their widths")
    elif seen:
        words.append("components may coincide or be weak in the polarization measured")
    if not family.is_internal:
        words.append("symmetry counts them but fixes neither place nor strength; low-frequency limits of instruments")
    if not words:
        words.append("weak, hidden under another band, or not present in the polarization measured")
    return tuple(words)
