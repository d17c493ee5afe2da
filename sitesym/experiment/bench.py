"""The bench: laser lines to absolute wavelengths, the span of the spectrometer, filter edges, lines to check the scale.

A Raman shift is a difference of wavenumbers in vacuum, lamps and spectrometers are read in air: the index of air stands
between them. Tables and formulas with their sources are in `sitesym/data/bench_lines.toml`.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterable
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from sitesym.errors import UsageError

LOWEST, HIGHEST = 10.0, 4000.0
"""The shifts in cm⁻¹ that a spectrometer should cover."""

SECOND_RADIATION = 1.438776877
"""hc/k in cm K: exact constants of the SI of 2019."""

ROOM = 295.0
FILTER_SHIFTS = (10.0, 50.0, 100.0)
RATIO_SHIFTS = (100.0, 200.0, 500.0, 1000.0)
_SHORTEST, _LONGEST = 220.0, 1100.0
_NOMINAL = 0.06
_BINS = 8
_CLASSES = {"strong": 0, "medium": 1, "weak": 2}
_AIR = re.compile(r"\s*([-+]?[\d.]+(?:[eE][-+]?\d+)?)\s*(?:nm)?\s*(air|vacuum)?\s*")


@dataclass(frozen=True, slots=True)
class Laser:
    """One laser line.

    name        as the table calls it, or "" for one that it does not list.
    air, vacuum wavelengths in nm; wavenumber in vacuum, cm⁻¹.
    fixed       True where an atomic transition holds the line, False for diodes and most solid-state lasers, None for
                lines that the table does not list.
    """

    name: str
    air: float
    vacuum: float
    fixed: bool | None

    @property
    def wavenumber(self) -> float:
        """Absolute wavenumber in vacuum, cm⁻¹."""
        return 1e7 / self.vacuum

    @property
    def per_nanometre(self) -> float:
        """By how many cm⁻¹ all shifts are wrong if the line is taken 1 nm wrong."""
        return self.wavenumber**2 / 1e7


@dataclass(frozen=True, slots=True)
class Position:
    """Where a shift (cm⁻¹, positive) is found: wavelengths in air, nm, on both sides of the laser."""

    shift: float
    stokes: float
    anti_stokes: float


@dataclass(frozen=True, slots=True)
class CheckLine:
    """A line of known place.

    shift     cm⁻¹ from the laser, Stokes positive; air its wavelength in nm.
    strength  of lamp lines: "strong", "medium" or "weak"; else "".
    note      what to mind, or "".
    """

    source: str
    shift: float
    air: float
    strength: str
    note: str


@dataclass(frozen=True, slots=True)
class Ratio:
    """Anti-Stokes over Stokes intensity at one shift in cm⁻¹: of photons counted, and of power."""

    shift: float
    photons: float
    power: float


@dataclass(frozen=True, slots=True)
class LaserBench:
    """All that one laser asks of the bench.

    ends         where 10 and 4000 cm⁻¹ lie: the span to cover is from the anti-Stokes to the Stokes one of the last.
    filters      where a notch or edge that passes from these shifts on begins to pass.
    standards    samples for checking the scale; lamps: lamp lines within the Stokes span.
    false_lines  sharp lines that are no Raman lines of the sample: plasma lines of the laser, air.
    temperature  K, of the ratios.
    """

    laser: Laser
    ends: tuple[Position, Position]
    filters: tuple[Position, ...]
    standards: tuple[CheckLine, ...]
    lamps: tuple[CheckLine, ...]
    false_lines: tuple[CheckLine, ...]
    temperature: float
    ratios: tuple[Ratio, ...]


def laser_bench(line: str | float, temperature: float = ROOM) -> LaserBench:
    """The bench for one laser line.

    line         wavelength in nm in air, such as 532 or "514.5"; "514.674 vacuum" for one in vacuum. A nominal value
                 that the table lists stands for the line itself.
    temperature  K, of the sample.

    Raises UsageError for a wavelength outside 220 to 1100 nm and for a temperature that is not above zero.
    """
    check_temperature(temperature)
    laser = read_laser(line)
    return LaserBench(
        laser,
        (_position(laser, LOWEST), _position(laser, HIGHEST)),
        tuple(_position(laser, shift) for shift in FILTER_SHIFTS),
        _standards(laser),
        _lamp_lines(laser),
        _false_lines(laser),
        temperature,
        tuple(ratio(laser, shift, temperature) for shift in RATIO_SHIFTS),
    )


def check_temperature(temperature: float) -> None:
    """Raise UsageError for a temperature in K that is none."""
    if not 0 < temperature < 1e5:
        raise UsageError(f"A temperature of {temperature:g} K makes no sense.", "Give the temperature in kelvin.")


def read_laser(line: str | float) -> Laser:
    """A laser line from its wavelength in nm, with the table's exact value where it lists the nominal one."""
    found = _AIR.fullmatch(str(line))
    value = float(found[1]) if found and _is_number(found[1]) else math.nan
    if not _SHORTEST <= value <= _LONGEST:
        raise UsageError(
            f"'{line}' is no laser line that can be planned for.",
            f"Give its wavelength in nm, {_SHORTEST:g} to {_LONGEST:g}, such as 532 or '514.674 vacuum'.",
        )
    in_vacuum = found is not None and found[2] == "vacuum"
    for entry in _table()["laser"]:
        places = [entry["vacuum"]] if in_vacuum else [entry["nominal"], entry["air"]]
        if any(abs(value - place) < 5e-4 for place in places) or _is_nominal(value, entry, in_vacuum):
            return Laser(entry["name"], entry["air"], entry["vacuum"], entry["fixed"])
    vacuum = value if in_vacuum else vacuum_wavelength(value)
    return Laser("", air_wavelength(vacuum), vacuum, None)


