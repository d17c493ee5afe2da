"""CSV, LaTeX and Markdown: right numbers, sound syntax, and names of strangers that do no harm."""

from __future__ import annotations

import csv
import io
import re
from dataclasses import replace
from functools import partial

import pytest
from markdown_it import MarkdownIt
from markdown_it.token import Token
from views_cases import (
    ENTRIES,
    ESCAPES,
    FORMULA,
    HOSTILE,
    SPECIALS,
    ascii_labels,
    case,
    disordered,
    renamed,
    sum_of,
    triclinic,
    with_questions,
)

from sitesym.analysis import analyse
from sitesym.structure import OpenQuestion
from sitesym.views import csv as csv_view
from sitesym.views import labels, latex, markdown, text

NAMES = ["calcite", "rutile", "alpha-quartz", "forsterite", "gypsum", "tungsten carbide", "yttrium aluminium garnet"]
ATTACKS = [HOSTILE, FORMULA, ESCAPES, SPECIALS, "| a | b |\n|---|---|", "`code` [link](javascript:alert(1)) **b**"]


# CSV


def rows_of(table: str) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(table)))


@pytest.mark.parametrize("name", NAMES)
def test_csv_tables_hold_the_published_numbers(name: str) -> None:
    """Against tests/reference/decompositions.toml, where the sources stand."""
    entry = ENTRIES[name]
    species = {row["species"]: row for row in rows_of(csv_view.species_table(case(name)))}
    assert {label: int(row["optic"]) for label, row in species.items() if row["optic"] != "0"} == entry["optic"]
    active = {label for label, row in species.items() if row["infrared"] == "yes" and row["optic"] != "0"}
    assert active == set(entry["infrared"])
    sites = {row["label"]: row for row in rows_of(csv_view.sites_table(case(name)))}
    found = {site: {key: int(row[key]) for key in species if row[key] != "0"} for site, row in sites.items()}
    assert found == entry["contributions"]


def test_csv_document_is_its_tables_with_empty_lines_between() -> None:
    first, second, third, fourth = csv_view.render(case("calcite")).split("\n\n")
    assert first + "\n" == csv_view.species_table(case("calcite"))
    assert second + "\n" == csv_view.sites_table(case("calcite"))
    assert third + "\n" == csv_view.molecules_table(case("calcite"))
    assert fourth == "code,message\n"


def test_csv_has_no_table_of_molecules_where_there_are_none() -> None:
    """Rutile is a three-dimensional net."""
    heads = [one.partition(",")[0] for one in csv_view.render(case("rutile")).split("\n\n")]
    assert heads == ["species", "label", "code"]


def test_csv_carries_the_cautions() -> None:
    """Each caution with its code, in the order of the report; a message that looks like a formula is made harmless."""
    doubtful = with_questions(case("rutile"), "hydrogen_missing", "deuterium")
    rows = rows_of(csv_view.render(doubtful).split("\n\n")[-1])
    assert [(row["code"], row["message"]) for row in rows] == [(one.code, one.message) for one in doubtful.cautions]
    assert {"hydrogen_missing", "deuterium"} <= {row["code"] for row in rows}
    bad = analyse(replace(doubtful.structure, questions=(OpenQuestion("odd", FORMULA),)))
    assert rows_of(csv_view.cautions_table(bad.cautions))[-1]["message"] == f"'{FORMULA}"


def test_csv_symbols_of_site_groups_are_as_in_the_tables() -> None:
    """International Tables A, from memory: 4a of I 4_1/a m d is -4m2, 6b of R -3 c -3., 8a of F d -3 m -43m."""
    for name, symbol in (("zircon", "-4m2"), ("calcite", "-3."), ("diamond", "-43m")):
        assert symbol in {row["site_group_symbol"] for row in rows_of(csv_view.sites_table(case(name)))}


@pytest.mark.parametrize("name", ["rutile", "calcite"])
def test_silent_stands_in_the_raman_column_of_every_document(name: str) -> None:
    """One place for the word: text, Markdown and LaTeX as on the page (see tests/test_views_html.py)."""
    shown = [row for row in case(name).species if row.activity.silent]
    assert shown
    section = text.render(case(name)).partition("\nSpecies\n")[2].partition("\n\n")[0]
    printed = {line.split()[0]: line.split() for line in section.splitlines() if line.strip()}
    table = next(one for one in tables_of(markdown.render(case(name))) if one[0][:2] == ["species", "total"])
    cells = {ascii_labels(row[0]): row for row in table[1:]}
    for row in shown:
        assert printed[labels.text(row.label)][4:6] == ["·", "silent"]
        assert cells[row.label][4:6] == ["", "silent"]
        assert f"{labels.latex(row.label)} & {row.total} & {row.acoustic} & {row.optic} &  & silent & " in latex.render(
            case(name)
        )


