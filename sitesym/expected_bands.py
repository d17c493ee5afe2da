"""Where the internal vibrations of known wavenumber are expected in the crystal: the lines of a line spectrum.

Symmetry does not tell how far the components of one vibration lie apart, so all of them stand at the wavenumber of the
free unit, or at the one that the user gave.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from sitesym.correlation import Vibration
from sitesym.fate import Fate
from sitesym.known_units import KnownVibration


@dataclass(frozen=True, slots=True)
class ExpectedBand:
    """One component of one vibration of one kind of unit in the crystal.

    unit          name of the unit, and `row` its number among the kinds of molecules of the analysis, from 0.
    vibration     usual name, "" if it has none; `free_species` and `kind` as in the free molecule.
    wavenumber    cm⁻¹; `given` if it is the user's own, else it is that of the free unit.
    species       of the factor group; `count` times, each of `dimension` partners.
    polar         axes (x, y, z of the report) along which its dipole may point; none where infrared does not show it.
    """

    unit: str
    row: int
    vibration: str
    free_species: str
    kind: str
    wavenumber: float
    given: bool
    species: str
    count: int
    dimension: int
    infrared: bool
    raman: bool
    polar: tuple[str, ...]


def expected_bands(
    unit: str,
    row: int,
    vibrations: Sequence[Vibration],
    names: Sequence[Sequence[KnownVibration]],
    fates: Sequence[Fate],
) -> tuple[ExpectedBand, ...]:
    """The bands of one kind of unit whose wavenumbers are known, in rising order of wavenumbers.

    vibrations, names, fates  one each for every row of vibrations of the unit.
    """
    found = [
        band
        for vibration, known, fate in zip(vibrations, names, fates, strict=True)
        for one in known
        if one.wavenumber is not None
        for band in _bands(unit, row, vibration, one, one.wavenumber, fate)
    ]
    return tuple(sorted(found, key=lambda band: band.wavenumber))


def _bands(
    unit: str, row: int, vibration: Vibration, known: KnownVibration, wavenumber: float, fate: Fate
) -> list[ExpectedBand]:
    return [
        ExpectedBand(
            unit, row, known.name, vibration.species, vibration.kind, wavenumber, known.given, part.label, part.count,
            part.activity.dimension, part.activity.infrared, part.activity.raman, part.activity.polar,
        )
        for part in fate.crystal
    ]  # fmt: skip
