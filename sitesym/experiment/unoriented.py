"""Measurements without an orientation: powders, and a single grain of which no axis is known."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from sitesym.analysis import Analysis
from sitesym.experiment.powder import PowderRow, powder_words
from sitesym.experiment.shown import raman_rows

_ZERO = 1e-9


@dataclass(frozen=True, slots=True)
class Unoriented:
    """One spectrum of a powder or grain.

    name     "parallel" or "crossed": the analyser along or across the laser's polarization.
    species  (label, mean intensity over all orientations in letters) of all that it shows.
    """

    name: str
    species: tuple[tuple[str, str], ...]


def unoriented_measurements(rows: Sequence[PowderRow]) -> tuple[Unoriented, ...]:
    """The parallel and the crossed spectrum."""
    return (
        Unoriented("parallel", tuple((row.label, row.parallel) for row in rows if row.parallel != "0")),
        Unoriented("crossed", tuple((row.label, row.crossed) for row in rows if row.crossed != "0")),
    )


def unoriented_words(analysis: Analysis, rows: Sequence[PowderRow], sample: str) -> tuple[str, ...]:
    """What can be told without an orientation, in plain sentences. sample: "grain" or "powder"."""
    if sample == "powder":
        return powder_words(analysis)
    return (_vanishing(rows), *_one_letter(analysis), *_polar(analysis), _many(analysis))


def _vanishing(rows: Sequence[PowderRow]) -> str:
    always = [row.label for row in rows if row.depolarization[1] < _ZERO]
    if not always:
        return (
            "In one grain any band may vanish at some polarization by chance of its orientation, and no species of "
            "this crystal vanishes in crossed polarization in every grain: one grain at one angle assigns nothing."
        )
    return (
        f"A band that vanishes in crossed polarization at every angle and in several grains is of {_listed(always)}; "
        "at a single angle any band may vanish by chance of the orientation."
    )


def _one_letter(analysis: Analysis) -> tuple[str, ...]:
    """Species with one independent element: all their bands change alike when the light is turned.

    Degenerate polar ones are left out, because their LO and TO parts change each in their own way.
    """
    alike = [
        row.label
        for row in raman_rows(analysis)
        if len(row.tensor.letters) == 1 and not (row.dimension > 1 and row.activity.infrared)
    ]
    if not alike:
        return ()
    return (
        f"Turn the polarization (parallel and crossed, 0 to 180° in steps of 15°) on one spot: all bands of "
        f"{_each(alike)} rise and fall together there, as its tensor has one independent element. Two bands that "
        "change unlike are not both of it; bands that change alike may be.",
    )


def _polar(analysis: Analysis) -> tuple[str, ...]:
    polar = [row.label for row in raman_rows(analysis) if row.activity.infrared]
    if not polar:
        return ()
    return (
        f"The wavevector's direction in the grain is not known: bands of {_listed(polar)} lie anywhere from the TO to "
        "the LO wavenumber and move from grain to grain. Bands that keep their place in all grains are not polar, or "
        "hardly split.",
    )


def _many(analysis: Analysis) -> str:
    system = "an X-ray or electron diffraction pattern, or the extinction between crossed polarizers,"
    if analysis.symmetry.number >= 195:
        system = "an X-ray or electron diffraction pattern"
    return (
        f"Find an axis first if you can: {system} turns the grain into an oriented crystal, which can be planned "
        "for by its faces. Averaged over many grains the ratios are those of a powder."
    )


def _each(names: Sequence[str]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} or {names[-1]} (each for itself)"


def _listed(names: Sequence[str]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"
