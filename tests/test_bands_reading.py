"""Lists of bands and spectra from files: columns, units, wavelengths, JCAMP-DX with its traps, bad input."""

from __future__ import annotations

import os
import time
from pathlib import Path

import numpy as np
import pytest
import scipy.constants

from sitesym.bands.axis import PER_UNIT, vacuum_wavenumbers
from sitesym.bands.measurement import DEFAULT_UNCERTAINTY, Band
from sitesym.bands.pins import read_pins
from sitesym.bands.reading import Manner, read_bands, read_record, read_records
from sitesym.errors import ReadError, SitesymError, UsageError


def written(folder: Path, content: str | bytes, name: str = "bands.txt") -> str:
    target = folder / name
    target.write_bytes(content if isinstance(content, bytes) else content.encode())
    return str(target)


def listed(folder: Path, content: str, technique: str = "raman", **manner: object) -> list[tuple[float, float | None]]:
    return [(one.wavenumber, one.intensity) for one in read_bands(written(folder, content), technique, **manner)]  # type: ignore[arg-type]


def refused(folder: Path, content: str | bytes, *words: str, technique: str = "raman", **manner: object) -> None:
    """A plain error that holds the words: one line on the problem, one on the mend."""
    with pytest.raises(SitesymError) as caught:
        read_record(written(folder, content), technique, Manner(**manner))  # type: ignore[arg-type]
    for word in words:
        assert word in str(caught.value)
    assert caught.value.mend
    assert "\n" not in caught.value.problem + caught.value.mend


# Lists: the two strongest Raman bands of calcite, 1086 and 711 (common practice), written in many ways

TWO = [(1086.5, 100.0), (711.3, 20.0)]


@pytest.mark.parametrize(
    "content",
    [
        "1086.5 100\n711.3 20\n",
        "1086,5 100\n711,3 20\n",
        "1086.5\t100\n711.3\t20\n",
        "1086,5;100\n711,3;20\n",
        "1086.5,100\n711.3,20\n",
        "1086.5, 100\n711.3, 20\n",
        "# my calcite\n1086.5 100   # carbonate\n\n711.3 20\n",
        "Calcite, Iceland\nthree minutes at 532\n1086.5 100\n711.3 20\n",
        "wavenumber,intensity\n1086.5,100\n711.3,20\n",
        "# wavenumber intensity\n1086.5 100\n711.3 20\n",
        "Intensity;Raman shift [1/cm]\n100;1086,5\n20;711,3\n",
        "Raman shift / cm⁻¹\tInt.\n1086.5\t100\n711.3\t20\n",
        "Wavenumber (cm^-1)  Rel. Intensity\n1086.5  100\n711.3  20\n",
        "peak position;height\ncm-1;a.u.\n1086,5;100\n711,3;20\n",
        '"wavenumber","intensity"\n"1086,5","100"\n"711,3","20"\n',
        "\ufeffwavenumber;intensity\r\n1086,5;100\r\n711,3;20\r\n",
        "ν̃;I\n1086.5;100\n711.3;20\n",
    ],
)
def test_columns_are_found_however_they_are_written(content: str, tmp_path: Path) -> None:
    assert listed(tmp_path, content) == TWO


def test_columns_without_header_are_wavenumber_intensity_width_uncertainty(tmp_path: Path) -> None:
    bands = read_bands(
        written(tmp_path, "1086.5 100 4.2 0.3 z(xx)-z A1g stretch\n711.3\n281;;9\n".replace("\n281;;9", "")), "raman"
    )
    assert bands == (
        Band(1086.5, "raman", 0.3, 100.0, 4.2, "z(xx)-z", "A1g stretch"),
        Band(711.3, "raman", DEFAULT_UNCERTAINTY),
    )


def test_empty_places_keep_their_column(tmp_path: Path) -> None:
    first, second = read_bands(written(tmp_path, "1086,5;100;;0,5\n711,3;;8\n"), "raman")
    assert (first.intensity, first.width, first.uncertainty) == (100.0, None, 0.5)
    assert (second.intensity, second.width, second.uncertainty) == (None, 8.0, DEFAULT_UNCERTAINTY)


