"""Explanations as text, page, JSON and CSV; the drawing of bands; picked bands as a list."""

from __future__ import annotations

import csv
import io
import json
import re
from dataclasses import replace
from pathlib import Path
from xml.etree import ElementTree as Tree

import pytest
from explanation_cases import BANDS, by_hand, calcite, spectrum_record
from html_reader import SVG, Reader, drawings, squeezed
from test_explanations_literature import CASES, explanation_of
from views_cases import ESCAPES, FORMULA, HOSTILE, SPECIALS, renamed

from sitesym.bands.explanation import Explanation, explain
from sitesym.bands.measurement import Band
from sitesym.bands.reading import Record, read_bands
from sitesym.bands.reasons import CAUSES
from sitesym.views import explain_csv, explain_html, explain_json, explain_text, picked_csv
from sitesym.views.explain_paragraph import paragraph
from sitesym.views.layout import width

SCREEN = """\
CaCO₃ calcite: 6 bands

For CaCO₃ in space group R3̄c (number 167, hexagonal axes), factor group D₃d,
symmetry allows 5 fundamentals in Raman and 8 in infrared. Of the 4 Raman bands
measured, 3 are allowed as fundamentals or components of them: external modes
281.2; CO₃ ν4 711.46, ν1 1086 cm⁻¹. Of the rest, 1749 cm⁻¹ is allowed as 2ν2 of
CO₃. Of the 2 infrared bands measured, one is allowed as a fundamental or a
component of one: CO₃ ν4 712 cm⁻¹. Of the rest, 2349 cm⁻¹ lies near 2349 cm⁻¹,
where air has a line. One pair coincides in Raman and infrared within the
uncertainties (711.46 and 712 cm⁻¹), where inversion forbids that one mode is
seen in both; 0.2 would by accident (probability of as many 0.18), which is no
evidence against inversion. Of the fundamentals allowed, 1 in Raman was not
seen. Bands were put to what symmetry allows with sitesym"""
"""Counts of calcite: Porto, Giordmaine and Damen 1966, from memory. The rest is what `explanation_cases` wrote down."""

TABLE = """\
Bands
─────
  cm⁻¹    ±  in        geometry  place     first reason  species  or
 281.2    1  Raman     ·         external  fundamental   Eg
711.46  0.3  Raman     z(xy)z̄    ν4        fundamental   Eg
  1086    1  Raman     ·         ν1        fundamental   A₁g
  1749    2  Raman     ·         ·         overtone 2ν2  A₁g, Eg  lower symmetry
   712    2  infrared  ·         ν4        fundamental   Eu
  2349    4  infrared  ·         ·         air           ·
"""

REST = """\
Raman 1749 cm⁻¹, without a place among the fundamentals
   1. overtone: allowed as 2ν2 of CO₃: 872 + 872 = 1744 cm⁻¹.
      test: T
   2. lower symmetry: would need the symmetry to be lowered to D₃, which allows
      more.

Infrared 712 cm⁻¹
   1. fundamental: allowed as the fundamental CO₃ ν4 (E′).

Infrared 2349 cm⁻¹, without a place among the fundamentals
   1. air: near 2349 cm⁻¹, where air has a line: carbon dioxide.
      test: purge

Allowed but not seen
────────────────────
- Raman: CO₃ ν3 (0 of 1 seen). Weak.

Which loss of symmetry would do
───────────────────────────────
- D₃ (32), order 6 of 12. For it, that Raman 1749 cm⁻¹ would be allowed. Without
  a place stay infrared 2349 cm⁻¹. Against it, that it allows 11 fundamentals in
  Raman (assumed symmetry 5), where 4 bands were seen, and 9 fundamentals in
  infrared (assumed symmetry 8), where 2 bands were seen. It has no inversion: a
  mode may then be seen in both techniques.
"""


def test_text_of_a_small_explanation() -> None:
    text = explain_text.render(by_hand(), [spectrum_record()])
    assert text.startswith(SCREEN)
    assert TABLE in text
    assert REST in text
    assert "- calcite.txt: spectrum\n" in text


@pytest.mark.parametrize("name", CASES)
def test_text_keeps_to_80_columns_and_names_every_band(name: str) -> None:
    result = explanation_of(name)
    text = explain_text.render(result)
    assert max(map(width, text.splitlines())) <= 80
    assert not any(line != line.rstrip() for line in text.splitlines())
    table = text.split("\nBands\n")[1].split("\nArguments")[0]
    rows = [line.split()[0] for line in table.splitlines()[2:] if line.strip()]
    assert rows == [f"{one.band.wavenumber:g}" for one in result.bands]


@pytest.mark.parametrize("name", CASES)
def test_paragraph_claims_no_more_than_is_allowed(name: str) -> None:
    """Bands are "allowed as", "forbidden", "would need", lie near a line, or remain unexplained; nothing is proved."""
    words = paragraph(explanation_of(name))
    assert re.search(r"allowed as|would need|unexplained|None of", words)
    assert not re.search(
        r"\b(due to|because of|proves?|must be|is caused|certainly|clearly|obviously|confirms?)\b", words
    )


