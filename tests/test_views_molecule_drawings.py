"""Drawings of molecules, read back and held against the literature: correlation diagrams and line spectra.

The published values are those of tests/reference/correlations.toml, where each names its source.
"""

from __future__ import annotations

import itertools
import re
import xml.etree.ElementTree as Tree

import numpy as np
import pytest
from drawing_reader import CASES, NAMES, SVG, Diagram, analysed, heads_of, plain, row_of, words_of
from html_reader import demo
from scipy.optimize import isotonic_regression

from sitesym.views.figures import correlation_diagram, line_spectrum
from sitesym.views.figures.correlation_layers import layers_of
from sitesym.views.figures.crossings import count_crossings
from sitesym.views.figures.spread import spread

INTERNAL, LIBRATIONS, TRANSLATIONS = "Internal vibrations", "Librations", "Translations"
PARAMETERS = pytest.mark.parametrize("index", range(len(CASES)), ids=[case["name"].replace(" ", "-") for case in CASES])


def diagram(index: int) -> Diagram:
    return Diagram(correlation_diagram(analysed(index), row_of(index), "unit-1-diagram"))


def letters(infrared: bool, raman: bool) -> str:
    return "I" * infrared + "R" * raman or "silent"


def summed(parts: list[tuple[dict[str, int], int]]) -> dict[str, int]:
    total: dict[str, int] = {}
    for part, times in parts:
        for label, count in part.items():
            total[plain(label)] = total.get(plain(label), 0) + count * times
    return total


# The diagram against the published correlations


@PARAMETERS
def test_diagram_counts_the_published_species_at_both_ends(index: int) -> None:
    case, drawn = CASES[index], diagram(index)
    free = summed([({one["species"]: 1}, one["count"]) for one in case["vibrations"]])
    assert drawn.counts(INTERNAL, 0) == free
    assert drawn.counts(INTERNAL, 2) == summed([(one["crystal"], one["count"]) for one in case["vibrations"]])
    for name, section in (("librations", LIBRATIONS), ("translations", TRANSLATIONS)):
        if name in case:
            assert drawn.counts(section, 2) == summed([(case[name]["crystal"], 1)])


@PARAMETERS
def test_lines_lead_from_each_free_species_to_the_published_species_of_the_crystal(index: int) -> None:
    drawn = diagram(index)
    expected = {plain(one["species"]): set(one["crystal"]) for one in CASES[index]["vibrations"]}
    for box in drawn.column(INTERNAL, 0):
        assert drawn.reached(box) == set(map(plain, expected[box.label])), box.label


@PARAMETERS
def test_letters_tell_the_published_activity(index: int) -> None:
    case, drawn = CASES[index], diagram(index)
    infrared, raman = set(case["crystal_infrared"]), set(case["crystal_raman"])
    for box in drawn.boxes:
        if box.column == 2:
            assert box.letters == letters(box.label in infrared, box.label in raman), box.label
    free = {plain(one["species"]): letters(one["free_infrared"], one["free_raman"]) for one in case["vibrations"]}
    assert {box.label: box.letters for box in drawn.column(INTERNAL, 0)} == free


@PARAMETERS
def test_boxes_stand_apart_and_nothing_leaves_the_drawing(index: int) -> None:
    drawn = diagram(index)
    _, _, width, height = (float(value) for value in drawn.root.attrib["viewBox"].split())
    for section in (INTERNAL, LIBRATIONS, TRANSLATIONS):
        for column in range(3):
            boxes = sorted(drawn.column(section, column), key=lambda box: box.top)
            assert all(one.bottom + 5 <= two.top for one, two in itertools.pairwise(boxes))
    assert all(box.left >= 0 and box.right <= width and box.bottom <= height for box in drawn.boxes)
    assert all(y <= height and x < width for x, y, _ in drawn.loose)
    tall = sum(box.bottom - box.top + 8 for box in drawn.boxes)
    assert height < 190 + tall  # no more than its boxes and heads would take in one column


# Fateley, McDevitt and Bentley 1971 (from memory), calcite: ν1 A1g Raman + A1u silent, ν2 A2g silent + A2u infrared,
# ν3 and ν4 Eg Raman + Eu infrared.
def test_diagram_of_calcite_names_the_vibrations() -> None:
    drawn = diagram(NAMES["calcite"])
    inside = {box.label: (box.letters, *box.lines) for box in drawn.column(INTERNAL, 2)}
    assert inside == {
        "A1g": ("R", "ν1"), "A1u": ("silent", "ν1"), "A2g": ("silent", "ν2"), "A2u": ("I", "ν2"),
        "Eg": ("R", "ν3, ν4"), "Eu": ("I", "ν3, ν4"),
    }  # fmt: skip
    assert {box.label: box.lines for box in drawn.column(INTERNAL, 0)} == {
        "A1'": ("ν1 stretching",), "A2''": ("ν2 out-of-plane",), "E'": ("ν3 stretching", "ν4 bending"),
    }  # fmt: skip


