"""Synthetic band lists with one planted band of known cause, made from published structures.

The spectrum around it is what the literature's structure allows: internal fundamentals near their free wavenumbers,
some of them split, a few lattice modes, some bands removed. Invented throughout; only the rules by which real spectra
differ from ideal ones are used (shifts of some cm⁻¹, site splittings of tens, correlation splittings of a few).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np
from literature import expanded, reference

from sitesym.analysis import Analysis, analyse
from sitesym.bands.companions import rare_isotopes
from sitesym.bands.inventory import Family, inventory
from sitesym.bands.measurement import INFRARED, RAMAN, TECHNIQUES, Band
from sitesym.fate import Component
from sitesym.known_units import composition_of

CRYSTALS = (
    "calcite", "sodium nitrate", "aragonite", "potassium nitrate", "barite", "potassium sulfate", "scheelite",
    "carbon dioxide", "potassium hexachloroplatinate", "urea", "zircon", "ammonium chloride",
    "anhydrite",
)  # fmt: skip
CAUSES = (
    "overtone", "combination", "isotopologue", "instrument", "atmosphere", "second_phase", "symmetry_lowering",
    "leakage", "longitudinal_companion", "site_splitting", "correlation_splitting", "site_activation",
)  # fmt: skip


@dataclass(frozen=True)
class Draw:
    """One synthetic spectrum: the crystal, its bands, and the planted one with its cause."""

    crystal: str
    bands: tuple[Band, ...]
    planted: Band
    cause: str
    suspects: tuple[tuple[str, Analysis], ...] = ()


@cache
def cases() -> dict[str, dict]:
    return {case["name"]: case for case in reference("correlations.toml")["case"]}


@cache
def analysis_of(name: str) -> Analysis:
    case = next(case for key, case in cases().items() if key.startswith(name))
    sites = [{"label": one["label"], "element": one["element"], "xyz": one["position"]} for one in case["sites"]]
    return analyse(expanded(case["hermann_mauguin"], case["lattice"], sites), scan=False)


@cache
def families_of(name: str) -> tuple[Family, ...]:
    return inventory(analysis_of(name))


def known(name: str) -> list[Family]:
    """Internal families of known wavenumber."""
    return [family for family in families_of(name) if family.is_internal and family.wavenumber]


def background(name: str, rng: np.random.Generator) -> dict[tuple[str, str], list[float]]:
    """Wavenumbers of the fundamentals seen, by family name and technique; some are missing, some split."""
    found: dict[tuple[str, str], list[float]] = {}
    for family in known(name):
        centre = family.wavenumber + rng.normal(0, 6)
        for technique in TECHNIQUES:
            if family.capacity(technique) and family.free_allows(technique) and rng.random() > 0.08:
                found[family.name, technique] = [centre + rng.normal(0, 3)]
    return found


def lattice_bands(name: str, rng: np.random.Generator) -> list[Band]:
    external = [family for family in families_of(name) if not family.is_internal]
    bands = []
    for family in external:
        for technique in TECHNIQUES:
            count = min(family.capacity(technique), 4)
            seen = int(rng.integers(0, count + 1)) if count else 0
            bands += [Band(round(value, 1), technique, 1.0, 30.0) for value in sorted(rng.uniform(40, 330, seen))]
    return bands


def draw(seed: int) -> Draw:
    """A spectrum with one planted band; the same for the same seed."""
    rng = np.random.default_rng(seed)
    for _ in range(500):
        name, cause = str(rng.choice(CRYSTALS)), str(rng.choice(CAUSES))
        seen = background(name, rng)
        made = PLANTERS[cause](name, seen, rng)
        if made is None:
            continue
        planted, suspects = made
        bands = [
            Band(round(value, 1), technique, 1.0, 100.0)
            for (_, technique), values in seen.items()
            for value in values
            if technique != planted.technique or abs(value - planted.wavenumber) > 2.5
        ]
        return Draw(name, (*bands, *lattice_bands(name, rng), planted), planted, cause, suspects)
    raise AssertionError("no spectrum could be made")


Seen = dict[tuple[str, str], list[float]]
Made = tuple[Band, tuple[tuple[str, Analysis], ...]] | None


def _is_free(name: str, value: float, technique: str, seen: Seen, reach: float = 1.0) -> bool:
    """Whether a value lies clear of every family that the technique allows, and of lattice modes and of bands seen."""
    if value < 430 or value > 3900:
        return False
    for family in known(name):
        low, high = family.window
        if family.capacity(technique) and low - reach <= value <= high + reach:
            return False
    return all(abs(value - other) > 6 for (_, other_technique), values in seen.items()
               if other_technique == technique for other in values)  # fmt: skip


def _band(value: float, technique: str, intensity: float = 8.0, geometry: str = "") -> Band:
    return Band(round(float(value), 1), technique, 1.0, intensity, geometry=geometry)


def _level(name: str, seen: Seen, rng: np.random.Generator, same: bool) -> Made:
    """A sum of two fundamentals that were seen, allowed by the characters of the level: written out, no code shared."""
    keys = sorted(seen)
    if len(keys) < 2:
        return None
    one = keys[int(rng.integers(len(keys)))]
    two = one if same else keys[int(rng.integers(len(keys)))]
    technique = str(rng.choice(TECHNIQUES))
    if (one[0] == two[0]) != same or not _level_is_allowed(name, one, two, technique):
        return None
    value = (np.mean(seen[one]) + np.mean(seen[two])) * (1 - rng.uniform(0, 0.006))
    return (_band(value, technique), ()) if _is_free(name, value, technique, seen) else None


def _level_is_allowed(name: str, one: tuple[str, str], two: tuple[str, str], technique: str) -> bool:
    group = analysis_of(name).factor_group
    table = {species.label: species.characters for species in group.species}
    squares = np.array([row[g] for g, row in enumerate(group.products)])
    traces = np.trace(group.matrices, axis1=1, axis2=2)
    target = (traces**2 + traces[squares]) / 2 if technique == RAMAN else traces
    for first in _components(name, one):
        for second in _components(name, two):
            level = table[first.label] * table[second.label]
            if one == two and first.label == second.label and first.count == 1:
                level = (level + table[first.label][squares]) / 2
            if (level * target).mean() > 1e-6:
                return True
    return False


def _components(name: str, key: tuple[str, str]) -> tuple[Component, ...]:
    """What a technique showed of a family."""
    family = next(one for one in known(name) if one.name == key[0])
    return tuple(
        part for part in family.components if (part.activity.raman if key[1] == RAMAN else part.activity.infrared)
    )


def _overtone(name: str, seen: Seen, rng: np.random.Generator) -> Made:
    return _level(name, seen, rng, same=True)


def _combination(name: str, seen: Seen, rng: np.random.Generator) -> Made:
    return _level(name, seen, rng, same=False)


def _isotopologue(name: str, seen: Seen, rng: np.random.Generator) -> Made:
    """The satellite of a strong band: the intensity is the abundance, the shift most of what the atom could give."""
    key = list(seen)[int(rng.integers(len(seen)))]
    family = next(one for one in known(name) if one.name == key[0])
    counts = dict(composition_of(family.unit))
    options = [one for one in rare_isotopes() if counts.get(one.element, 0) * one.abundance > 0.008]
    if not options:
        return None
    isotope = options[int(rng.integers(len(options)))]
    value = seen[key][0] * (1 - rng.uniform(0.35, 0.95) * (1 - (isotope.main_mass / isotope.mass) ** 0.5))
    share = counts[isotope.element] * isotope.abundance
    if abs(value - seen[key][0]) < 4:
        return None
    return _band(value, key[1], 100 * share * rng.uniform(0.7, 1.4)), ()


def _fixed(name: str, seen: Seen, value: float, technique: str) -> Made:
    return (_band(value, technique), ()) if _is_free(name, value, technique, seen) else None


def _instrument(name: str, seen: Seen, rng: np.random.Generator) -> Made:
    """Silicon and diamond as substrate and anvil (common practice)."""
    return _fixed(name, seen, float(rng.choice([520.5, 1332.5])) + rng.normal(0, 0.5), RAMAN)


def _atmosphere(name: str, seen: Seen, rng: np.random.Generator) -> Made:
    """Nitrogen and oxygen of the air in Raman, carbon dioxide in infrared (common practice)."""
    value, technique = ((2330.0, RAMAN), (1556.0, RAMAN), (2349.0, INFRARED))[int(rng.integers(3))]
    return _fixed(name, seen, value + rng.normal(0, 0.7), technique)


def _second_phase(name: str, seen: Seen, rng: np.random.Generator) -> Made:
    other = str(rng.choice([one for one in CRYSTALS if one != name]))
    technique = str(rng.choice(TECHNIQUES))
    options = [one for one in known(other) if one.capacity(technique) and one.free_allows(technique)]
    if not options:
        return None
    value = options[int(rng.integers(len(options)))].wavenumber + rng.normal(0, 6)
    if not _is_free(name, value, technique, seen):
        return None
    return _band(value, technique, 20.0), ((other, analysis_of(other)),)


def _symmetry_lowering(name: str, seen: Seen, rng: np.random.Generator) -> Made:
    """A fundamental that the technique must not show shows at its own place."""
    technique = str(rng.choice(TECHNIQUES))
    options = [one for one in known(name) if not one.capacity(technique)]
    if not options:
        return None
    family = options[int(rng.integers(len(options)))]
    value = family.wavenumber + rng.normal(0, 6)
    return (_band(value, technique), ()) if _is_free(name, value, technique, seen) else None


def _leakage(name: str, seen: Seen, rng: np.random.Generator) -> Made:
    """The strong totally symmetric stretch in crossed polarizations, where its species is forbidden."""
    geometry = "z(xy)-z"
    key = next((key for key in seen if key[0].endswith("ν1") and key[1] == RAMAN), None)
    group = analysis_of(name).factor_group.schoenflies
    if key is None or group not in ("D3d", "D4h", "D2d", "Oh", "Th", "D2h"):
        return None
    family = next(one for one in known(name) if one.name == key[0])
    first = analysis_of(name).factor_group.species[0].label
    if [one.label for one in family.active(RAMAN)] != [first]:
        return None
    value = seen.pop(key)[0]
    return _band(value, RAMAN, 3.0, geometry), ()


def _longitudinal(name: str, seen: Seen, rng: np.random.Generator) -> Made:
    """Above a strong polar mode, outside the reach of its own components."""
    analysis = analysis_of(name)
    options = []
    for key in seen:
        family = next(one for one in known(name) if one.name == key[0])
        polar = any(one.activity.infrared for one in family.active(key[1]))
        if polar and family.free_infrared and (key[1] == INFRARED or not analysis.factor_group.has_inversion):
            options.append(key)
    if not options:
        return None
    key = options[int(rng.integers(len(options)))]
    value = seen[key][0] * (1 + rng.uniform(0.02, 0.12))
    return (_band(value, key[1], 60.0), ()) if _is_free(name, value, key[1], seen) else None


def _splitting(name: str, seen: Seen, rng: np.random.Generator, by_site: bool) -> Made:
    options = []
    for key in seen:
        family = next(one for one in known(name) if one.name == key[0])
        site, crystal = family.site_bands(key[1]), family.capacity(key[1])
        if (site > 1) if by_site else (site == 1 and crystal > 1):
            options.append(key)
    if not options:
        return None
    key = options[int(rng.integers(len(options)))]
    gap = rng.uniform(8, 45) if by_site else rng.uniform(5, 15)
    first = seen[key][0]
    family = next(one for one in known(name) if one.name == key[0])
    value = first + gap * rng.choice([-1, 1])
    nearer = abs(value - family.wavenumber) < abs(first - family.wavenumber)
    if nearer or not family.window[0] < value < family.window[1]:
        return None
    return _band(value, key[1], 70.0), ()


def _site_splitting(name: str, seen: Seen, rng: np.random.Generator) -> Made:
    return _splitting(name, seen, rng, by_site=True)


def _correlation_splitting(name: str, seen: Seen, rng: np.random.Generator) -> Made:
    return _splitting(name, seen, rng, by_site=False)


def _site_activation(name: str, seen: Seen, rng: np.random.Generator) -> Made:
    """A vibration that the free unit forbids and its site allows."""
    technique = str(rng.choice(TECHNIQUES))
    options = [one for one in known(name) if one.capacity(technique) and not one.free_allows(technique)]
    if not options:
        return None
    family = options[int(rng.integers(len(options)))]
    value = family.wavenumber + rng.normal(0, 6)
    taken = any(abs(value - other) < 8 for key, values in seen.items() if key[1] == technique for other in values)
    return None if taken else (_band(value, technique, 6.0), ())


PLANTERS = {
    "overtone": _overtone, "combination": _combination, "isotopologue": _isotopologue, "instrument": _instrument,
    "atmosphere": _atmosphere, "second_phase": _second_phase, "symmetry_lowering": _symmetry_lowering,
    "leakage": _leakage, "longitudinal_companion": _longitudinal, "site_splitting": _site_splitting,
    "correlation_splitting": _correlation_splitting, "site_activation": _site_activation,
}  # fmt: skip
