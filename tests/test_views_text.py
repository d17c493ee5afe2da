"""The printed report against published results, and against what a terminal can show."""

from __future__ import annotations

import re
from dataclasses import replace

import pytest
from views_cases import (
    ENTRIES,
    ESCAPES,
    HOSTILE,
    ascii_labels,
    case,
    disordered,
    renamed,
    sum_of,
    triclinic,
    with_questions,
)

from sitesym.analysis import analyse
from sitesym.views import labels, layout, method, sentences, text

PUBLISHED = [
    "rutile", "anatase", "zircon", "scheelite", "chalcopyrite", "corundum (alpha-alumina)", "calcite",
    "alpha-quartz", "lithium niobate", "bismuth telluride", "wurtzite (zinc oxide)", "molybdenite 2H", "graphite",
    "yttrium aluminium garnet", "spinel", "fluorite", "diamond", "carbon dioxide, solid", "forsterite",
    "lanthanum manganite", "aragonite", "baddeleyite", "gypsum", "kyanite", "sodium nitrite",
]  # fmt: skip
"""Sources stand in tests/reference/decompositions.toml, entry by entry."""


def section(report: str, title: str) -> list[str]:
    """The lines below an underlined heading, up to the next one."""
    lines = report.splitlines()
    start = lines.index(title) + 2
    ends = [n for n in range(start, len(lines)) if re.fullmatch(r"─+", lines[n]) and not lines[n - 2]]
    return lines[start : ends[0] - 2 if ends else None]


def joined(lines: list[str]) -> str:
    return " ".join(" ".join(lines).split())


@pytest.mark.parametrize("name", PUBLISHED)
def test_printed_decomposition_is_the_published_one(name: str) -> None:
    """The line Γ(optic) = … of the first screen, read back, is the literature's sum."""
    screen = "\n".join(text.first_screen(case(name))[0])
    printed = re.search(r"Γ\(optic\) += (.*?)\nΓ", screen, re.DOTALL)
    assert printed is not None
    assert sum_of(printed[1]) == ENTRIES[name]["optic"]


@pytest.mark.parametrize("name", PUBLISHED)
def test_printed_counts_are_the_published_ones(name: str) -> None:
    """Infrared, Raman and silent lines: number of frequencies and species."""
    entry = ENTRIES[name]
    screen = "\n".join(text.first_screen(case(name))[0])
    for title, key in (("Infrared", "infrared"), ("Raman", "raman"), ("Silent", "silent")):
        line = re.search(rf"^  {title} +(\d+) +(.*(?:\n {{20}}.*)*)$", screen, re.MULTILINE)
        assert line is not None
        expected = {label: entry["optic"][label] for label in entry[key]}
        assert (int(line[1]), sum_of(line[2])) == (sum(expected.values()), expected)


def test_rutile_reads_as_in_the_literature() -> None:
    """Porto, Fleury, Damen, Phys. Rev. 154, 522 (1967), from memory: A1g + A2g + A2u + B1g + B2g + 2B1u + Eg + 3Eu."""
    report = text.render(case("rutile"))
    assert "Γ(optic)    = A₁g + A₂g + B₁g + B₂g + Eg + A₂u + 2B₁u + 3Eu" in report
    assert "Γ(acoustic) = A₂u + Eu" in report
    assert "Space group    P4₂/mnm (number 136)" in report
    assert "Factor group   D₄h (4/mmm), order 16" in report


def test_site_table_of_calcite_is_that_of_printed_factor_group_analyses() -> None:
    """Rousseau, Bauman and Porto, J. Raman Spectrosc. 10, 253 (1981), the worked example of calcite, from memory."""
    rows = {
        line.split()[0]: line.split()[1:]
        for line in section(text.render(case("calcite")), "What each site contributes")
    }
    assert [ascii_labels(label) for label in rows.pop("A₁g")] == ["A2g", "Eg", "A1u", "A2u", "Eu"]
    counts = {name: [int(cell.replace("·", "0")) for cell in cells] for name, cells in rows.items() if cells}
    contributions = ENTRIES["calcite"]["contributions"]
    columns = ("A1g", "A2g", "Eg", "A1u", "A2u", "Eu")
    assert {name: counts[name] for name in contributions} == {
        name: [row.get(label, 0) for label in columns] for name, row in contributions.items()
    }
    assert counts["total"] == [1, 3, 4, 2, 4, 6]
    assert counts["acoustic"] == [0, 0, 0, 0, 1, 1]
    assert counts["optic"] == [1, 3, 4, 2, 3, 5]