# Character table of D3h, common practice: Rz is A2', (Rx, Ry) E'', z A2'', (x, y) E'.
# Acoustic modes of calcite: A2u + Eu.
def test_diagram_of_calcite_says_which_axes_and_which_share_is_acoustic() -> None:
    drawn = diagram(NAMES["calcite"])
    assert {box.label: box.lines for box in drawn.column(LIBRATIONS, 0)} == {
        "A2'": ("about z",),
        "E''": ("about x, y",),
    }
    assert {box.label: box.lines for box in drawn.column(TRANSLATIONS, 0)} == {
        "A2''": ("along z",), "E'": ("along x, y",),
    }  # fmt: skip
    shares = {box.label for box in drawn.column(TRANSLATIONS, 2) if box.lines == ("acoustic share",)}
    assert shares == {"A2u", "Eu"}


def test_the_only_unit_of_a_crystal_has_all_the_acoustic_modes() -> None:
    """C60 in Fm-3, one molecule in the primitive cell: its three translations are the acoustic modes, Tu."""
    drawn = diagram(NAMES["buckminsterfullerene, one orientation"])
    assert [box.lines for box in drawn.column(TRANSLATIONS, 2)] == [("acoustic",)]
    benzene = {box.label: box.lines for box in diagram(NAMES["benzene"]).column(TRANSLATIONS, 2)}
    assert benzene == {"Au": (), "B1u": ("1 acoustic",), "B2u": ("1 acoustic",), "B3u": ("1 acoustic",)}


def test_a_number_on_a_line_tells_how_often() -> None:
    """Td to C2, correlation tables (Wilson, Decius and Cross 1955): E to 2A, T2 to A + 2B."""
    drawn = diagram(NAMES["gypsum, sulfate"])
    first = next(y for y, title in drawn.titles if title == LIBRATIONS)
    numbers = [words for x, y, words in drawn.loose if 174 < x < 260 and y < first and words.isdigit()]
    assert numbers == ["2", "2"]


# Rousseau, Bauman and Porto 1981, D3d, from memory: A1g xx+yy and zz, Eg, A2u along z, Eu along x and y.
def test_polarization_stands_beside_the_box() -> None:
    drawn = diagram(NAMES["calcite"])
    lines = {round(y - 4.5): words for x, y, words in drawn.loose if x > 615}
    beside = {box.label: lines.get(round(box.middle)) for box in drawn.column(INTERNAL, 2)}
    assert beside["A1g"] == "xx+yy, zz"
    assert beside["A2u"] == "E ∥ z"
    assert beside["Eu"] == "E ∥ (x, y)"
    assert beside["A1u"] is None


def test_style_of_lines_and_borders_follows_the_activity() -> None:
    """Solid infrared, dashed Raman, double both, dotted silent: told apart without colour."""
    root = diagram(NAMES["calcite"]).root
    styles: dict[str, set[tuple[str | None, int]]] = {}
    for group in root.findall(f"{SVG}g"):
        rects = group.findall(f"{SVG}rect")
        marks = [words_of(one) for one in group.findall(f"{SVG}text")[1:] if words_of(one) in ("I", "R", "silent")]
        styles.setdefault("".join(marks), set()).add((rects[2].get("stroke-dasharray"), len(rects)))
    assert set(styles) == {"I", "R", "IR", "silent"}
    assert all(len(found) == 1 for found in styles.values())
    assert len(set.union(*styles.values())) == 4


# Order and places


def least_on_one_side(moving: int, fixed: tuple[int, ...], pairs: list[tuple[int, int]]) -> int:
    """The exact least number of crossings when one column may be set in any order, by subsets."""
    ends = [[fixed.index(end) for start, end in pairs if start == member] for member in range(moving)]
    before = [[sum(x > y for x in one for y in two) for two in ends] for one in ends]
    least = {0: 0}
    for chosen in range(1, 1 << moving):
        members = [k for k in range(moving) if chosen >> k & 1]
        least[chosen] = min(
            least[chosen ^ (1 << last)] + sum(before[k][last] for k in members if k != last) for last in members
        )
    return least[(1 << moving) - 1]


