"""The correlation of all molecules as flat rows, for tables: one row for each path free unit -> site -> crystal."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

from sitesym.views.fate_sentences import letters
from sitesym.views.labels import Style
from sitesym.views.molecule_sentences import distinguishing_label, names_words
from sitesym.views.sentences import infrared_words

if TYPE_CHECKING:
    from sitesym.analysis import Analysis
    from sitesym.expected_bands import ExpectedBand
    from sitesym.fate import Component, Fate
    from sitesym.molecular import MoleculeRow


@dataclass(frozen=True, slots=True)
class Path:
    """One component of one kind of motion.

    motion       vibration, libration or translation; `kind` that of a vibration, else "".
    names        usual names, "" where there are none; `wavenumbers` those that are known, in cm⁻¹.
    first        whether it is the first path of its motion, `first_of_site` of its species of the site.
    """

    molecule: MoleculeRow
    motion: str
    kind: str
    names: str
    wavenumbers: tuple[float, ...]
    free: Component
    site: Component
    crystal: Component
    first: bool
    first_of_site: bool


def paths(row: MoleculeRow) -> tuple[Path, ...]:
    """All paths of one kind of molecule: vibrations, then librations, then translations."""
    return tuple(_all_paths(row))


def _all_paths(row: MoleculeRow) -> Iterator[Path]:
    for index, (vibration, fate) in enumerate(zip(row.correlation.vibrations, row.fates, strict=True)):
        known = tuple(one.wavenumber for one in row.names[index] if one.wavenumber is not None)
        yield from _paths(row, "vibration", vibration.kind, names_words(row, index), known, fate)
    for motion, fates in (("libration", row.librations), ("translation", row.translations)):
        for fate in fates:
            yield from _paths(row, motion, "", "", (), fate)


def _paths(
    row: MoleculeRow, motion: str, kind: str, names: str, wavenumbers: tuple[float, ...], fate: Fate
) -> Iterator[Path]:
    for number, branch in enumerate(fate.branches):
        for place, part in enumerate(branch.crystal):
            first = number == 0 and place == 0
            yield Path(row, motion, kind, names, wavenumbers, fate.free, branch.site, part, first, place == 0)


def molecules(analysis: Analysis) -> tuple[MoleculeRow, ...]:
    """The kinds of molecules of an analysis; none where they were not looked for."""
    return analysis.molecular.molecules if analysis.molecular else ()


HEADER = ("motion", "free species", "active", "site species", "active", "crystal species", "active", "infrared")
"""Heads of the columns of `stage_cells`."""


def stage_cells(analysis: Analysis, row: MoleculeRow, style: Style) -> list[tuple[str, ...]]:
    """The correlation of one kind of molecule as a table, cells ready for the style, repetitions left empty."""
    return [_cells(analysis, path, style) for path in paths(row)]


def _cells(analysis: Analysis, path: Path, style: Style) -> tuple[str, ...]:
    free = (style.plain(_motion(path)), style.species(path.free.label), letters(path.free.activity))
    site = (_counted(path.site, style), letters(path.site.activity))
    polarization = infrared_words(analysis.species_row(path.crystal.label))
    return (
        *(free if path.first else ("", "", "")),
        *(site if path.first_of_site else ("", "")),
        _counted(path.crystal, style),
        letters(path.crystal.activity),
        style.plain(polarization),
    )


def _motion(path: Path) -> str:
    if path.names:
        return path.names
    count = path.free.count
    return f"{count} {path.kind}" if path.kind else path.motion


def _counted(part: Component, style: Style) -> str:
    return f"{part.count if part.count > 1 else ''}{style.species(part.label)}"


BAND_HEADER = ("cm⁻¹", "unit", "vibration", "infrared", "Raman", "silent")


def band_cells(analysis: Analysis, style: Style) -> list[tuple[str, ...]]:
    """Where internal vibrations of known wavenumber are expected, one row a vibration, the highest first."""
    molecular = analysis.molecular
    if molecular is None:
        return []
    groups: dict[tuple[int, str, str, str, float], list[ExpectedBand]] = {}
    for band in molecular.bands:
        key = (band.row, band.vibration, band.free_species, band.kind, band.wavenumber)
        groups.setdefault(key, []).append(band)
    return [_band_cells(analysis, bands, style) for bands in reversed(groups.values())]


def _band_cells(analysis: Analysis, bands: list[ExpectedBand], style: Style) -> tuple[str, ...]:
    first = bands[0]
    chosen = (
        [band for band in bands if band.infrared],
        [band for band in bands if band.raman],
        [band for band in bands if not (band.infrared or band.raman)],
    )
    species = (" + ".join(_term(band, style) for band in some) for some in chosen)
    name = " ".join(filter(None, (style.plain(first.vibration), style.species(first.free_species))))
    row = molecules(analysis)[first.row]
    unit = " ".join(filter(None, (style.formula(first.unit), style.plain(distinguishing_label(row, analysis)))))
    return (f"{first.wavenumber:g}", unit, name, *species)


def _term(band: ExpectedBand, style: Style) -> str:
    return f"{band.count if band.count > 1 else ''}{style.species(band.species)}"