def test_every_column_is_known_by_name(tmp_path: Path) -> None:
    content = (
        "Note;FWHM (cm-1);Std. dev.;Raman shift;Scattering geometry;Intensity\n"
        "A1g;4,5;0,2;1086,5;z(xx)z̄;vs\n;;;711,3;E parallel c;w br\n"
    )
    assert read_bands(written(tmp_path, content), "raman") == (
        Band(1086.5, "raman", 0.2, 100.0, 4.5, "z(xx)-z", "vs; A1g"),
        Band(711.3, "raman", DEFAULT_UNCERTAINTY, 12.0, None, "", "w br; polarization E parallel c"),
    )


def test_half_width_at_half_maximum_is_doubled(tmp_path: Path) -> None:
    assert read_bands(written(tmp_path, "wavenumber,HWHM\n1086,2.5\n"), "raman")[0].width == 5.0


@pytest.mark.parametrize(
    ("cell", "uncertainty"), [("1086.5(3)", 0.3), ("1086(2)", 2.0), ("1086.5±0.4", 0.4), ("1086.5 ± 0,4", 0.4)]
)
def test_uncertainty_may_stand_with_the_number(cell: str, uncertainty: float, tmp_path: Path) -> None:
    """International Union of Crystallography: digits in brackets are the standard uncertainty of the last ones."""
    assert read_bands(written(tmp_path, f"wavenumber;note\n{cell};x\n"), "raman")[0].uncertainty == pytest.approx(
        uncertainty
    )


def test_letters_for_intensities_keep_their_order(tmp_path: Path) -> None:
    """vs > s > m > w > vw is what every table of bands means (common practice)."""
    bands = read_bands(written(tmp_path, "1 vs\n100 s\n200 m\n300 w\n400 vw\n".replace("1 vs", "10 vs")), "raman")
    values = [band.intensity or 0.0 for band in bands]
    assert values == sorted(values, reverse=True)
    assert len(set(values)) == 5
    assert [band.note for band in bands] == ["vs", "s", "m", "w", "vw"]


def test_column_of_techniques_serves_both(tmp_path: Path) -> None:
    both = written(tmp_path, "technique,wavenumber\nRaman,1086\nIR,876\nFT-IR,712\n")
    assert [(one.technique, one.wavenumber) for one in read_bands(both)] == [
        ("raman", 1086.0), ("infrared", 876.0), ("infrared", 712.0),
    ]  # fmt: skip
    with pytest.raises(ReadError, match="--bands"):
        read_bands(both, "raman")


def test_technique_must_be_told(tmp_path: Path) -> None:
    refused(tmp_path, "1086\n", "line 1", "--raman", technique="")


def test_columns_that_are_not_used_are_named(tmp_path: Path) -> None:
    assert "Sample no" in read_record(written(tmp_path, "Sample no,wavenumber\n1,1086\n"), "raman").notes[0]


def test_markup_and_formulas_in_notes_stay_text(tmp_path: Path) -> None:
    """Views escape them; what steers a terminal is gone."""
    content = "wavenumber,note\n1086,<script>alert(1)</script>\n711,=cmd|'/C calc'!A0\n281,\x1b[2Jred\n"
    notes = [band.note for band in read_bands(written(tmp_path, content), "raman")]
    assert notes == ["<script>alert(1)</script>", "=cmd|'/C calc'!A0", "[2Jred"]


# Units


@pytest.mark.parametrize("unit", ["nm", "um"])
def test_infrared_wavelengths(unit: str, tmp_path: Path) -> None:
    """1000 cm⁻¹ is 10 µm."""
    values = {"nm": "10000\n5000", "um": "10\n5"}[unit]
    assert listed(tmp_path, f"wavelength ({unit})\n{values}\n", "infrared") == [(1000.0, None), (2000.0, None)]


@pytest.mark.parametrize(("unit", "joule"), [("meV", 1e-3 * scipy.constants.e), ("THz", 1e12 * scipy.constants.h)])
def test_energies_and_frequencies(unit: str, joule: float, tmp_path: Path) -> None:
    """Against scipy's table of constants."""
    expected = joule / (scipy.constants.h * scipy.constants.c) / 100
    assert PER_UNIT[unit] == pytest.approx(expected, rel=1e-9)
    assert listed(tmp_path, f"energy ({unit})\n20\n", "infrared")[0][0] == pytest.approx(20 * expected, abs=1e-3)