def test_tensors_of_calcite_have_the_shape_of_loudons_table() -> None:
    """Loudon, Adv. Phys. 13, 423 (1964), class D3d, from memory: a a b; c -c, d d; -c -d."""
    assert "\n".join(section(text.render(case("calcite")), "Raman tensors")).rstrip() == (
        "A₁g            Eg(1)           Eg(2)\n"
        "⎡ a  ·  · ⎤    ⎡ c   ·  · ⎤    ⎡  ·  −c  −d ⎤\n"
        "⎢ ·  a  · ⎥    ⎢ ·  −c  d ⎥    ⎢ −c   ·   · ⎥\n"
        "⎣ ·  ·  b ⎦    ⎣ ·   d  · ⎦    ⎣ −d   ·   · ⎦"
    )


def test_polar_directions_stand_beside_tensors() -> None:
    """Loudon 1964, class D3 (from memory): E(x) has c, -c and d, E(y) the off-diagonal ones; A1 has no dipole."""
    lines = section(text.render(case("alpha-quartz")), "Raman tensors")
    assert lines[0].split() == ["A₁", "E(x)", "E(y)"]
    assert "In brackets after a species: the direction of the dipole" in joined(lines)


@pytest.mark.parametrize(
    ("name", "species", "infrared", "raman"),
    [
        ("calcite", "A2u", "E ∥ z", ""),
        ("calcite", "Eu", "E ∥ (x, y)", ""),
        ("calcite", "A1g", "", "xx+yy, zz"),
        ("calcite", "Eg", "", "(xx−yy, xy), (yz, xz)"),
        ("diamond", "Eg", "", "(xx+yy−2zz, xx−yy)"),
        ("diamond", "T2g", "", "(yz, xz, xy)"),
        ("diamond", "T1u", "E ∥ (x, y, z)", ""),
        ("scheelite", "Bg", "", "xx−yy, xy"),
        ("gypsum", "Au", "E ∥ y", ""),
        ("gypsum", "Bu", "E in plane (x, z)", ""),
        ("gypsum", "Bg", "", "xy, yz"),
        ("kyanite", "Au", "E not fixed", ""),
        ("forsterite", "B1g", "", "xy"),
        ("forsterite", "B1u", "E ∥ z", ""),
    ],
)
def test_activity_words_agree_with_character_tables(name: str, species: str, infrared: str, raman: str) -> None:
    """Last columns of printed character tables (for example Wilson, Decius and Cross 1955, appendix X; from memory)."""
    row = case(name).species_row(species)
    assert (sentences.infrared_words(row), sentences.raman_words(row)) == (infrared, raman)


def test_monoclinic_and_triclinic_directions_are_said_to_be_open() -> None:
    """Common practice: in a monoclinic crystal only the unique axis fixes a dipole, in a triclinic one nothing does."""
    monoclinic = joined(section(text.render(case("gypsum")), "Species"))
    assert "Bu: the dipole lies in the plane (x, z), but its direction there is not fixed by symmetry" in monoclinic
    assert "Au: the" not in monoclinic
    free = joined(section(text.render(case("kyanite")), "Species"))
    assert "Au: the direction of the dipole in space is not fixed by symmetry" in free
    assert "not fixed" not in joined(section(text.render(case("alpha-quartz")), "Species"))


def test_exclusion_is_said_under_inversion_only() -> None:
    """Rule of mutual exclusion (common practice); quartz has E modes in both spectra, cubic class O has none (432)."""
    assert "infrared and Raman exclude each other" in text.render(case("calcite"))
    quartz = joined(section(text.render(case("alpha-quartz")), "Species"))
    assert "no centre of inversion: E can be active in both infrared and Raman." in quartz
    assert "exclude" not in quartz
    cubic = joined(section(text.render(case("strontium disilicide, cubic")), "Species"))
    assert "no centre of inversion, yet in this class no species is active in both" in cubic


def test_silent_modes_are_named_with_what_can_show_them() -> None:
    """Rutile: A2g and B1u are silent (Porto 1967, from memory); B1u is in the third-rank tensor, A2g is odd to it."""
    notes = joined(section(text.render(case("rutile")), "Species"))
    assert "Silent in infrared and Raman: A₂g + 2B₁u. Of these, hyper-Raman scattering may show B₁u." in notes
    assert "antisymmetric part of the Raman tensor can show A₂g (xy−yx)" in notes
    assert "No optic mode is silent." in text.render(case("gypsum"))


