"""Explanations for tests of the views: one written down by hand, so that the printed text hangs on no ranking."""

from __future__ import annotations

from functools import lru_cache
from pathlib import Path

import numpy as np

import sitesym
from sitesym.analysis import Analysis
from sitesym.bands.assignment import Placed
from sitesym.bands.coincidence import Coincidences
from sitesym.bands.explanation import BandResult, Explanation
from sitesym.bands.inventory import Family, inventory
from sitesym.bands.lowering import Lowering
from sitesym.bands.measurement import Band
from sitesym.bands.missing import Missing
from sitesym.bands.peaks import pick
from sitesym.bands.reading import Record
from sitesym.bands.reasons import Reason
from sitesym.bands.spectrum import Spectrum
from sitesym.groups.subgroups import subgroups

DEMO = Path(__file__).parent.parent / "structures_demo"
RAMAN, INFRARED = "raman", "infrared"
LINE = "near 2349 cm⁻¹, where air has a line"


@lru_cache(maxsize=1)
def calcite() -> Analysis:
    return sitesym.analyse(sitesym.read(DEMO / "calcite.cif"), scan=False)


def family(name: str) -> Family:
    return next(one for one in inventory(calcite()) if one.name == name)


def result(band: Band, name: str, *reasons: Reason) -> BandResult:
    chosen = family(name) if name else None
    return BandResult(Placed(band, chosen, 1.0, ()), reasons)


BANDS = (
    Band(281.2, RAMAN, 1.0, 40.0),
    Band(711.46, RAMAN, 0.3, 15.0, 3.0, "z(xy)-z", "sharp"),
    Band(1086.0, RAMAN, 1.0, 100.0),
    Band(1749.0, RAMAN, 2.0, 1.0),
    Band(712.0, INFRARED, 2.0),
    Band(2349.0, INFRARED, 4.0),
)


def by_hand(bands: tuple[Band, ...] = BANDS) -> Explanation:
    """Six bands of calcite; wavenumbers as everywhere in the literature, reasons invented for the test."""
    external, bend, stretch, overtone, second, air = bands
    place = Reason("fundamental", 0.5, "allowed as one of 2 external modes", (), ("Eg",), "polarized spectra tell")
    results = (
        result(external, "lattice external modes", place),
        result(bend, "CO3 ν4", Reason("fundamental", 0.7, "allowed as the fundamental CO3 ν4 (E')", (), ("Eg",))),
        result(stretch, "CO3 ν1", Reason("fundamental", 0.9, "allowed as the fundamental CO3 ν1 (A1')", (), ("A1g",))),
        result(
            overtone, "",
            Reason("overtone", 0.6, "allowed as 2ν2 of CO3: 872 + 872 = 1744 cm⁻¹", (872.0, 872.0), ("A1g", "Eg"), "T"),
            Reason("symmetry_lowering", 0.3, "would need the symmetry to be lowered to D3, which allows more"),
            Reason("unexplained", 0.08, "no fundamental accounts for it"),
        ),
        result(second, "CO3 ν4", Reason("fundamental", 0.7, "allowed as the fundamental CO3 ν4 (E')", (), ("Eu",))),
        result(air, "", Reason("atmosphere", 0.4, f"{LINE}: carbon dioxide", (), (), "purge")),
    )  # fmt: skip
    lower = next(one for one in subgroups(calcite().factor_group) if one.group.schoenflies == "D3")
    return Explanation(
        calcite(), inventory(calcite()), results,
        (Missing(family("CO3 ν3"), RAMAN, 1, 0, ("weak",)),),
        (Lowering(lower, (overtone,), (air,), 9, 11),),
        Coincidences(((bend, second),), 0.2, 0.18, False),
    )  # fmt: skip


def spectrum_record() -> Record:
    """A Raman spectrum of four Lorentzians with noise, and what was picked from it."""
    x = np.arange(100.0, 1900.0, 1.0)
    lines = ((281, 40, 9), (711.5, 15, 4), (1086, 100, 4), (1749, 3, 10))
    y = sum(height / (1 + (2 * (x - centre) / width) ** 2) for centre, height, width in lines)
    picks = pick(Spectrum(x, y + np.random.default_rng(1).normal(0, 0.1, len(x)), RAMAN, "calcite.txt"))
    return Record("calcite.txt", picks.bands(), picks, ("spectrum",))