def test_raman_wavelengths_need_the_laser_line(tmp_path: Path) -> None:
    """Silicon, 520.5 cm⁻¹ from 532.00 nm, is seen at 547.15 nm when all wavelengths are taken in air (arithmetic)."""
    refused(tmp_path, "wavelength (nm)\n547.15\n", "laser", technique="raman")
    (found, _), *_ = listed(tmp_path, "wavelength (nm)\n547.15\n", laser=532.0)
    assert found == pytest.approx(520.5, abs=0.3)


def test_wavelengths_in_air_are_taken_to_vacuum() -> None:
    """The sodium line D2 is 588.995 nm in air and 16973.37 cm⁻¹ in vacuum (National Institute of Standards and
    Technology, Atomic Spectra Database, from memory)."""
    assert vacuum_wavenumbers(np.array([588.99505]))[0] == pytest.approx(16973.37, abs=0.02)


def test_absolute_wavenumbers_of_scattered_light(tmp_path: Path) -> None:
    refused(tmp_path, "18276.6\n18085.8\n", "absolute", "laser")
    laser = float(vacuum_wavenumbers(np.array([532.0]))[0])
    (found, _), *_ = listed(tmp_path, f"{laser - 520.5:.3f}\n", laser=532.0)
    assert found == pytest.approx(520.5, abs=0.01)


def test_width_in_nanometres_is_turned_too(tmp_path: Path) -> None:
    """dν = dλ/λ²: 0.1 nm at 500 nm are 4 cm⁻¹."""
    (band,) = read_bands(written(tmp_path, "wavelength (nm),fwhm\n500,0.1\n"), "raman", laser=488.0)
    assert band.width == pytest.approx(4.0, rel=1e-3)


def test_unit_may_be_given_by_the_user(tmp_path: Path) -> None:
    assert listed(tmp_path, "10\n5\n", "infrared", unit="um") == [(1000.0, None), (2000.0, None)]


@pytest.mark.parametrize(
    ("content", "technique", "words"),
    [
        ("11.4\n7.0\n", "infrared", ("another unit", "um")),
        ("wavelength\n11.4\n", "infrared", ("unit", "wavelength")),
        ("wavenumber (m-1)\n108600\n", "raman", ("unit", "wavenumber (m-1)")),
        ("wavenumber\n1086000\n", "infrared", ("another unit",)),
        ("wavelength (nm)\n0\n-3\n", "infrared", ("not positive",)),
    ],
)
def test_units_that_cannot_be_right(content: str, technique: str, words: tuple[str, ...], tmp_path: Path) -> None:
    refused(tmp_path, content, *words, technique=technique)


# Bad lists


@pytest.mark.parametrize(
    ("content", "words"),
    [
        ("", ("empty",)),
        ("\n \n", ("empty",)),
        (b"\x00\x01\x02\xff", ("no text",)),
        ("wavenumber,intensity\n", ("no measurements",)),
        ("calcite\naragonite\n", ("no measurements",)),
        ("1086\nnan\n", ("line 2", "nan")),
        ("1086\ninf\n", ("line 2", "inf")),
        ("1086\n1e999\n", ("line 2", "1e999")),
        ("1086?\n711\n", ("line 1", "1086?")),
        ("wavenumber;intensity\n1.086,5;3\n", ("line 2", "1.086,5")),
        ("1086,5\n711,2\n", ("line 1", "decimal comma")),
        ("1086.5 100\n711,3 20\n", ("line 2", "decimal comma")),
        ("wavenumber,intensity\n1086,5,100\n", ("line 2", "3 values", "2 columns")),
        ("wavenumber,wavenumber\n1086,711\n", ("both give the wavenumber",)),
        ("wavenumber,width\n1086,-4\n", ("line 2", "width")),
        ("wavenumber,uncertainty\n1086,0\n", ("line 2", "uncertainty")),
        ("wavenumber,intensity\n1086,bright\n", ("line 2", "bright")),
        ("technique,wavenumber\nneutron,300\n", ("line 2", "neutron")),
        ("-1086\n1086\n", ("line 1", "-1086")),
        ("0\n1086\n", ("line 1", "0 cm")),
    ],
)
def test_bad_lists_are_refused_in_plain_words(content: str | bytes, words: tuple[str, ...], tmp_path: Path) -> None:
    refused(tmp_path, content, *words)


