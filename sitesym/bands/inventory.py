"""What symmetry predicts, as families of components: the places that measured bands can take.

A family is one free vibration of one kind of unit with all its components in the crystal, or the external modes, or the
modes of a net. Wavenumbers are those of the free unit (or the user's); symmetry fixes none.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from sitesym.analysis import Analysis
from sitesym.bands.measurement import RAMAN
from sitesym.fate import Component, Fate, counts
from sitesym.molecular import MoleculeRow
from sitesym.vibrations import KINDS

_KIND_WINDOWS = dict(zip(KINDS, ((400, 3800), (150, 1750), (150, 1100), (20, 900), (20, 1700)), strict=True))
"""cm⁻¹. Where a vibration of each kind may lie when nothing is known of it: common practice, wide."""

_EXTERNAL, _EXTERNAL_LIGHT, _FRAMEWORK = (15.0, 420.0), (15.0, 950.0), (15.0, 1350.0)
"""cm⁻¹. External modes; those of units that are mostly hydrogen (water, ammonium); modes of nets: common practice."""


@dataclass(frozen=True, slots=True)
class Family:
    """Bands of common parentage.

    unit, vibration   names, such as "CO3" and "ν3"; "lattice" and "external modes" or "net".
    free_species      of the free molecule, "" for external modes and nets.
    wavenumber        cm⁻¹ of the free unit, None if not known; window where bands of the family may lie.
    components        species of the factor group with counts and activities.
    free_infrared, free_raman   activity in the free molecule (external modes and nets: True).
    site_infrared, site_raman   bands that the site alone would give.
    """

    unit: str
    vibration: str
    free_species: str
    wavenumber: float | None
    window: tuple[float, float]
    components: tuple[Component, ...]
    free_infrared: bool
    free_raman: bool
    site_infrared: int
    site_raman: int

    @property
    def is_internal(self) -> bool:
        """A vibration of a unit, not an external mode or one of a net."""
        return bool(self.free_species)

    def capacity(self, technique: str) -> int:
        """How many bands the crystal allows in a technique."""
        found = counts(self.components)
        return found.raman if technique == RAMAN else found.infrared

    def free_allows(self, technique: str) -> bool:
        """Whether the free molecule shows the vibration in a technique."""
        return self.free_raman if technique == RAMAN else self.free_infrared

    def site_bands(self, technique: str) -> int:
        """How many bands the site alone would give in a technique."""
        return self.site_raman if technique == RAMAN else self.site_infrared

    def active(self, technique: str) -> tuple[Component, ...]:
        """The components that a technique shows."""
        return tuple(
            one for one in self.components if (one.activity.raman if technique == RAMAN else one.activity.infrared)
        )

    @property
    def name(self) -> str:
        """`CO3 ν3`, `lattice external modes`."""
        return f"{self.unit} {self.vibration}"


def inventory(analysis: Analysis) -> tuple[Family, ...]:
    """All families of a crystal, internal vibrations first.

    Where the molecular analysis is missing every mode belongs to one net.
    """
    if analysis.molecular is None:
        return tuple(_by_origin(analysis, "net", "modes", "framework", _FRAMEWORK))
    families = [family for row in analysis.molecular.molecules for family in _internal(row)]
    light = any(_is_light(row) for row in analysis.molecular.molecules)
    families += _by_origin(analysis, "lattice", "external modes", "external", _EXTERNAL_LIGHT if light else _EXTERNAL)
    families += _by_origin(analysis, "net", "modes", "framework", _FRAMEWORK)
    return tuple(families)


def _internal(row: MoleculeRow) -> Iterable[Family]:
    for vibration, names, fate in zip(row.correlation.vibrations, row.names, row.fates, strict=True):
        for k in range(vibration.count):
            known = names[k] if k < len(names) else None
            label = known.name if known and known.name else f"{vibration.kind} {vibration.species}"
            yield _family(row.name, label, vibration.kind, fate, known.wavenumber if known else None)


def _family(unit: str, label: str, kind: str, fate: Fate, wavenumber: float | None) -> Family:
    window = _KIND_WINDOWS[kind] if wavenumber is None else _around(wavenumber)
    site = fate.at_site
    free = fate.free.activity
    return Family(
        unit, label, free.label, wavenumber, (float(window[0]), float(window[1])), fate.crystal,
        free.infrared, free.raman, site.infrared, site.raman,
    )  # fmt: skip


def _around(wavenumber: float) -> tuple[float, float]:
    """The crystal shifts a free vibration by up to some tens of cm⁻¹, hydrogen bonds a stretch by hundreds."""
    if wavenumber > 2500:
        return wavenumber - 900, wavenumber + 150
    reach = max(45.0, 0.08 * wavenumber)
    return wavenumber - reach, wavenumber + reach


def _is_light(row: MoleculeRow) -> bool:
    hydrogen = sum(element in ("H", "D", "T") for element in row.free.elements)
    return 2 * hydrogen > len(row.free.elements)


def _by_origin(analysis: Analysis, unit: str, vibration: str, origin: str, window: tuple[float, float]) -> list[Family]:
    parts = tuple(
        Component(number, row.activity) for row in analysis.species if (number := _number(analysis, row.label, origin))
    )
    found = counts(parts)
    if not parts:
        return []
    return [Family(unit, vibration, "", None, window, parts, True, True, found.infrared, found.raman)]


def _number(analysis: Analysis, label: str, origin: str) -> int:
    if analysis.molecular is None:
        return analysis.species_row(label).optic
    counted = analysis.molecular.origins[label]
    return counted.framework if origin == "framework" else counted.translational + counted.librational