@pytest.mark.parametrize("label", [FORMULA, "+1", "-1+2", "@SUM(A1)", "\t=1", "\r=1", "  =1", "=HYPERLINK(1)"])
def test_csv_cells_are_no_formulas(label: str) -> None:
    """OWASP's advice on CSV injection (common practice): no text cell begins with = + - @, tab or carriage return."""
    for row in csv.reader(io.StringIO(csv_view.render(renamed(case("rutile"), label, label)))):
        for cell in row:
            assert re.fullmatch(r"-?\d+(\.\d+)?", cell) or not cell.lstrip().startswith(("=", "+", "-", "@")), cell
    assert rows_of(csv_view.sites_table(renamed(case("rutile"), label, label)))[0]["label"].startswith("'")


def test_csv_keeps_commas_quotes_and_numbers_apart() -> None:
    sites = rows_of(csv_view.sites_table(renamed(case("urea"), "", 'a,"b",c')))
    assert sites[0]["label"] == 'a,"b",c'
    assert all(-1 < float(site[axis]) < 1 for site in sites for axis in "xyz")


# LaTeX


def without_escapes(document: str) -> str:
    return re.sub(r"\\[\\{}$&#%_]", "", document)


LATEX_CASES = {
    **{name: partial(case, name) for name in NAMES},
    **{
        f"attack {n}": partial(lambda text: renamed(case("forsterite"), text, text), one)
        for n, one in enumerate(ATTACKS)
    },
    "triclinic": lambda: analyse(triclinic()),
    "disordered": lambda: analyse(disordered()),
    "doubtful": lambda: with_questions(case("rutile"), "hydrogen_missing"),
}


@pytest.mark.parametrize("name", LATEX_CASES)
def test_latex_is_balanced(name: str) -> None:
    """Environments nest, braces and dollars pair, nothing is outside ASCII."""
    document = latex.render(LATEX_CASES[name]())
    open_environments: list[str] = []
    for kind, name in re.findall(r"\\(begin|end)\{(\w+)\}", document):
        if kind == "begin":
            open_environments.append(name)
        else:
            assert open_environments.pop() == name
    assert open_environments == []
    bare = without_escapes(document)
    assert bare.count("{") == bare.count("}")
    assert all(line.count("$") % 2 == 0 for line in bare.splitlines())
    assert document.isascii()


@pytest.mark.parametrize("name", LATEX_CASES)
def test_latex_rows_fit_their_columns(name: str) -> None:
    document = latex.render(LATEX_CASES[name]())
    for columns, body in re.findall(r"\\begin\{tabular\}\{(\w+)\}\n(.*?)\\end\{tabular\}", document, re.DOTALL):
        for line in body.splitlines():
            if line == "\\hline":
                continue
            inside = re.sub(r"\\begin\{array\}.*?\\end\{array\}", "", line)
            assert len(re.findall(r"(?<!\\)&", inside)) == len(columns) - 1
            assert line.endswith(" \\\\")


@pytest.mark.parametrize("attack", ATTACKS)
def test_latex_commands_are_ours_alone(attack: str) -> None:
    """A name adds no command that reads files or breaks off: only what the typesetting of characters needs."""
    ours = set(re.findall(r"\\([A-Za-z]+)", latex.render(case("forsterite"))))
    theirs = set(re.findall(r"\\([A-Za-z]+)", latex.render(renamed(case("forsterite"), attack, attack))))
    assert theirs - ours <= {"textbackslash", "textasciicircum", "textasciitilde", "textless", "textgreater", "textbar"}
    assert not re.search(
        r"(?<!\\)[#%]",
        latex.render(renamed(case("forsterite"), attack, attack)).split("\n", 1)[1].replace("% Method", ""),
    )