def test_folder_and_missing_file_are_refused(tmp_path: Path) -> None:
    for path in (tmp_path, tmp_path / "none.csv"):
        with pytest.raises(ReadError, match="list of bands"):
            read_bands(path, "raman")


@pytest.mark.parametrize("line", ["{} 3", "foo bar", "{},{},{}", "{}" + "x" * 500])
def test_hundred_thousand_lines_come_to_an_end(line: str, tmp_path: Path) -> None:
    content = "\n".join(line.format(*[(7919 * k) % 4001 + 1] * 3) for k in range(100_000))
    start = time.perf_counter()
    refused(tmp_path, content, "bands.txt")
    assert time.perf_counter() - start < 20


@pytest.mark.parametrize(
    ("manner", "word"),
    [({"kind": "graph"}, "graph"), ({"direction": "left"}, "left"), ({"laser": 5.0}, "5"), ({"calibration": 0.0}, "0")],
)
def test_wrong_arguments(manner: dict[str, object], word: str, tmp_path: Path) -> None:
    with pytest.raises(UsageError, match=word):
        read_record(written(tmp_path, "1086\n"), "raman", Manner(**manner))  # type: ignore[arg-type]
    with pytest.raises(UsageError, match="neutrons"):
        read_bands(written(tmp_path, "1086\n"), "neutrons")


# Spectra: one Lorentzian of width 12 at 1000 cm⁻¹ and one at 1400


def lines(axis: np.ndarray, values: np.ndarray, template: str = "{:.4f} {:.6f}") -> str:
    return "\n".join(template.format(x, y) for x, y in zip(axis, values, strict=True)) + "\n"


def absorbance(wavenumbers: np.ndarray) -> np.ndarray:
    return 0.02 + sum(height / (1 + ((wavenumbers - centre) / 6) ** 2) for centre, height in ((1000, 0.8), (1400, 0.4)))


AXIS = np.arange(600.0, 1800.0, 1.0)


def centres(folder: Path, content: str, technique: str = "infrared", **manner: object) -> list[float]:
    record = read_record(written(folder, content), technique, Manner(**manner))  # type: ignore[arg-type]
    assert record.picks is not None
    return [band.wavenumber for band in record.bands]


TWO_CENTRES = pytest.approx([1000.0, 1400.0], abs=0.5)


@pytest.mark.parametrize(
    "content",
    [
        lines(AXIS, absorbance(AXIS)),
        lines(AXIS[::-1], absorbance(AXIS)[::-1]),
        "wavenumber (cm-1),absorbance\n" + lines(AXIS, absorbance(AXIS), "{:.4f},{:.6f}"),
        lines(AXIS, absorbance(AXIS), "{:.4f};{:.6f}").replace(".", ","),
        lines(AXIS, 1e6 * absorbance(AXIS), "{:.0f},{:.0f}"),
        "wavenumber,transmittance\n" + lines(AXIS, 10 ** -absorbance(AXIS), "{:.4f},{:.6f}"),
        "wavenumber,%T\n" + lines(AXIS, 100 * 10 ** -absorbance(AXIS), "{:.4f},{:.6f}"),
        lines(AXIS, 100 * 10 ** -absorbance(AXIS)),
        "wavelength [µm]\tabs\n" + lines(1e4 / AXIS, absorbance(AXIS), "{:.6f}\t{:.6f}"),
        "instrument: none\nscans: 32\n" + lines(AXIS, absorbance(AXIS)),
    ],
)  # fmt: skip
def test_infrared_spectra_are_read_whichever_way_they_are_written(content: str, tmp_path: Path) -> None:
    assert centres(tmp_path, content) == TWO_CENTRES


def test_transmittance_gives_the_absorbance_back(tmp_path: Path) -> None:
    """A = -log10 T: height and width of the strongest band are those that were put in."""
    record = read_record(
        written(tmp_path, "wavenumber,%T\n" + lines(AXIS, 100 * 10 ** -absorbance(AXIS), "{:.4f},{:.8f}")), "infrared"
    )
    assert record.bands[0].intensity == pytest.approx(0.8, rel=0.02)
    assert record.bands[0].width == pytest.approx(12, rel=0.02)
    assert any("absorbance" in note for note in record.notes)