def _is_nominal(value: float, entry: dict[str, Any], in_vacuum: bool) -> bool:
    """Whether a value with at most one decimal is what people call this laser."""
    return not in_vacuum and round(value, 1) == value and abs(value - entry["nominal"]) < _NOMINAL


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True


# Air ------------------------------------------------------------------------------------------------------------------


def air_index(vacuum: float) -> float:
    """Refractive index of standard air at a vacuum wavelength in nm.

    Ciddor (1996) from 300 to 1690 nm, Edlén (1966) beyond: see `air_index` in the table.
    """
    formulas = _table()["air_index"]
    low, high = formulas["ciddor"]["range_nm"]
    formula = formulas["ciddor" if low <= vacuum <= high else "edlen"]
    square = (1e3 / vacuum) ** 2
    poles = sum(formula[name] / (formula[f"{name}_pole"] - square) for name in ("first", "second"))
    return float(1 + 1e-8 * (formula["constant"] + poles))


def air_wavelength(vacuum: float) -> float:
    """Wavelength in standard air of one in vacuum, both in nm."""
    return vacuum / air_index(vacuum)


def vacuum_wavelength(air: float) -> float:
    """Wavelength in vacuum of one in standard air, both in nm."""
    vacuum = air
    for _ in range(4):
        vacuum = air * air_index(vacuum)
    return vacuum


# Places and ratios ----------------------------------------------------------------------------------------------------


def _position(laser: Laser, shift: float) -> Position:
    return Position(shift, air_at(laser, shift), air_at(laser, -shift))


def air_at(laser: Laser, shift: float) -> float:
    """Wavelength in air, nm, of light shifted by so many cm⁻¹, Stokes positive."""
    return air_wavelength(1e7 / (laser.wavenumber - shift))


def shift_of(laser: Laser, air: float) -> float:
    """Shift in cm⁻¹, Stokes positive, of light of a wavelength in air, nm."""
    return laser.wavenumber - 1e7 / vacuum_wavelength(air)


def ratio(laser: Laser, shift: float, temperature: float) -> Ratio:
    """Anti-Stokes over Stokes intensity of first-order scattering in thermal equilibrium, away from resonance.

    Photons counted: ((ν0 + ν)/(ν0 − ν))³ exp(−hcν/kT); power has the fourth power in the place of the third (Long, The
    Raman Effect, 2002, chapter 5). The response of the spectrometer comes besides.
    """
    lifted = (laser.wavenumber + shift) / (laser.wavenumber - shift)
    boltzmann = math.exp(-SECOND_RADIATION * shift / temperature)
    return Ratio(shift, lifted**3 * boltzmann, lifted**4 * boltzmann)


# Lines ----------------------------------------------------------------------------------------------------------------


def _standards(laser: Laser) -> tuple[CheckLine, ...]:
    wanted = {"silicon, undoped", "diamond"}
    return tuple(
        CheckLine(entry["name"], shift, air_at(laser, shift), "", entry["note"])
        for entry in _table()["shift_standard"]
        if entry["name"] in wanted
        for shift in entry["shifts"]
    )


def _lamp_lines(laser: Laser) -> tuple[CheckLine, ...]:
    """Neon lines, and those of mercury and argon where neon has too few: the best of each eighth of the span."""
    lines = _lines_of_lamp(laser, "neon")
    if len(_spread(lines)) < _BINS // 2:
        lines += _lines_of_lamp(laser, "mercury") + _lines_of_lamp(laser, "argon")
    return _spread(lines)


def _lines_of_lamp(laser: Laser, name: str) -> list[CheckLine]:
    (lamp,) = (one for one in _table()["lamp"] if one["name"] == name)
    lines = (CheckLine(name, shift_of(laser, air), air, strength, "") for air, strength in lamp["lines"])
    return [line for line in lines if LOWEST <= line.shift <= HIGHEST]


def _spread(lines: Iterable[CheckLine]) -> tuple[CheckLine, ...]:
    """In each eighth of the span the strongest line, of several the one nearest to its middle."""
    width = HIGHEST / _BINS
    best: dict[int, CheckLine] = {}
    for line in lines:
        place = min(int(line.shift / width), _BINS - 1)
        best[place] = min(line, best.get(place, line), key=lambda one: _rank(one, (place + 0.5) * width))
    return tuple(best[place] for place in sorted(best))


def _rank(line: CheckLine, middle: float) -> tuple[int, float]:
    return _CLASSES[line.strength], abs(line.shift - middle)


def _false_lines(laser: Laser) -> tuple[CheckLine, ...]:
    """Plasma lines of a gas laser and the vibrations of nitrogen and oxygen in the beam's path."""
    table = _table()
    gas = next((one["plasma"] for one in table["laser"] if one["name"] == laser.name), "")
    plasma = [air for entry in table["plasma"] if entry["name"] == gas for air in entry["lines"]]
    found = [CheckLine("plasma of the laser", shift_of(laser, air), air, "", "") for air in plasma]
    found += [
        CheckLine(f"{entry['gas']} in the air", entry["shift"], air_at(laser, entry["shift"]), "", entry["what"])
        for entry in table["raman_atmosphere"]
        if "shift" in entry
    ]
    return tuple(sorted((one for one in found if LOWEST <= one.shift <= HIGHEST), key=lambda one: one.shift))


@lru_cache(maxsize=1)
def _table() -> dict[str, Any]:
    import tomllib
    from importlib.resources import files

    return tomllib.loads(files("sitesym.data").joinpath("bench_lines.toml").read_text(encoding="utf-8"))
