"""The bench against wavelengths and constants that the table does not hold, and against another formula for air."""

from __future__ import annotations

import math
import tomllib
from pathlib import Path

import pytest
import scipy.constants as constants

import sitesym
from sitesym.errors import UsageError
from sitesym.experiment.bench import (
    air_at,
    air_index,
    air_wavelength,
    laser_bench,
    ratio,
    read_laser,
    shift_of,
    vacuum_wavelength,
)

TABLE = tomllib.loads((Path(sitesym.__file__).parent / "data" / "bench_lines.toml").read_text(encoding="utf-8"))


def edlen(vacuum: float) -> float:
    """Index of standard air at a vacuum wavelength in nm: Edlén, Metrologia 2, 71 (1966), from memory."""
    square = (1e3 / vacuum) ** 2
    return 1 + 1e-8 * (8342.13 + 2406030 / (130 - square) + 15997 / (38.9 - square))


# NIST Atomic Spectra Database, from memory: air and vacuum wavelengths of well-known lines, nm.
@pytest.mark.parametrize(
    ("name", "air", "vacuum"),
    [
        ("H alpha", 656.279, 656.461),
        ("Na D2", 588.995, 589.158),
        ("H beta", 486.135, 486.271),
        ("HeNe", 632.816, 632.991),
    ],
)
def test_air_and_vacuum_wavelengths_of_known_lines(name: str, air: float, vacuum: float) -> None:
    assert vacuum_wavelength(air) == pytest.approx(vacuum, abs=0.0015), name
    assert air_wavelength(vacuum) == pytest.approx(air, abs=0.0015), name


def test_index_of_air_is_that_of_textbooks() -> None:
    """1.000277 at 589 nm, 15 °C (CRC Handbook of Chemistry and Physics, from memory)."""
    assert air_index(589.158) == pytest.approx(1.000277, abs=1e-6)


@pytest.mark.parametrize("vacuum", [310.0, 400.0, 532.0, 633.0, 785.0, 1064.0, 1600.0])
def test_index_of_air_agrees_with_another_formula(vacuum: float) -> None:
    assert air_index(vacuum) == pytest.approx(edlen(vacuum), abs=5e-8)


@pytest.mark.parametrize("air", [250.0, 299.95, 405.0, 514.5, 785.0, 1064.0, 1690.2, 1800.0])
def test_conversions_undo_each_other(air: float) -> None:
    assert air_wavelength(vacuum_wavelength(air)) == pytest.approx(air, abs=2e-5)


@pytest.mark.parametrize("entry", [one for one in TABLE["laser"] if one["fixed"]], ids=lambda one: one["name"])
def test_nominal_values_stand_for_the_line_itself(entry: dict[str, object]) -> None:
    laser = read_laser(str(entry["nominal"]))
    assert (laser.air, laser.vacuum, laser.fixed) == (entry["air"], entry["vacuum"], True)
    assert laser.vacuum == pytest.approx(laser.air * edlen(laser.vacuum), abs=0.006)  # the ultraviolet ones to 0.01 nm


def test_measured_wavelength_is_taken_as_it_is() -> None:
    assert read_laser("532.16").air == pytest.approx(532.16, abs=1e-6)
    assert read_laser("532.16").name == ""
    assert read_laser("532.31 vacuum").vacuum == 532.31
    assert read_laser("532.31 nm vacuum").fixed is None
    assert read_laser(632.8).vacuum == read_laser("632.991 vacuum").vacuum


# Common practice: a laser of 532 nm needs up to 676 nm for 4000 cm-1, one of 785 nm up to 1144 nm, 632.8 up to 847 nm.
@pytest.mark.parametrize(("line", "end"), [("532.0 air", 675.9), ("785", 1144.4), ("632.8", 847.3), ("514.5", 647.9)])
def test_span_ends_where_practitioners_know(line: str, end: float) -> None:
    last = laser_bench(line).ends[1]
    assert last.shift == 4000
    assert last.stokes == pytest.approx(end, abs=0.5)


@pytest.mark.parametrize("line", ["325", "457.9", "532", "632.8", "785", "1064"])
def test_positions_are_the_stated_shifts_away(line: str) -> None:
    """With the other formula for air, to a hundredth of a wavenumber."""
    bench = laser_bench(line)
    for place in (*bench.ends, *bench.filters):
        for air, sign in ((place.stokes, 1), (place.anti_stokes, -1)):
            vacuum = air * edlen(air)
            assert sign * (1e7 / bench.laser.vacuum - 1e7 / vacuum) == pytest.approx(place.shift, abs=0.02)