def test_direction_is_asked_for_where_nothing_tells(tmp_path: Path) -> None:
    up_and_down = lines(AXIS, absorbance(AXIS) - absorbance(AXIS + 200))
    refused(tmp_path, up_and_down, "up", "down", technique="infrared")
    upright = centres(tmp_path, up_and_down, direction="peaks")
    assert min(abs(one - 1000) for one in upright) < 2
    turned = centres(tmp_path, up_and_down, direction="dips")
    assert min(abs(one - 800) for one in turned) < 2


def test_reflectance_is_read_with_a_warning(tmp_path: Path) -> None:
    content = "wavenumber,reflectance\n" + lines(AXIS, absorbance(AXIS), "{:.4f},{:.6f}")
    record = read_record(written(tmp_path, content), "infrared")
    assert any("longitudinal" in note for note in record.notes)


def test_raman_spectrum_in_nanometres(tmp_path: Path) -> None:
    laser = vacuum_wavenumbers(np.array([632.8]))[0]
    wavelengths = np.arange(640.0, 720.0, 0.05)
    shifts = laser - vacuum_wavenumbers(wavelengths)
    content = "wavelength (nm)\tcounts\n" + lines(wavelengths, 1000 * absorbance(shifts), "{:.4f}\t{:.3f}")
    assert centres(tmp_path, content, "raman", laser=632.8) == TWO_CENTRES


def test_antistokes_side_is_left_out(tmp_path: Path) -> None:
    axis = np.arange(-1600.0, 1600.0, 1.0)
    record = read_record(written(tmp_path, lines(axis, absorbance(axis) + 0.3 * absorbance(-axis))), "raman")
    assert [band.wavenumber for band in record.bands] == TWO_CENTRES
    assert any("left out" in note for note in record.notes)


def test_list_and_spectrum_are_told_apart_by_content(tmp_path: Path) -> None:
    """Sixty bands at uneven places are a list, sixty points at even steps a spectrum."""
    uneven = np.cumsum(np.random.default_rng(1).exponential(40.0, 60)) + 50
    assert read_record(written(tmp_path, lines(uneven, uneven)), "raman").picks is None
    even = np.arange(800.0, 1100.0, 5.0)
    assert read_record(written(tmp_path, lines(even, absorbance(even))), "raman").picks is not None
    assert read_record(written(tmp_path, lines(even, absorbance(even))), "raman", Manner(kind="list")).picks is None


@pytest.mark.parametrize(
    ("content", "words"),
    [
        (lines(AXIS, absorbance(AXIS)).replace("1000.0000", "1000.0000x"), ("line 401", "1000.0000x")),
        (lines(AXIS, absorbance(AXIS)).replace("700.0000 ", "700.0000 nan "), ("line 101",)),
        (lines(AXIS, 0 * AXIS + 3), ("same ordinate",)),
        (lines(np.r_[AXIS, AXIS[-1:]], absorbance(np.r_[AXIS, AXIS[-1:]])), ("line 1201", "turns back")),
        ("\n".join(f"{x:.1f} 1 2" for x in AXIS), ("columns",)),
        (lines(AXIS[:10], absorbance(AXIS[:10])), ("few",)),
        (lines(AXIS / 100, absorbance(AXIS)), ("another unit",)),
    ],
)  # fmt: skip
def test_bad_spectra_are_refused_in_plain_words(content: str, words: tuple[str, ...], tmp_path: Path) -> None:
    refused(tmp_path, content, *words, technique="infrared", kind="spectrum", direction="peaks")


def test_spectrum_needs_its_technique(tmp_path: Path) -> None:
    refused(tmp_path, lines(AXIS, absorbance(AXIS)), "--raman", technique="")


def test_several_files_at_once(tmp_path: Path) -> None:
    raman = [written(tmp_path, "1086\n", "a.txt"), written(tmp_path, "711\n", "b.txt")]
    infrared = [written(tmp_path, lines(AXIS, absorbance(AXIS)), "c.txt")]
    records = read_records(raman, infrared, [written(tmp_path, "technique,wavenumber\nraman,281\n", "d.csv")])
    assert [len(record.bands) for record in records] == [1, 1, 2, 1]


# JCAMP-DX

