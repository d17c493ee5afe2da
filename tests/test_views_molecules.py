"""Molecules in the printed report, drawing and sentences, against the published correlations."""

from __future__ import annotations

import re

import pytest
from diagram_reader import read_diagram
from molecule_shapes import all_shapes
from test_fate import CASES, NAMES, analysed, row_of
from unit_crystals import listed
from views_cases import ascii_labels

from sitesym.analysis import analyse
from sitesym.views import layout, text
from sitesym.views import molecule_sentences as words
from sitesym.views.correlation_diagram import correlation_diagram
from sitesym.views.molecule_text import unit_sections

PARAMETERS = pytest.mark.parametrize("name", NAMES)
GREEK = {"Sigma": "Σ", "Pi": "Π", "Delta": "Δ", "_": "", "+": "⁺"}


def printed(label: str) -> str:
    """A label of the reference as the text prints it, by rules written here."""
    label = label.replace("''", "″").replace("'", "′")
    for plain, sign in GREEK.items():
        label = label.replace(plain, sign)
    return re.sub(r"(?<=[A-Z])\d", lambda digit: "₀₁₂₃₄₅"[int(digit[0])], label)


def section(name: str, start: str) -> str:
    """One section of the text, its lines joined."""
    lines = next(lines for title, lines in unit_sections(analysed(name)) if title.startswith(start))
    return " ".join(" ".join(lines).split())


# The drawing


@PARAMETERS
def test_the_drawing_reads_back_as_the_published_correlation(name: str) -> None:
    """Free species to site species to species of the crystal, followed along the drawn lines."""
    reference = CASES[NAMES.index(name)]
    diagram = read_diagram(correlation_diagram(analysed(name), row_of(name)))
    for vibration in reference["vibrations"]:
        free = printed(vibration["species"])
        site = {target: count for (source, target), count in diagram.down.items() if source == free}
        if "site_axes" not in reference:  # else its labels of the site refer to other axes (see test_correlations)
            assert site == {printed(label): count for label, count in vibration["site"].items()}
        crystal: dict[str, int] = {}
        for (target, source), count in diagram.up.items():
            if source in site:
                crystal[target] = crystal.get(target, 0) + count * site[source]
        assert crystal == {printed(label): count for label, count in vibration["crystal"].items()}


@PARAMETERS
def test_letters_beside_the_drawing_are_the_published_activity(name: str) -> None:
    reference = CASES[NAMES.index(name)]
    diagram = read_diagram(correlation_diagram(analysed(name), row_of(name)))
    for vibration in reference["vibrations"]:
        infrared, raman = vibration["free_infrared"], vibration["free_raman"]
        expected = f"{'I' if infrared else '-'} {'R' if raman else '-'}"
        assert diagram.letters["free"][printed(vibration["species"])] == expected
        for label in vibration["crystal"]:
            seen = (label in reference["crystal_infrared"], label in reference["crystal_raman"])
            assert diagram.letters["crystal"][printed(label)] == f"{'I' if seen[0] else '-'} {'R' if seen[1] else '-'}"


@PARAMETERS
def test_every_line_fits_a_terminal_of_80_columns(name: str) -> None:
    report = text.render(analysed(name))
    assert max(map(layout.width, report.splitlines())) <= 80
    assert "\u00a0" not in report


def test_calcite_is_drawn_so() -> None:
    """Free ion, site and crystal side by side, lines between, polarization on the right (Halford 1946)."""
    assert "\n".join(correlation_diagram(analysed("calcite"), row_of("calcite"))) == (
        "free D₃h                 site D₃            crystal D₃d\n"
        "A₁′ ν1      - R ──────── A₁ - R ──┬──────── A₁g - R\n"
        "                                  └──────── A₁u - -\n"
        "A₂′ L       - - ─────┬── A₂ I - ─────┬───── A₂g - -\n"
        "A₂″ ν2 T    I - ─────┘               └───── A₂u I - E ∥ z\n"
        "E′  ν3 ν4 T I R ──┬───── E  I R ────────┬── Eg  - R\n"
        "E″  L       - R ──┘                     └── Eu  I - E ∥ (x, y)"
    )


# The sentences