def test_labels_are_translated_to_the_standard_setting() -> None:
    """Perovskites: 7Ag + 5B1g + 7B2g + 5B3g in Pnma (Iliev 1998) are 7Ag + 7B1g + 5B2g + 5B3g in Pbnm; from memory."""
    lines = section(text.render(case("calcium titanate")), "Labels in other settings")
    rows = {line.split()[0]: line.split() for line in lines if re.match(r"P[a-z₁]{3} ", line)}
    assert rows["Pbnm"][4:] == ["B₁g", "B₂g", "B₃g", "B₁u", "B₂u", "B₃u", "this", "report"]
    assert rows["Pnma"][4:7] == ["B₂g", "B₃g", "B₁g"]
    assert rows["Pnma"][-1] == "standard"
    assert len(rows) == 6
    assert "Labels in other settings" not in text.render(case("rutile"))


@pytest.mark.parametrize(
    ("name", "divided"),
    [("molybdenite 2H", True), ("wurtzite (zinc oxide)", True), ("beta-quartz", True)]
    + [(name, False) for name in ("calcite", "rutile", "tungsten carbide", "fluorapatite", "diamond")],
)
def test_note_on_b_species_of_hexagonal_classes(name: str, divided: bool) -> None:
    """Only classes with B1 and B2 about a sixfold axis (D6, C6v, D6h) have names that the literature is divided on."""
    assert ("literature is divided" in joined(text.render(case(name)).splitlines())) is divided


@pytest.mark.parametrize("name", [*PUBLISHED, "urea", "tungsten carbide", "sulfur, alpha", "fluorapatite"])
def test_lines_keep_to_eighty_columns_and_the_answer_to_one_screen(name: str) -> None:
    """Nothing wraps in a terminal of 80 columns, and the first 24 lines hold the answer."""
    report = text.render(case(name)).splitlines()
    assert max(map(layout.width, report)) <= 80
    assert not any(line != line.rstrip() for line in report)
    screen = "\n".join(report[:24])
    for words in (
        "Space group",
        "Factor group",
        "Axes",
        "Γ(optic)",
        "Γ(acoustic)",
        "Infrared",
        "Raman",
        "Both",
        "Silent",
    ):
        assert words in screen
    assert "caution" in screen


def test_cautions_that_change_counts_stand_above_the_counts() -> None:
    """Missing hydrogen is read before any number; milder cautions follow the counts."""
    screen = "\n".join(text.first_screen(with_questions(case("calcite"), "deuterium", "hydrogen_missing"))[0])
    assert screen.index("(hydrogen_missing)") < screen.index("Infrared") < screen.index("(deuterium)")


def test_many_cautions_leave_the_first_screen_whole() -> None:
    """What finds no room on the first screen is counted there and printed in full below."""
    crowded = with_questions(case("yttrium aluminium garnet"), *["hydrogen_missing"] * 4, *["disorder"] * 5)
    screen, left = text.first_screen(crowded)
    report = text.render(crowded)
    assert len(screen) <= 24
    assert left > 0
    assert screen[-1] == f"{left} more in full under 'All cautions' below."
    assert [f"Question {n} " in joined(section(report, "All cautions")) for n in range(9)] == [True] * 9


def test_no_caution_is_said_too() -> None:
    assert "No cautions: nothing doubtful was found" in text.render(case("calcite"))
    assert "All cautions" not in text.render(case("calcite"))


def test_disorder_is_said_on_the_first_screen_and_at_the_site() -> None:
    report = text.render(analyse(disordered()))
    assert "6 of 30 sites are partly or jointly occupied" in joined(report.splitlines()[:24])
    assert "Ca1 (Ca/Mg 1)" in joined(section(report, "Sites"))
    assert "counted as if full (average structure)" in joined(section(report, "Method"))


def test_hostile_names_cannot_steer_the_terminal() -> None:
    """Escape sequences, bells, reversed writing and line breaks of a file's names come out as marks."""
    report = text.render(renamed(case("rutile"), ESCAPES, ESCAPES))
    assert not set(report) & {"\x1b", "\x07", "\r", "\u202e"}
    assert max(map(layout.width, report.splitlines())) <= 80
    assert "<script>" in text.render(renamed(case("rutile"), HOSTILE))