def test_ten_wavenumbers_of_green_light_are_three_tenths_of_a_nanometre() -> None:
    """dλ = λ² dν (common practice)."""
    bench = laser_bench("532")
    assert bench.ends[0].stokes - bench.laser.air == pytest.approx(532.1**2 * 1e-7 * 10, rel=0.01)
    assert bench.laser.per_nanometre == pytest.approx(35.3, abs=0.1)


@pytest.mark.parametrize(("line", "temperature"), [("514.5", 300.0), ("632.8", 77.0), ("1064", 600.0)])
def test_anti_stokes_ratio_of_silicon(line: str, temperature: float) -> None:
    """Photons: third power; power: fourth (Long, The Raman Effect, 2002, from memory); constants by scipy."""
    laser = read_laser(line)
    found = ratio(laser, 520.5, temperature)
    energy = constants.h * constants.c * 520.5 * 100
    boltzmann = math.exp(-energy / (constants.k * temperature))
    lifted = (laser.wavenumber + 520.5) / (laser.wavenumber - 520.5)
    assert found.photons == pytest.approx(lifted**3 * boltzmann, rel=1e-6)
    assert found.power / found.photons == pytest.approx(lifted, rel=1e-9)


def test_anti_stokes_ratio_of_silicon_at_room_temperature_is_about_a_tenth() -> None:
    """Green light at 300 K (common practice)."""
    assert ratio(read_laser("514.5"), 520.5, 300).photons == pytest.approx(0.097, abs=0.002)


def test_silicon_and_diamond_are_among_the_standards() -> None:
    standards = {one.source: one.shift for one in laser_bench("532").standards}
    assert standards == {"silicon, undoped": 520.5, "diamond": 1332.5}


@pytest.mark.parametrize("line", ["325", "405", "457.9", "514.5", "532", "632.8", "785", "1064"])
def test_lamp_lines_lie_in_the_span_and_where_the_lamp_has_them(line: str) -> None:
    bench = laser_bench(line)
    listed = {(lamp["name"], air) for lamp in TABLE["lamp"] for air, _ in lamp["lines"]}
    assert {(one.source, one.air) for one in bench.lamps} <= listed
    for one in bench.lamps:
        assert 10 <= one.shift <= 4000
        assert one.shift == pytest.approx(1e7 / bench.laser.vacuum - 1e7 / (one.air * edlen(one.air)), abs=0.02)
    if line in ("514.5", "532", "632.8"):
        assert len(bench.lamps) >= 6
        assert all(one.source == "neon" for one in bench.lamps)


def test_lamp_lines_are_the_strongest_of_their_part_of_the_span() -> None:
    """In each 500 cm-1 no line of neon is stronger than the one that is named."""
    order = ["strong", "medium", "weak"]
    (neon,) = [lamp for lamp in TABLE["lamp"] if lamp["name"] == "neon"]
    bench = laser_bench("532")
    for one in bench.lamps:
        shifts = [(shift_of(bench.laser, air), strength) for air, strength in neon["lines"]]
        near = [strength for shift, strength in shifts if int(shift // 500) == int(one.shift // 500) and shift >= 10]
        assert one.strength == min(near, key=order.index)


def test_neon_line_at_540_nm_with_a_green_laser() -> None:
    """540.056 nm lies 276 to 281 cm-1 from a 532 nm laser, as that is 532.1 or 532.0 (common practice)."""
    assert shift_of(read_laser("532.05"), 540.056) == pytest.approx(279, abs=2)
    assert air_at(read_laser("532.05"), shift_of(read_laser("532.05"), 540.056)) == pytest.approx(540.056, abs=1e-4)


def test_false_lines_are_named_for_gas_lasers_only() -> None:
    assert "plasma of the laser" in {one.source for one in laser_bench("514.5").false_lines}
    green = laser_bench("532").false_lines
    assert {one.source for one in green} == {"N2 in the air", "O2 in the air"}


@pytest.mark.parametrize(
    "line", ["0", "-532", "nan", "inf", "5320", "200", "green", "", "1e999", "532 nm water", "5.3.2"]
)
def test_lines_that_are_none_are_refused(line: str) -> None:
    with pytest.raises(UsageError, match="laser line"):
        laser_bench(line)


@pytest.mark.parametrize("temperature", [0.0, -10.0, math.nan, math.inf])
def test_temperatures_that_are_none_are_refused(temperature: float) -> None:
    with pytest.raises(UsageError, match="temperature"):
        laser_bench("532", temperature)