def test_every_band_has_a_place_in_the_paragraph_or_the_rest() -> None:
    words = paragraph(by_hand())
    for band in BANDS:
        assert f"{round(band.wavenumber, 2):g}" in words


# JSON


def strict(text: str) -> dict:
    assert text.isascii()
    return json.loads(text, parse_constant=lambda value: pytest.fail(f"{value} is no JSON"))


@pytest.mark.parametrize("name", CASES)
def test_json_keeps_its_contract(name: str) -> None:
    """The keys of the contract, the vocabulary of causes, reasons in order of rank, plain ASCII labels."""
    document = strict(explain_json.render(explanation_of(name)))
    assert {"schema", "version", "summary", "bands", "missing", "lowering"} <= set(document)
    assert document["schema"] == 1
    case = CASES[name]
    assert len(document["bands"]) == len(case.get("raman", [])) + len(case.get("infrared", []))
    for band in document["bands"]:
        assert {"wavenumber", "technique", "assignment", "reasons"} <= set(band)
        assert band["technique"] in ("raman", "infrared")
        assert band["assignment"] is None or {"unit", "vibration", "species"} <= set(band["assignment"])
        assert band["reasons"]
        for reason in band["reasons"]:
            assert {"cause", "argument", "parents", "species", "decisive_test"} <= set(reason)
            assert reason["cause"] in CAUSES
        scores = [reason["score"] for reason in band["reasons"]]
        assert scores == sorted(scores, reverse=True)
    for one in document["lowering"]:
        assert {"group", "explains", "fails"} <= set(one)


def test_json_of_a_small_explanation() -> None:
    document = strict(explain_json.render(by_hand(), [spectrum_record()]))
    band = document["bands"][1]
    assert (band["wavenumber"], band["uncertainty"], band["width"]) == (711.46, 0.3, 3.0)
    assert (band["geometry"], band["note"]) == ("z(xy)-z", "sharp")
    assert band["assignment"] == {"unit": "CO3", "vibration": "\u03bd4", "species": ["Eg"], "free_species": "E'"}
    assert document["bands"][3]["assignment"] is None
    assert document["lowering"][0]["explains"] == [{"wavenumber": 1749.0, "technique": "raman"}]
    assert document["coincidences"]["pairs"] == [{"raman": 711.46, "infrared": 712.0}]
    assert document["missing"][0]["vibration"] == "\u03bd3"
    assert document["input"]["measurements"][0]["kind"] == "spectrum"


# CSV


def tables(text: str) -> list[list[dict[str, str]]]:
    return [[*csv.DictReader(io.StringIO(one))] for one in text.split("\n\n")]


def test_csv_has_one_row_for_each_reason() -> None:
    bands, missing, lowering, families = tables(explain_csv.render(by_hand()))
    assert [(row["wavenumber"], row["rank"], row["cause"]) for row in bands if row["wavenumber"] == "1749.0"] == [
        ("1749.0", "1", "overtone"), ("1749.0", "2", "symmetry_lowering"), ("1749.0", "3", "unexplained"),
    ]  # fmt: skip
    assert missing[0]["vibration"] == "ν3"
    assert lowering[0]["explains"] == "raman 1749"
    assert {row["unit"] for row in families} == {"CO3", "lattice"}


# The page


@pytest.mark.parametrize("name", ["calcite", "barite", "naphthalene", "barium titanate, taken as cubic", "diamond"])
def test_page_is_well_formed(name: str) -> None:
    """Tags match, ids are unique, links and labels lead somewhere, the drawing is XML, nothing is fetched."""
    check_page(explain_html.render(explanation_of(name)))


def test_page_with_a_spectrum_is_well_formed() -> None:
    document = explain_html.render(by_hand(), [spectrum_record()])
    check_page(document)
    assert "calcite.txt" in Reader(document).text["files"]


def check_page(document: str) -> None:
    read = Reader(document)
    ids = read.values("id")
    assert len(ids) == len(set(ids))
    assert {target.removeprefix("#") for target in read.values("href")} <= set(ids)
    assert set(" ".join(read.values("aria-labelledby")).split()) <= set(ids)
    assert len(read.tables) == read.captions
    assert len(drawings(document)) == 1
    assert not {"script", "link", "img"} & {tag for tag, _ in read.elements}


def test_page_shows_paragraph_table_and_arguments() -> None:
    read = Reader(explain_html.render(by_hand()))
    assert "1749 cm−1 is allowed as 2ν2 of CO3" in squeezed(read.text["answer"])
    rows = [[squeezed(cell) for cell in row] for row in read.tables[0]]
    assert rows[4][:7] == ["1749", "2", "Raman", "–none", "overtone 2ν2", "A1g, Eg", "lower symmetry"]
    assert "lowered to D3" in squeezed(read.text["arguments"])
    assert "0 of 1 seen" in squeezed(read.text["missing"])