def test_tolerance_section_joins_equal_neighbours() -> None:
    scanned = case("strontium titanate, tetragonal")
    assert scanned.scan is not None
    runs = sentences.scan_runs(scanned)
    spelled = [point.number for point in scanned.scan.points]
    assert [run.number for run in runs] == [n for i, n in enumerate(spelled) if i == 0 or spelled[i - 1] != n]
    assert sum(run.used for run in runs) == 1
    assert "No other tolerance was tried." in text.render(analyse(scanned.structure, scan=False))


def test_text_is_the_same_in_every_terminal(monkeypatch: pytest.MonkeyPatch) -> None:
    before = text.render(case("calcite"))
    monkeypatch.setenv("COLUMNS", "40")
    monkeypatch.setenv("TERM", "dumb")
    assert text.render(case("calcite")) == before


@pytest.mark.parametrize("name", ["calcite", "forsterite", "kyanite"])
def test_method_note_cites_what_it_lists(name: str) -> None:
    """Every number in brackets has a reference and every reference is cited, first ones first."""
    cited = [
        int(number)
        for paragraph in method.paragraphs(case(name))
        for group in re.findall(r"\[([\d, ]+)\]", paragraph.text)
        for number in group.split(", ")
    ]
    assert list(dict.fromkeys(cited)) == list(range(1, len(method.references(case(name))) + 1))
    assert f"at a tolerance of {case(name).symmetry.tolerance:g} Å" in method.paragraphs(case(name))[0].text


def test_a_structure_without_file_or_name_prints() -> None:
    report = text.render(analyse(triclinic(), scan=False))
    assert report.startswith("CHN\n")
    assert "File" not in report
    assert "The file declares no space group." in report
    assert "Γ(optic)    = 6A" in report


@pytest.mark.parametrize(
    ("label", "unicode", "html", "latex"),
    [
        ("A1g", "A₁g", "A<sub>1g</sub>", "$A_{1g}$"),
        ("E'", "E′", "E′", "$E'$"),
        ("A2''", "A₂″", "A<sub>2</sub>″", "$A_{2}''$"),
        ("Sigma_g+", "Σg⁺", "Σ<sub>g</sub><sup>+</sup>", "$\\Sigma_{g}^+$"),
        ("Pi_u", "Πu", "Π<sub>u</sub>", "$\\Pi_{u}$"),
        ("B", "B", "B", "$B$"),
    ],
)
def test_species_are_typeset(label: str, unicode: str, html: str, latex: str) -> None:
    """Mulliken's symbols (J. Chem. Phys. 23, 1997, 1955) as printed: numbers and parity low, primes high."""
    assert (labels.text(label), labels.html(label), labels.latex(label)) == (unicode, html, latex)


def test_what_is_no_species_is_refused() -> None:
    with pytest.raises(ValueError, match="no symbol of a species"):
        labels.html("<b>")


@pytest.mark.parametrize(
    ("symbol", "unicode", "latex"),
    [
        ("P4_2/mnm", "P4₂/mnm", "$P4_2/mnm$"),
        ("R-3c", "R3\u0304c", "$R\\bar{3}c$"),
        ("P-42_1m", "P4\u03042₁m", "$P\\bar{4}2_1m$"),
        ("P2_12_12_1", "P2₁2₁2₁", "$P2_12_12_1$"),
        ("-10m2", "1\u03040\u0304m2", "$\\bar{10}m2$"),
        (".-3m", ".3\u0304m", "$.\\bar{3}m$"),
    ],
)
def test_hermann_mauguin_symbols_are_typeset(symbol: str, unicode: str, latex: str) -> None:
    """Overbars and screw indices as in International Tables A."""
    assert (labels.space_group_text(symbol), labels.space_group_latex(symbol)) == (unicode, latex)


def test_widths_are_those_of_a_terminal() -> None:
    """Combining marks take no place, East Asian characters two (Unicode Standard Annex 11)."""
    assert layout.width("R3\u0304c") == 3
    assert layout.width("方解石") == 6
    assert layout.clip("方解石 calcite", 6) == "方解…"
    lines = layout.wrap("x" * 200 + " word " * 30, indent="  ")
    assert max(map(layout.width, lines)) <= 80
    assert "".join("".join(lines).split()) == "x" * 200 + "word" * 30


def test_labels_of_sites_may_be_long_or_empty() -> None:
    long = renamed(case("rutile"), "n" * 500, "L" * 300)
    assert max(map(layout.width, text.render(long).splitlines())) <= 80
    bare = analyse(replace(long.structure, sites=tuple(replace(site, label="") for site in long.structure.sites)))
    assert "What each site contributes" in text.render(bare)
