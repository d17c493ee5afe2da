"""Measurements from files: lists of bands, and spectra from which bands are picked."""

from __future__ import annotations

import os
from collections.abc import Sequence
from dataclasses import dataclass

from sitesym.bands.jcamp_dx import is_jcamp, read_jcamp
from sitesym.bands.lists import band_list
from sitesym.bands.measurement import TECHNIQUES, Band
from sitesym.bands.peaks import CALIBRATION, LEAST, Picks, pick
from sitesym.bands.profiles import SHAPES
from sitesym.bands.spectrum import DIRECTIONS, Trace, is_spectrum, spectrum_of, trace_of
from sitesym.bands.tables import Table, read_table
from sitesym.errors import ReadError, UsageError
from sitesym.reading.source import Given, open_source

KINDS = ("list", "spectrum")
_MEND = "Give a list of bands or a spectrum as text, CSV or JCAMP-DX."


@dataclass(frozen=True, slots=True)
class Manner:
    """How files are to be taken, where they do not tell.

    laser       wavelength of the laser line in air, nm, or None.
    unit        of the axis where the file states none: "" (cm-1), "cm-1", "nm", "um", "meV", "THz".
    kind        "list" or "spectrum", or "" to tell by the content.
    direction   "peaks" or "dips" for infrared spectra, or "" to tell by name or looks.
    shape       of the profiles that are fitted: "pseudo-voigt" or "lorentzian".
    least       height of the weakest band that is picked, as a share of the strongest.
    background  cm⁻¹ over which the background of a spectrum varies; None: as usual for the technique.
    calibration standard deviation of the scale, cm⁻¹, for picked bands.
    """

    laser: float | None = None
    unit: str = ""
    kind: str = ""
    direction: str = ""
    shape: str = SHAPES[0]
    least: float = LEAST
    background: float | None = None
    calibration: float = CALIBRATION

    def __post_init__(self) -> None:
        for name, value, known in (("kind", self.kind, KINDS), ("direction", self.direction, DIRECTIONS)):
            if value and value not in known:
                raise UsageError(f"'{value}' is no {name} of measurements.", f"Give {' or '.join(known)}.")
        if not 0 < self.calibration < 100:
            raise UsageError(f"A scale uncertain by {self.calibration:g} cm⁻¹ makes no sense.", "Give 0.1 to 10.")


@dataclass(frozen=True, eq=False)
class Record:
    """What one file gave.

    bands  of its list, or picked from its spectrum; picks the spectrum with what was fitted, None for lists.
    notes  how it was read, in words.
    """

    source: str
    bands: tuple[Band, ...]
    picks: Picks | None
    notes: tuple[str, ...]

    def __repr__(self) -> str:
        kind = "list" if self.picks is None else "spectrum"
        return f"Record({self.source}: {kind}, {len(self.bands)} bands)"


def read_bands(
    path: str | os.PathLike[str], technique: str = "", *,
    laser: float | None = None, unit: str = "", kind: str = "", direction: str = "",
) -> tuple[Band, ...]:  # fmt: skip
    """The bands of one file: a list of bands, or a spectrum from which they are picked.

    technique   "raman" or "infrared"; "" for lists with a column that tells.
    laser       wavelength of the laser line in air, nm: needed where an axis tells wavelengths of scattered light.
    unit        of the axis where the file states none: "" (cm-1), "cm-1", "nm", "um", "meV", "THz".
    kind        "list" or "spectrum", or "" to tell by the content.
    direction   "peaks" or "dips" for infrared spectra, or "" to tell by name or looks.

    `read_record` gives the spectrum with its fit besides, and offers more choices.

    Raises ReadError, with the line, for what cannot be read, and UsageError where the user has to say more.
    """
    return read_record(path, technique, Manner(laser, unit, kind, direction)).bands


def read_records(
    raman: Sequence[str], infrared: Sequence[str], mixed: Sequence[str] = (), manner: Manner | None = None
) -> tuple[Record, ...]:
    """Several files of each technique, and lists that tell it themselves."""
    manner = manner or Manner()
    wanted = [*((path, "raman") for path in raman), *((path, "infrared") for path in infrared)]
    return tuple(read_record(path, technique, manner) for path, technique in [*wanted, *((path, "") for path in mixed)])


def read_record(path: str | os.PathLike[str], technique: str, manner: Manner | None = None) -> Record:
    """What one file gives: see `read_bands`."""
    manner = manner or Manner()
    if technique and technique not in TECHNIQUES:
        raise UsageError(f"'{technique}' is no technique.", f"Give {' or '.join(TECHNIQUES)}.")
    given = _opened(path)
    text = given.text
    found = read_jcamp(text, given.name, technique) if is_jcamp(text) else read_table(text, given.name)
    if isinstance(found, Table) and _is_list(found, manner):
        listed = band_list(found, technique, manner.unit, manner.laser)
        return Record(given.name, listed.bands, None, listed.notes)
    return _picked(found if isinstance(found, Trace) else trace_of(found), technique, manner)


def _opened(path: str | os.PathLike[str]) -> Given:
    try:
        given = open_source(path)
    except ReadError as error:
        raise ReadError(error.problem, _MEND) from None
    if given.is_binary:
        raise ReadError(f"{given.name} is no text file.", "Export it as text in two columns, CSV or JCAMP-DX.")
    return given


def _is_list(table: Table, manner: Manner) -> bool:
    return manner.kind != "spectrum" and (manner.kind == "list" or not is_spectrum(table))


def _picked(trace: Trace, technique: str, manner: Manner) -> Record:
    if not technique:
        raise UsageError(
            f"{trace.source} is a spectrum, and nothing tells whether Raman or infrared.",
            "Give it with --raman or --infrared.",
        )
    if manner.kind == "list":
        raise ReadError(f"{trace.source} is a spectrum, no list of bands.", "Leave out what says that it is a list.")
    spectrum = spectrum_of(trace, technique, manner.unit, manner.laser, manner.direction)
    picks = pick(spectrum, shape=manner.shape, least=manner.least, length=manner.background)
    if not picks.peaks:
        raise ReadError(f"{trace.source}: no band rises above the noise.", "Give a list of bands instead.")
    words = f"spectrum of {len(spectrum.signal)} points, {len(picks.peaks)} bands picked"
    return Record(trace.source, picks.bands(manner.calibration), picks, (words, *spectrum.notes))