def test_sentences_on_calcite_say_what_the_literature_says() -> None:
    """Halford 1946 and Fateley and others 1971: nu1 Raman only, nu2 infrared along c, nu3 and nu4 one band in each."""
    said = section("calcite", "CO₃")
    assert (
        "ν3 (E′ stretching, near 1415 cm⁻¹, infrared and Raman in the free ion) keeps its degeneracy on the D₃ site "
        "(E), splits into Eg (Raman) + Eu (infrared E ∥ (x, y)) by the correlation field: one band in each."
    ) in said
    assert (
        "ν1 (A₁′ stretching, near 1063 cm⁻¹, Raman only in the free ion) becomes A₁ on the D₃ site, splits into A₁g "
        "(Raman) + A₁u (silent) by the correlation field: one Raman band."
    ) in said
    assert "A₂g (silent) + A₂u (infrared E ∥ z) by the correlation field: one infrared band." in said
    assert "two such ions in the primitive cell" in said
    assert "z (normal to the plane) ∥ c" in said


@pytest.mark.parametrize(
    ("name", "start", "sentence"),
    [
        ("aragonite", "CO₃", "becomes A′ on the Cs site, which allows infrared, and splits into"),
        ("aragonite", "CO₃", "is split by the Cs site into A′ + A″; the correlation field splits A′ into Ag"),
        ("scheelite", "WO₄", "is only partly split by the S₄ site into B + E"),
        ("potassium hexachloroplatinate", "PtCl₆", "With one such ion in the primitive cell the correlation field"),
        ("potassium hexachloroplatinate", "PtCl₆", "degeneracy on the Oh site (T₂u), and becomes T₂u (silent) in"),
        ("potassium hexafluoroarsenate", "AsF₆", "ν6 (T₂u bending, silent in the free ion) is only partly split by the "
         "S₆ site into Au + Eu, which allows infrared, and gives Au (infrared E ∥ z) + Eu (infrared E ∥ (x, y)) in the "
         "crystal: two infrared bands."),
        ("carbon dioxide", "CO₂", "The unit sits on a centre of inversion"),
        ("urea", "CH₄N₂O", "become E (infrared E ∥ (x, y) and Raman) in the crystal: each gives one band, in"),
        ("benzene", "C₆H₆", "ν10 (E₁g out-of-plane, near 847 cm⁻¹, Raman only in the free molecule) is split by the Ci "
         "site into 2Ag; the correlation field splits each Ag into Ag + B₁g + B₂g + B₃g (all Raman): eight Raman"),
        ("hexamine", "C₆H₁₂N₄", "T₂ stretching vibrations (infrared and Raman in the free molecule) keep their"),
        ("hexamine", "C₆H₁₂N₄", "infrared and Raman exclude nothing"),
        ("sodium azide", "N₃", "z ∥ c"),
        ("carbon dioxide", "CO₂", "z ∥ [111]"),
    ],
)  # fmt: skip
def test_sentences_of_other_crystals(name: str, start: str, sentence: str) -> None:
    """Each follows from the published correlation of the crystal; sources in tests/reference/correlations.toml."""
    assert sentence in section(name, start)


@PARAMETERS
def test_the_number_of_bands_in_words_is_the_published_one(name: str) -> None:
    """The end of every sentence, read back, against the published species and their activity."""
    numbers = ["no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten", "eleven", "twelve"]
    reference, row = CASES[NAMES.index(name)], row_of(name)
    for index, vibration in enumerate(row.correlation.vibrations):
        end = words.vibration_sentence(analysed(name), row, index).rpartition(": ")[2]
        published = next(one for one in reference["vibrations"] if one["species"] == vibration.species)["crystal"]
        found = re.search(r"(\w+) infrared(?: bands)? and (\w+) Raman bands?", end)
        for kind, place, active in (
            ("infrared", 1, reference["crystal_infrared"]), ("Raman", 2, reference["crystal_raman"]),
        ):  # fmt: skip
            wanted = sum(count for label, count in published.items() if label in active)
            if found:
                said = found[place]
            elif "in each" in end:
                said = "one"
            elif single := re.search(rf"(\w+) {kind} band|(\w+) bands?, in infrared and Raman alike", end):
                said = single[1] or single[2]
            else:
                said = "no"
            assert (int(said) if said.isdigit() else numbers.index(said)) == wanted, end