# The drawing


def labels(drawing: Tree.Element) -> list[str]:
    return ["".join(one.itertext()) for one in drawing.iter(f"{SVG}text")]


@pytest.mark.parametrize("name", ["calcite", "benzene, crystal", "naphthalene", "alpha-quartz"])
def test_drawing_names_every_band_inside_its_frame(name: str) -> None:
    result = explanation_of(name)
    (drawing,) = drawings(explain_html.render(result))
    found = labels(drawing)
    for one in result.bands:
        assert f"{round(one.band.wavenumber, 1):g}" in found
    left, top, wide, high = map(float, drawing.attrib["viewBox"].split())
    for one in drawing.iter(f"{SVG}text"):
        assert left <= float(one.attrib["x"]) <= left + wide
        assert top <= float(one.attrib["y"]) <= top + high


def test_sticks_stand_in_order_and_by_intensity() -> None:
    """High wavenumbers left, as is custom; the strongest band the tallest."""
    (drawing,) = drawings(explain_html.render(by_hand()))
    sticks = [one for one in drawing.iter(f"{SVG}line") if one.attrib.get("stroke-width") == "2"]
    raman = sticks[:4]
    assert [float(one.attrib["x1"]) for one in raman] == sorted(float(one.attrib["x1"]) for one in raman)
    tall = {
        number: float(one.attrib["y1"]) - float(one.attrib["y2"])
        for number, one in zip((1749, 1086, 711, 281), raman, strict=True)
    }
    assert tall[1086] > tall[281] > tall[711] > tall[1749] > 0
    assert all("stroke-dasharray" in one.attrib for one in sticks[4:])


def test_spectrum_is_drawn_with_its_strongest_peak_on_top() -> None:
    (drawing,) = drawings(explain_html.render(by_hand(), [spectrum_record()]))
    curves = [one.attrib["d"] for one in drawing.iter(f"{SVG}path") if one.attrib["d"].count("L") > 100]
    assert len(curves) >= 2
    points = [tuple(map(float, one.split(","))) for one in re.findall(r"[\d.]+,[\d.]+", curves[0])]
    peak = min(points, key=lambda point: point[1])
    marks = [one for one in drawing.iter(f"{SVG}text") if "".join(one.itertext()) == "1086"]
    assert abs(peak[0] - float(marks[0].attrib["x"]) + 4) < 6


# Strangers' words


@pytest.mark.parametrize("name", [HOSTILE, FORMULA, ESCAPES, SPECIALS])
def test_words_from_strangers_are_harmless(name: str) -> None:
    """Names of compounds, files, suspects and notes that hold markup, formulas or terminal sequences."""
    crystal = renamed(calcite(), name, name)
    bands = (Band(1086.0, "raman", note=name, geometry=""), Band(1749.0, "raman", note=name), Band(850.0, "infrared"))
    result = explain(crystal, bands, suspects=[(name, calcite())])
    records = [Record(name, bands, None, (name,))]
    text, page = explain_text.render(result, records), explain_html.render(result, records)
    table, document = explain_csv.render(result), explain_json.render(result, records)
    assert not any(ord(one) < 32 and one != "\n" for one in text)
    assert "\u202e" not in text + page
    assert "<script" not in page.lower()
    check_page(page)
    for row in csv.reader(io.StringIO(table)):
        for cell in row:
            assert re.fullmatch(r"-?[\d.e+-]+", cell) or not cell.lstrip().startswith(("=", "+", "-", "@")), cell
    strict(document)


def test_symbols_within_sentences_are_set_and_the_rest_is_escaped() -> None:
    result = by_hand()
    hostile = replace(result.bands[3].reasons[0], argument="allowed as A1g of CO3 <b>in D3</b> & A1gg, E'x")
    changed = replace(result.bands[3], reasons=(hostile,))
    document = explain_html.render(_with(result, changed))
    assert "A<sub>1g</sub> of CO<sub>3</sub> &lt;b&gt;in D<sub>3</sub>&lt;/b&gt; &amp; A1gg, E&#x27;x" in document


def _with(result: Explanation, band: object) -> Explanation:
    return replace(result, bands=(*result.bands[:3], band, *result.bands[4:]))  # type: ignore[arg-type]


# Picked bands


def test_picked_bands_can_be_read_again(tmp_path: Path) -> None:
    record = spectrum_record()
    by_list = Record(
        "list.csv",
        (Band(876.0, "infrared", 1.5, 10.0, 4.0, "", "=1+1"), Band(711.0, "raman", geometry="-z(xx)z")),
        None,
        (),
    )
    target = tmp_path / "picked.csv"
    target.write_text(picked_csv.render([record, by_list]), encoding="utf-8")
    assert "'=1+1" in target.read_text(encoding="utf-8")
    assert read_bands(target) == (*record.bands, *by_list.bands)