@pytest.mark.parametrize(
    ("foreign", "typeset"),
    [
        ("100% #1 a_b & {x} $", r"100\% \#1 a\_b \& \{x\} \$"),
        ("\\input{x}", r"\textbackslash{}input\{x\}"),
        ("α-quartz, Å, é, ł", r"$\alpha$-quartz, \r{A}, \'{e}, \l{}"),
        ("H₂O 方", r"H$_{2}$O (U+65B9)"),
        ("[x] *", r"{[}x{]} {*}"),
    ],
)
def test_latex_text_is_escaped(foreign: str, typeset: str) -> None:
    """Specials and accents as in Lamport, LaTeX: A Document Preparation System, sections 2.2 and 3.2 (from memory)."""
    assert labels.latex_text(foreign) == typeset


def test_latex_holds_the_published_sum_and_tensors() -> None:
    """Calcite: Porto, Giordmaine, Damen 1966; tensor of D3d: Loudon 1964; both from memory."""
    document = latex.render(case("calcite"))
    assert "$A_{1g}$ + 3$A_{2g}$ + 4$E_{g}$ + 2$A_{1u}$ + 3$A_{2u}$ + 5$E_{u}$" in document
    assert "$R\\bar{3}c$" in document
    assert "c & \\cdot & \\cdot \\\\ \\cdot & -c & d \\\\ \\cdot & d & \\cdot" in document
    assert "-\\sqrt{3}b" in latex.render(case("yttrium aluminium garnet"))


def test_latex_keeps_the_cautions() -> None:
    assert "\\item Question 0 (hydrogen\\_missing)" in latex.render(with_questions(case("rutile"), "hydrogen_missing"))


# Markdown, read by a general parser


def tokens_of(document: str) -> list[Token]:
    reader = MarkdownIt("commonmark").enable("table")
    return [inner for token in reader.parse(document) for inner in (token, *(token.children or []))]


def tables_of(document: str) -> list[list[list[str]]]:
    """Cells of every table: tables, rows, cells."""
    tables: list[list[list[str]]] = []
    for token in MarkdownIt("commonmark").enable("table").parse(document):
        if token.type == "table_open":
            tables.append([])
        elif token.type == "tr_open":
            tables[-1].append([])
        elif token.type == "inline" and tables and token.level > 3:
            tables[-1][-1].append(token.content)
    return tables


@pytest.mark.parametrize("name", NAMES)
def test_markdown_tables_hold_the_published_numbers(name: str) -> None:
    entry = ENTRIES[name]
    tables = tables_of(markdown.render(case(name)))
    at = next(k for k, table in enumerate(tables) if table[0][:2] == ["species", "total"])
    counts, (species, sites, contributions) = tables[0], tables[at : at + 3]
    assert {ascii_labels(row[0]): int(row[3]) for row in species[1:] if row[3] != "0"} == entry["optic"]
    answer = {row[0]: (int(row[1]), sum_of(row[2])) for row in counts[1:]}
    for title, key in (("Infrared", "infrared"), ("Raman", "raman"), ("Silent", "silent")):
        expected = {label: entry["optic"][label] for label in entry[key]}
        assert answer[title] == (sum(expected.values()), expected)
    assert [row[0] for row in sites[1:]] == list(entry["contributions"])
    header = [ascii_labels(label) for label in contributions[0][1:]]
    for row in contributions[1 : len(sites)]:
        found = {label: int(count) for label, count in zip(header, row[1:], strict=True) if count != "0"}
        assert found == entry["contributions"][row[0]]


@pytest.mark.parametrize("attack", ATTACKS)
def test_markdown_shows_names_and_runs_nothing(attack: str) -> None:
    """A name adds no HTML, link, code or column; it is shown as it is, control characters aside."""
    plain, hostile = (markdown.render(renamed(case("rutile"), name, name)) for name in ("name", attack))
    kinds = {token.type for token in tokens_of(hostile)}
    assert not kinds & {"html_block", "html_inline", "link_open", "image", "code_inline", "fence", "code_block"}
    assert [[len(row) for row in table] for table in tables_of(hostile)] == [
        [len(row) for row in table] for table in tables_of(plain)
    ]
    title = next(token for token in tokens_of(hostile) if token.type == "inline")
    shown = "".join(child.content for child in title.children or [])
    assert " ".join(labels.printable(attack).split()) in " ".join(shown.split())


def test_markdown_keeps_cautions_and_method() -> None:
    document = markdown.render(with_questions(case("rutile"), "hydrogen_missing", "deuterium"))
    assert document.index("Question 1") < document.index("| Infrared") < document.index("## Method")
    assert document.count("**Caution:**") == 2
    assert re.search(r"^9\. R\. S\. Mulliken", document, re.MULTILINE)
