"""Text in columns as a table of cells with line numbers: separators, decimal commas, comments and header found.

Columns are parted by semicolons, tabs, commas or spaces. `#` begins a comment. With semicolons, tabs or spaces between
the columns a comma inside a number is a decimal comma. Lines before the first number are a heading; the last of them
that names columns is the header, also where it stands in a comment.
"""

from __future__ import annotations

import csv
import re
from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

from sitesym.bands.columns import Column, column_of, is_header, split_names, unit_of
from sitesym.errors import ReadError
from sitesym.reading.text import counted, printable

_NUMBER = r"[-+−]?(?:\d+(?:[.,]\d*)?|[.,]\d+)(?:[eE][-+]?\d+)?"
_VALUE = re.compile(rf"\s*({_NUMBER})\s*(?:\((\d+)\)|(?:±|\+/-|\+-)\s*({_NUMBER}))?\s*")
_BEGINS = re.compile(r"\s*[\"']?\s*[-+−]?[.,]?\d")
_COMMA_NUMBER = re.compile(rf"{_NUMBER}\Z")
_SAMPLE = 200
_SPECTRUM_ROWS = 50
_LONGEST_HEADING, _LONGEST_HEADER = 1000, 500


@dataclass(frozen=True, slots=True)
class Row:
    """One line of data: its number in the file and its cells."""

    line: int
    cells: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Table:
    """A file in columns; `columns` is empty where no header names them."""

    source: str
    columns: tuple[Column, ...]
    rows: tuple[Row, ...]


Line = tuple[int, str]


def read_table(text: str, source: str) -> Table:
    """The table of a text.

    Raises ReadError where there are no numbers, or where commas may part columns as well as decimals.
    """
    lines = [(number, line) for number, line in enumerate(text.lstrip("\ufeff").splitlines(), start=1) if line.strip()]
    head, data = _parted(lines)
    if not data:
        raise ReadError(
            f"{source} holds no measurements: no line begins with a number, and no line names columns.",
            "Give a list of bands or a spectrum as text in columns, the wavenumber first.",
        )
    header, units, in_comment = _header(head)
    separator = _separator(data, header, source)
    columns = _columns(header, units, separator)
    rows = [Row(number, _cells(line, separator)) for number, line in data]
    if (in_comment or len(columns) == 1) and len(columns) < len(rows[0].cells):
        columns = ()  # words of a heading, not names of columns
    return Table(source, columns, tuple(_fitted(row, columns, source) for row in rows))


def _parted(lines: Sequence[Line]) -> tuple[list[Line], list[Line]]:
    """The heading, comments in it included, and the lines of data without comments."""
    head: list[Line] = []
    in_words = False
    for place, (number, line) in enumerate(lines[:_LONGEST_HEADING]):
        columns = _named(line)
        if _is_comment(line) or is_header(columns) or not (_BEGINS.match(line) or in_words):
            head.append((number, line))
        else:
            return head, [(n, _uncommented(one)) for n, one in lines[place:] if not _is_comment(one)]
        if not _is_comment(line) and not _are_units(columns):
            in_words = is_header(columns) and columns[0].field not in ("", "wavenumber", "intensity")
    return head, []


def _is_comment(line: str) -> bool:
    return line.lstrip().startswith("#")


def _uncommented(line: str) -> str:
    return line if '"' in line else re.split(r"\s#", line, maxsplit=1)[0]


def _are_units(columns: Sequence[Column]) -> bool:
    """A line of units below the names."""
    return bool(columns) and all(not column.name or column.name == "a u" for column in columns)


def _named(line: str) -> list[Column]:
    """A line taken as names of columns."""
    bare = re.sub(r"^\s*#+\s*", "", line[:_LONGEST_HEADER])
    for sign in (";", "\t", ","):
        if sign in bare:
            return [column_of(cell) for cell in _cells(bare, sign)]
    return [column_of(name) for name in split_names(bare)]


def _header(head: Sequence[Line]) -> tuple[str, str, bool]:
    """The last line of the heading that names columns, a line of units below it, and whether it is a comment."""
    for wanted in (False, True):
        units = ""
        for _, line in reversed([one for one in head if _is_comment(one[1]) == wanted]):
            columns = _named(line)
            if is_header(columns) and not (_are_units(columns) and not units and len(head) > 1):
                return re.sub(r"^\s*#+\s*", "", line), units, wanted
            units = line if _are_units(columns) else ""
        if units:
            return units, "", wanted
    return "", "", False


