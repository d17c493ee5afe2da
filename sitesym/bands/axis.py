"""Axes of measurements turned into cm⁻¹: wavelengths, energies, absolute wavenumbers of scattered light.

A Raman shift is a difference of wavenumbers in vacuum, while grating instruments tell wavelengths in air: both the
laser line and the axis are taken as wavelengths in standard air and corrected with its refractive index (table
`air_index` of sitesym/data/bench_lines.toml: Ciddor 1996, Edlén 1966). Infrared wavelengths are turned as they are.
"""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from importlib.resources import files
from typing import Any

import numpy as np

from sitesym.bands.measurement import INFRARED, RAMAN
from sitesym.errors import ReadError, UsageError
from sitesym.groups.operation import Floats

UNITS = ("cm-1", "nm", "um", "meV", "THz")

PER_UNIT = {"meV": 8.065543937, "THz": 33.35640952}
"""cm⁻¹ in one unit: e/hc and 1/c, exact constants of the SI of 2019."""

_ABSOLUTE = 5000.0
"""cm⁻¹. No Raman shift of a fundamental, an overtone of OH aside, lies above; scattered visible light does."""

_SMALLEST_TOP = 60.0
"""An axis in cm⁻¹ that ends below this is in another unit, or holds no fundamental of a crystal."""

_HIGHEST = 16000.0
_LASERS = (200.0, 1700.0)


@dataclass(frozen=True, slots=True)
class Axis:
    """How the numbers of one file become wavenumbers.

    unit       one of UNITS; technique "raman" or "infrared".
    laser      the wavelength in air of the laser line in nm, or None.
    source     the file, for messages.
    absolute   Raman: the axis tells wavenumbers of the scattered light, not shifts.
    """

    unit: str
    technique: str
    laser: float | None
    source: str
    absolute: bool = False

    @property
    def words(self) -> str:
        """How the axis was turned into cm⁻¹; "" where it was not."""
        if self.unit == "cm-1" and not self.absolute:
            return ""
        kind = "absolute wavenumbers" if self.absolute else f"axis in {self.unit}"
        with_laser = f" with a laser line of {self.laser:g} nm in air" if self.needs_laser else ""
        return f"{kind} turned into cm⁻¹{with_laser}"

    @property
    def needs_laser(self) -> bool:
        """Whether wavenumbers follow only with the laser line."""
        return self.technique == RAMAN and (self.absolute or self.unit in ("nm", "um"))

    def wavenumbers(self, values: Floats) -> Floats:
        """Wavenumbers in cm⁻¹ of values of the axis (n,), Raman: shifts, Stokes positive."""
        if self.unit in PER_UNIT:
            return values * PER_UNIT[self.unit]
        if self.unit == "cm-1":
            return self._laser_wavenumber() - values if self.absolute else values
        lengths = values * (1e3 if self.unit == "um" else 1.0)
        if self.technique == INFRARED:
            return np.asarray(1e7 / lengths)
        return self._laser_wavenumber() - vacuum_wavenumbers(lengths)

    def slope(self, values: Floats) -> Floats:
        """cm⁻¹ in one unit of the axis at these values (n,), positive."""
        if self.unit in PER_UNIT:
            return np.full(len(values), PER_UNIT[self.unit])
        if self.unit == "cm-1":
            return np.ones(len(values))
        factor = 1e3 if self.unit == "um" else 1.0
        return np.asarray(1e7 * factor / (values * factor) ** 2)

    def _laser_wavenumber(self) -> float:
        assert self.laser is not None
        return float(vacuum_wavenumbers(np.array([self.laser]))[0])


def axis_of(values: Floats, unit: str, technique: str, laser: float | None, source: str) -> Axis:
    """The axis of values (n,) whose unit is stated ("" means cm⁻¹), checked to make sense.

    Raises UsageError where a laser line is needed and not given or is none, ReadError where the values cannot be in the
    unit.
    """
    if laser is not None and not _LASERS[0] <= laser <= _LASERS[1]:
        raise UsageError(f"{laser:g} nm is no laser line.", f"Give it in nm, {_LASERS[0]:g} to {_LASERS[1]:g}.")
    unit = unit or "cm-1"
    absolute = technique == RAMAN and unit == "cm-1" and float(np.median(values)) > _ABSOLUTE
    axis = Axis(unit, technique, laser, source, absolute)
    if axis.needs_laser and laser is None:
        what = "absolute wavenumbers" if absolute else "wavelengths"
        raise UsageError(f"{source} gives {what} of scattered light.", "Give the laser line in nm: --laser 532.")
    if unit in ("nm", "um") and not (values > 0).all():
        raise ReadError(f"{source} holds a wavelength that is not positive.", "Check the first column and its unit.")
    _check(axis.wavenumbers(values), axis)
    return axis


def _check(wavenumbers: Floats, axis: Axis) -> None:
    top = float(wavenumbers.max(initial=0.0))
    if top < _SMALLEST_TOP:
        raise ReadError(
            f"{axis.source} ends at {top:g} cm⁻¹, where no crystal has fundamentals: its axis may be in another unit.",
            f"Say which: {', '.join(UNITS)} in the header or with --axis-unit" + _laser_hint(axis),
        )
    if top > _HIGHEST:
        raise ReadError(
            f"{axis.source} reaches {top:.6g} cm⁻¹, far above all fundamentals: its axis may be in another unit.",
            f"Say which: {', '.join(UNITS)} in the header or with --axis-unit" + _laser_hint(axis),
        )


def _laser_hint(axis: Axis) -> str:
    return "; check the laser line." if axis.needs_laser else "."


@lru_cache(maxsize=1)
def _formulas() -> Mapping[str, Mapping[str, Any]]:
    text = files("sitesym").joinpath("data", "bench_lines.toml").read_text(encoding="utf-8")
    found: Mapping[str, Mapping[str, Any]] = tomllib.loads(text)["air_index"]
    return found


def vacuum_wavenumbers(air: Floats) -> Floats:
    """Wavenumbers in vacuum, cm⁻¹, of wavelengths in standard air, nm (n,)."""
    vacuum = np.array(air, dtype=float)
    for _ in range(4):
        vacuum = air * _index(vacuum)
    return np.asarray(1e7 / vacuum)


def _index(vacuum: Floats) -> Floats:
    """Refractive index of standard air: Ciddor (1996) from 300 to 1690 nm, Edlén (1966) beyond."""
    low, high = _formulas()["ciddor"]["range_nm"]
    inside = (vacuum >= low) & (vacuum <= high)
    return np.where(inside, _formula("ciddor", vacuum), _formula("edlen", vacuum))


def _formula(name: str, vacuum: Floats) -> Floats:
    one = _formulas()[name]
    square = (1e3 / vacuum) ** 2
    terms = one["first"] / (one["first_pole"] - square) + one["second"] / (one["second_pole"] - square)
    return np.asarray(1 + 1e-8 * (one["constant"] + terms))