@PARAMETERS
def test_no_order_of_the_boxes_has_fewer_crossings(index: int) -> None:
    """Against the exact optimum over all orders of the three columns."""
    for layers in layers_of(analysed(index), row_of(index)):
        down, up = ([(tie.start, tie.end) for tie in ties] for ties in (layers.down, layers.up))
        sizes = len(layers.free), len(layers.site), len(layers.crystal)
        found = count_crossings(tuple(list(range(size)) for size in sizes), down, up)
        back = [(end, start) for start, end in up]
        best = min(
            least_on_one_side(sizes[0], middle, down) + least_on_one_side(sizes[2], middle, back)
            for middle in itertools.permutations(range(sizes[1]))
        )
        assert found == best


def test_crossings_are_counted_as_geometry_has_them() -> None:
    """A complete graph between two and two has one crossing, between three and three nine (k² (k−1)² / 4)."""
    for k in (2, 3, 4):
        pairs = list(itertools.product(range(k), repeat=2))
        orders = (list(range(k)), list(range(k)), [0])
        assert count_crossings(orders, pairs, []) == k**2 * (k - 1) ** 2 // 4


def test_spread_is_the_monotone_regression_of_scipy() -> None:
    rng = np.random.default_rng(3)
    for size in (1, 2, 5, 12):
        wanted, sizes = rng.uniform(0, 100, size), rng.uniform(1, 20, size)
        offsets = np.concatenate([[0], np.cumsum(sizes + 3)[:-1]]) + sizes / 2
        expected = isotonic_regression(wanted - offsets).x + offsets
        assert spread(wanted.tolist(), sizes.tolist(), 3.0) == pytest.approx(expected)


# The line spectrum


# Nakamoto's free carbonate ion (from memory) with the published components of calcite: exclusion between the two rows.
def test_line_spectrum_of_calcite() -> None:
    found = heads_of(line_spectrum(demo("calcite.cif"), "bands"))
    assert found["infrared"] == [
        ("1415", "ν3", "Eu (x, y)"), ("879", "ν2", "A2u (z)"), ("680", "ν4", "Eu (x, y)"),
    ]  # fmt: skip
    assert found["raman"] == [("1415", "ν3", "Eg"), ("1063", "ν1", "A1g"), ("680", "ν4", "Eg")]


@pytest.mark.parametrize("name", ["calcite", "benzene", "gypsum, water", "sulfur"])
def test_leaders_start_at_their_wavenumbers_on_one_linear_axis_from_high_to_low(name: str) -> None:
    root = Tree.fromstring(line_spectrum(analysed(NAMES[name]), "bands"))
    ticks = {
        float(words_of(one)): float(one.attrib["x"])
        for one in root.findall(f"{SVG}text")
        if words_of(one).replace(".", "").isdigit()
    }
    assert len(ticks) >= 4
    slope, offset = np.polyfit(list(ticks), list(ticks.values()), 1)
    assert slope < 0
    for group in root.findall(f"{SVG}g"):
        wavenumber = float(words_of(group.findall(f"{SVG}text")[-2 if name != "gypsum, water" else -3]))
        start = float(re.findall(r"[\d.]+", group.find(f"{SVG}path").attrib["d"])[0])
        assert start == pytest.approx(slope * wavenumber + offset, abs=0.2)


@pytest.mark.parametrize("index", [k for k in range(len(CASES)) if analysed(k).molecular.bands])
def test_groups_of_the_line_spectrum_stand_apart_and_inside(index: int) -> None:
    root = Tree.fromstring(line_spectrum(analysed(index), "bands"))
    width, height = (float(value) for value in root.attrib["viewBox"].split()[2:])
    spans: dict[bool, list[tuple[float, float]]] = {True: [], False: []}
    for group in root.findall(f"{SVG}g"):
        bar, *sticks = group.findall(f"{SVG}line")
        ends = [float(bar.attrib[name]) for name in ("x1", "x2")] + [float(one.attrib["x1"]) for one in sticks]
        spans[float(sticks[0].attrib["y2"]) < float(sticks[0].attrib["y1"])].append((min(ends), max(ends)))
    for found in spans.values():
        assert all(one[1] < two[0] for one, two in itertools.pairwise(sorted(found)))
        assert all(low > 0 and high < width for low, high in found)
    assert all(0 < float(one.attrib["y"]) < height for one in root.iter(f"{SVG}text"))