# The ordinates of the example by which the paper that defines the format explains its compressed forms, and that table
# in difference form with repeats (McDonald and Wilks, Appl. Spectrosc. 42, 151, 1988, table of forms; from memory).
ORDINATES = [
    0, 0, 0, 0, 2, 4, 4, 4, 7, 5, 4, 4, 5, 5, 7, 10, 11, 11, 6, 5, 7, 6, 9, 9, 7, 10, 10, 9, 10, 11, 12, 15, 16, 16, 14,
    17, 38, 38, 35, 38, 42, 47, 54, 59, 66, 75, 78, 88, 96, 104, 110, 121, 128,
]  # fmt: skip
COMPRESSED = "@VKT%TLkj%J%KLJ%njKjL%kL%jJULJ%kLK1%lLMNPNPRLJ0QTOJ1P"


def jcamp(data: str, form: str = "XYDATA=(X++(Y..Y))", **labels: object) -> str:
    head = {
        "TITLE": "calcite", "JCAMP-DX": "4.24", "DATA TYPE": "INFRARED SPECTRUM", "XUNITS": "1/CM",
        "YUNITS": "ABSORBANCE", "XFACTOR": 1, "YFACTOR": 1, "FIRSTX": 400, "LASTX": 452, "NPOINTS": 53, **labels,
    }  # fmt: skip
    return (
        "".join(f"##{name}={value}\n" for name, value in head.items() if value is not None)
        + f"##{form}\n{data}\n##END=\n"
    )


def points(folder: Path, content: str, technique: str = "infrared") -> tuple[np.ndarray, np.ndarray]:
    from sitesym.bands.jcamp_dx import read_jcamp
    from sitesym.bands.spectrum import Trace

    found = read_jcamp(content, "file.jdx", technique)
    assert isinstance(found, Trace)
    return found.x, found.y


def test_jcamp_example_of_the_defining_paper(tmp_path: Path) -> None:
    x, y = points(tmp_path, jcamp(f"400{COMPRESSED}"))
    assert y.tolist() == ORDINATES
    assert x.tolist() == list(range(400, 453))


def plain(values: np.ndarray, first: float = 400, template: str = "{:.4f}", step: int = 1) -> str:
    """Eight values a line, the place of the first one before them."""
    rows = [values[k : k + 8] for k in range(0, len(values), 8)]
    return "\n".join(f"{first + 8 * step * k} " + " ".join(map(template.format, row)) for k, row in enumerate(rows))


VALUES = absorbance(np.arange(600.0, 1800.0))
WIDE = {"FIRSTX": 600, "LASTX": 1799, "NPOINTS": 1200}
PAIRS = "\n".join(f"{x:.1f}, {y:.5f}" for x, y in enumerate(VALUES, 600))


@pytest.mark.parametrize(
    "content",
    [
        jcamp(plain(VALUES, 600), **WIDE),
        jcamp(plain(VALUES, 600).replace(".", ","), **{**WIDE, "FIRSTX": "600,0"}),
        jcamp(plain(VALUES, 600).replace("\n", " $$ checked\n", 3), **WIDE),
        jcamp(plain(np.round(VALUES * 1e4), 600, template="{:.0f}"), **WIDE, YFACTOR=1e-4),
        jcamp(PAIRS, "XYPOINTS=(XY..XY)", **WIDE),
        jcamp(PAIRS.replace(", ", "; ").replace(".", ","), "XYPOINTS= (XY..XY)", **WIDE),
        "$$ first\n" + jcamp(plain(VALUES, 600), **{**WIDE, "NPOINTS": "1200 $$ n"}).replace("DATA TYPE", "DATATYPE"),
        jcamp(plain(VALUES[::-1], 1799, step=-1), **{**WIDE, "FIRSTX": 1799, "LASTX": 600}),
        jcamp(plain(10**-VALUES, 600, template="{:.5f}"), **WIDE, YUNITS="TRANSMITTANCE"),
    ],
)  # fmt: skip
def test_jcamp_spectra_in_all_forms(content: str, tmp_path: Path) -> None:
    record = read_record(written(tmp_path, content, "file.jdx"), "infrared")
    assert [band.wavenumber for band in record.bands] == TWO_CENTRES