def _columns(header: str, units: str, separator: str) -> tuple[Column, ...]:
    if not header:
        return ()
    names = _cells(header, separator) if separator and separator in header else split_names(header)
    below = [unit_of(cell) for cell in _cells(units, separator)] if units else []
    below += [""] * (len(names) - len(below))
    return tuple(_with_unit(column_of(name), unit) for name, unit in zip(names, below, strict=False))


def _with_unit(column: Column, unit: str) -> Column:
    return replace(column, unit=column.unit or unit)


# Separators


def _separator(data: Sequence[Line], header: str, source: str) -> str:
    """What parts the columns: semicolon, tab, comma, or "" for spaces."""
    sample = [line for _, line in data[:_SAMPLE]]
    for sign in (";", "\t"):
        if sign in header or all(sign in line.strip() for line in sample):
            return sign
    if not any("," in line for line in sample):
        return "" if "," not in header else ","
    if header:
        return "," if "," in header else ""
    return _comma(data, sample, source)


def _comma(data: Sequence[Line], sample: Sequence[str], source: str) -> str:
    """What commas mean where no header tells: "," where they part columns, "" where they are decimal commas."""
    words = [line.split() for line in sample]
    spaced = any(len(line) > 1 and "," not in "".join(line) for line in words)
    points = any(re.search(r"\d\.\d", line) for line in sample)
    if not spaced and (points or any(re.search(r",\s|,,|,\s*$|,[^\d\s]", line) for line in sample)):
        return ","
    decimal = any(len(line) > 1 for line in words) and all(_COMMA_NUMBER.match(line[0]) for line in words)
    if decimal and not points:
        return ""
    if not spaced and (any(line.count(",") > 1 for line in sample) or _runs_evenly(data)):
        return ","
    number, line = next(one for one in data if "," in one[1])
    raise ReadError(
        f"{source}, line {number}: in '{printable(line, 40)}' the comma may part columns or be a decimal comma.",
        "Begin the file with a line that names the columns, or part columns by semicolons.",
    )


def _runs_evenly(data: Sequence[Line]) -> bool:
    """Whether what stands before the comma rises or falls by even steps, as the axis of a spectrum does."""
    if len(data) < _SPECTRUM_ROWS:
        return False
    try:
        values = [float(line.split(",")[0]) for _, line in data]
    except ValueError:
        return False
    steps = {round(second - first, 6) for first, second in pairwise(values)}
    return len(steps) == 1 and 0.0 not in steps


def _cells(line: str, separator: str) -> tuple[str, ...]:
    if not separator:
        return tuple(re.sub(r"\s*(±|\+/-)\s*", r"\1", line).split())
    try:
        cells = next(csv.reader([line], delimiter=separator, skipinitialspace=True))
    except (csv.Error, StopIteration):
        cells = line.split(separator)
    stripped = [re.sub(r"^'(?=[=+@-])", "", cell.strip()) for cell in cells]  # text that a spreadsheet must not run
    while len(stripped) > 1 and not stripped[-1]:
        stripped.pop()
    return tuple(stripped)


def _fitted(row: Row, columns: Sequence[Column], source: str) -> Row:
    """The row with what is too much joined to a last column of words; more numbers than names are a mistake."""
    limit = len(columns)
    if not limit or len(row.cells) <= limit:
        return row
    if columns[-1].field in ("note", ""):
        return Row(row.line, (*row.cells[: limit - 1], " ".join(row.cells[limit - 1 :])))
    raise ReadError(
        f"{source}, line {row.line}: {len(row.cells)} values, but the header names {counted(limit, 'column')}.",
        "Name every column; with decimal commas part the columns by semicolons.",
    )


# Values


def value(cell: str) -> tuple[float, float | None] | None:
    """A number and, where it is written with one, its uncertainty: `711.3`, `711,3`, `711.3(5)`, `711 ± 2`.

    None for what is no finite number.
    """
    found = _VALUE.fullmatch(cell)
    if found is None or ("." in found[1] and "," in found[1]):
        return None
    number = _float(found[1])
    if abs(number) == float("inf"):
        return None
    if found[2]:
        decimals = len(re.split(r"[.,]", found[1])[1]) if re.search(r"[.,]", found[1]) else 0
        return number, int(found[2]) * 10.0**-decimals
    return number, _float(found[3]) if found[3] else None


def _float(word: str) -> float:
    return float(word.replace(",", ".").replace("−", "-"))