def test_inequivalent_units_are_told_and_have_a_diagram_each() -> None:
    """Two waters on different sites give up to twice as many OH bands (common practice): water twice in P-1."""
    structure = two_waters()
    result = analyse(structure, scan=False)
    report = " ".join(text.render(result).split())
    assert (
        "There are two inequivalent kinds of water (H₂O), on C₁ sites: up to twice as many O-H "
        "stretching bands as for one kind."
    ) in report
    titles = [title for title, _ in unit_sections(result)]
    assert "H₂O with O1: from the free molecule to the crystal" in titles
    assert "H₂O with O2: from the free molecule to the crystal" in titles


def two_waters():
    """Two kinds of water in P-1, hydrogen atoms 0.96 Å from the oxygen."""
    import numpy as np

    from sitesym.structure import Occupant, Site, Structure

    lattice = np.array([[6.1, 0, 0], [0.4, 6.7, 0], [0.7, 0.9, 7.3]])
    water = all_shapes()["water"]
    order = sorted(range(3), key=lambda k: water.elements[k] != "O")
    positions, sites = [], []
    for number, (place, tilt) in enumerate((((0.2, 0.2, 0.2), 0.3), ((0.7, 0.25, 0.6), 1.1)), 1):
        turn = np.array([[np.cos(tilt), -np.sin(tilt), 0], [np.sin(tilt), np.cos(tilt), 0], [0, 0, 1]])
        atoms = np.array(place) @ lattice + (water.positions[order] - water.positions[order[0]]) @ turn.T
        for sign in (1, -1):
            positions += list(sign * atoms @ np.linalg.inv(lattice))
            sites += [Site(f"{water.elements[k]}{number}", (Occupant(water.elements[k]),)) for k in order]
    return Structure(lattice, np.array(positions) % 1, tuple(sites))


@pytest.mark.parametrize(
    ("name", "words_"),
    [
        ("quartz", "Si₃O₆ is a three-dimensional net, not a molecule"),
        ("diopside", "Si₂O₆ is an endless chain, not a molecule"),
        ("molybdenite", "MoS₂ is an endless layer, not a molecule"),
    ],
)
def test_chains_layers_and_nets_are_said_and_counted_by_sites(name: str, words_: str) -> None:
    """Common practice: quartz a framework, pyroxenes chains, molybdenite layers."""
    result = analyse(listed(name), scan=False)
    report = " ".join(text.render(result).split())
    assert words_ in report
    assert "counted by atomic sites" in report
    assert "There is no molecule or complex ion" in report
    assert "framework" in report


def test_a_strongly_distorted_common_ion_is_told() -> None:
    """The SiO4 of zircon has angles of 97 and 116 degrees (Hazen and Finger 1979, from memory)."""
    assert "was taken because SiO₄ of this group is a common unit" in section("zircon", "SiO₄")
    own = analyse(analysed("zircon").structure, scan=False, molecule_tolerance=0.1)
    assert own.molecular.molecules[0].free.group.schoenflies == "D2d"
    assert "your tolerance of 0.1 Å" in " ".join(text.render(own).split())


def test_the_first_screen_names_the_units() -> None:
    assert "Units          2 CO₃ (D₃h on D₃); 2 Ca" in text.first_screen(analysed("calcite"))[0]
    assert not any(
        line.startswith("Units")
        for line in text.first_screen(analyse(analysed("calcite").structure, scan=False, molecules=False))[0]
    )


@PARAMETERS
def test_the_first_screen_still_fits(name: str) -> None:
    assert len(text.first_screen(analysed(name))[0]) <= text.SCREEN


def test_origins_of_calcite_are_the_published_ones() -> None:
    """Table of calcite in Rousseau, Bauman and Porto 1981 (from memory): internal A1g + A2g + 2Eg + A1u + A2u + 2Eu,
    librations A2g + Eg + A2u + Eu, the rest translations."""
    lines = text.render(analysed("calcite")).splitlines()
    start = lines.index("Where the optic modes come from") + 2
    rows = {ascii_labels(line.split()[0]): line.split()[1:] for line in lines[start + 1 : start + 7]}
    assert lines[start].split() == ["species", "optic", "translational", "librational", "internal"]
    assert rows == {
        "A1g": ["1", "·", "·", "1"], "A2g": ["3", "1", "1", "1"], "Eg": ["4", "1", "1", "2"],
        "A1u": ["2", "1", "·", "1"], "A2u": ["3", "1", "1", "1"], "Eu": ["5", "2", "1", "2"],
    }  # fmt: skip