@pytest.mark.parametrize(
    ("data", "values"),
    [
        ("400A0S1B0", [10] * 11 + [20]),
        ("400 5T 7V", [5, 5, 7, 7, 7, 7]),
        ("400+5T-7", [5, 5, -7]),
        ("400A0J2T", [10, 22, 34]),
    ],
)
def test_jcamp_repeats_the_library_misreads(data: str, values: list[float], tmp_path: Path) -> None:
    """Counts of several digits (S1 is eleven), repeats of values that are no differences: the standard, section 5."""
    _, y = points(tmp_path, jcamp(data, NPOINTS=len(values), LASTX=400 + len(values) - 1))
    assert y.tolist() == values


def test_jcamp_table_of_peaks_is_a_list(tmp_path: Path) -> None:
    content = jcamp("876, 100 712, 40\n1407, 90", "PEAK TABLE=(XY..XY)", NPOINTS=3)
    record = read_record(written(tmp_path, content, "peaks.jdx"), "infrared")
    assert [(band.wavenumber, band.intensity) for band in record.bands] == [(876, 100), (712, 40), (1407, 90)]


@pytest.mark.parametrize(
    ("content", "words"),
    [
        (jcamp(f"400{COMPRESSED}", NPOINTS=54, LASTX=453), ("damaged", "53 points", "54")),
        (jcamp(f"400{COMPRESSED[:-4]}"), ("damaged",)),
        (jcamp("400A0J1\n401A5J1", NPOINTS=3, LASTX=402), ("damaged", "check value")),
        (jcamp(f"400{COMPRESSED}", FIRSTY=77), ("damaged", "77")),
        (jcamp(plain(VALUES, 600).replace("680 ", "690 ", 1), **WIDE), ("damaged", "evenly")),
        (jcamp("400 1 ? 3", NPOINTS=3), ("missing",)),
        (jcamp("400A0s999999999B0", NPOINTS=3), ("damaged", "repeats")),
        (jcamp("400 1 2 3", NPOINTS=None), ("NPOINTS",)),
        (jcamp("400 1 2 3", NPOINTS="many"), ("NPOINTS", "many")),
        (jcamp("400 1 2 3", NPOINTS=1), ("1 points",)),
        (jcamp("400 1 2 3", "XYDATA=(T..T)"), ("form",)),
        (jcamp("400 1 2 3", "DATA TABLE=(XRII)"), ("no XYDATA",)),
        (jcamp("garbage &!", NPOINTS=3), ("decoded",)),
        (jcamp(f"400{COMPRESSED}", XUNITS="SECONDS"), ("SECONDS",)),
        (jcamp(f"400{COMPRESSED}", **{"DATA TYPE": "RAMAN SPECTRUM"}), ("says that it is raman", "--raman")),
        (jcamp(f"400{COMPRESSED}") + jcamp(f"400{COMPRESSED}", TITLE="second"), ("2 spectra", "second")),
        ("##TITLE=x\n", ("no XYDATA",)),
    ],
)  # fmt: skip
def test_damaged_jcamp_is_refused(
    content: str, words: tuple[str, ...], tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    refused(tmp_path, content, *words, technique="infrared")
    assert capsys.readouterr().out == ""


def test_missing_library_is_named(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    import sys

    monkeypatch.setitem(sys.modules, "jcamp", None)
    refused(tmp_path, jcamp(f"400{COMPRESSED}"), "sitesym[jcamp]", technique="infrared")


# Pins


def test_pins_are_read(tmp_path: Path) -> None:
    path = written(tmp_path, "# mine\npin 711 CO3 ν4\nnot 1749,5 CO3 nu1   # overtone\n\n")
    assert [(pin.wavenumber, pin.family, pin.insists) for pin in read_pins(path)] == [
        (711.0, "CO3 ν4", True), (1749.5, "CO3 nu1", False),
    ]  # fmt: skip


@pytest.mark.parametrize(
    "line", ["pin 711", "fix 711 CO3 ν4", "pin CO3 ν4 711", "pin nan CO3 ν4", "pin -3 CO3 ν4", "<script>"]
)
def test_bad_pins_are_refused_with_their_line(line: str, tmp_path: Path) -> None:
    with pytest.raises(ReadError, match="line 2"):
        read_pins(written(tmp_path, f"# x\n{line}\n"))


def test_pins_refuse_other_files(tmp_path: Path) -> None:
    for content in (b"", b"\x00\x01", b"# x\n" * 5000):
        with pytest.raises(ReadError):
            read_pins(written(tmp_path, content))
    with pytest.raises(ReadError):
        read_pins(os.fspath(tmp_path))
