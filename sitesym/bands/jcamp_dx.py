"""JCAMP-DX files (McDonald and Wilks, Appl. Spectrosc. 42, 151, 1988), decoded by the open library `jcamp`.

The library (1.3) passes over damage in silence: it only prints when the number of points or the check values are
wrong, takes decimal commas for separators, stops at comments within data, and misreads repeat counts of several digits
or behind values that are no differences. So the file is cleaned before, repeats are written out, and what comes back is
checked against the header.
"""

from __future__ import annotations

import io
import re
from collections.abc import Sequence
from contextlib import redirect_stdout
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from sitesym.bands.columns import Column, technique_of, unit_of
from sitesym.bands.spectrum import Trace
from sitesym.bands.tables import Row, Table
from sitesym.errors import ReadError, UsageError
from sitesym.reading.text import listed, printable

_SPECTRUM_LABELS = ("XYDATA", "XYPOINTS")
_FORMS = ("(X++(Y..Y))", "(XY..XY)")
_NEEDED = ("FIRSTX", "LASTX", "NPOINTS")
_FACTORS = ("XFACTOR", "YFACTOR")
_REPEATS = "STUVWXYZs"
_REPEATED = re.compile(r"((?:[@A-Ia-i%J-Rj-r]|[-+]|(?<=\s)|^)[\d.]*)([S-Zs])(\d*)")
_EXPONENT = re.compile(r"\d[Ee][-+]?\d")
_MEND = "Export it again, or save it as text in two columns."


@dataclass(slots=True)
class Block:
    """One data block: labels in capitals without spaces and signs, the data with its label and form."""

    labels: dict[str, str] = field(default_factory=dict)
    data_label: str = ""
    form: str = ""
    data: list[str] = field(default_factory=list)


def is_jcamp(text: str) -> bool:
    """Whether a text begins like a JCAMP-DX file."""
    return re.match(r"\s*(?:\$\$.*\s*)*##\s*(?:TITLE|JCAMP[-_ ]?DX)\s*=", text[:2000], re.IGNORECASE) is not None


def read_jcamp(text: str, source: str, technique: str) -> Trace | Table:
    """A spectrum, or a table of peaks, of one data block.

    technique  "raman" or "infrared" as the user says; the file must not say otherwise.

    Raises ReadError for damaged files and for several blocks, UsageError where the library is missing.
    """
    block = _the_block(_blocks(text), source)
    _check_technique(block, source, technique)
    unit, ordinate = _unit(block, source), block.labels.get("YUNITS", "")
    x, y = _decoded(block, source)
    if block.data_label == "PEAKTABLE":
        rows = tuple(Row(0, (repr(float(a)), repr(float(b)))) for a, b in zip(x, y, strict=True))
        columns = (Column("XUNITS", "wavenumber", "wavenumber", unit), Column("YUNITS", "", "intensity"))
        return Table(source, columns, rows)
    return Trace(x, y, unit, ordinate, source)


# Labels and blocks


def _blocks(text: str) -> list[Block]:
    """All blocks that hold data, comments removed."""
    blocks = [Block()]
    label = ""
    for line in text.lstrip("\ufeff").splitlines():
        bare = line.split("$$", 1)[0].strip()
        if not bare:
            continue
        found = re.match(r"##([^=]*)=(.*)", bare)
        if found is None:
            if label == blocks[-1].data_label and label:
                blocks[-1].data.append(bare)
            continue
        label, content = re.sub(r"[\s/_-]", "", found[1]).upper(), found[2].strip()
        if label == "TITLE":
            blocks.append(Block())
        if label in (*_SPECTRUM_LABELS, "PEAKTABLE"):
            blocks[-1].data_label, blocks[-1].form = label, re.sub(r"\s", "", content).upper()
        else:
            blocks[-1].labels.setdefault(label, content)
    return [block for block in blocks if block.data_label]


def _the_block(blocks: Sequence[Block], source: str) -> Block:
    if not blocks:
        raise ReadError(f"{source} holds no XYDATA, XYPOINTS or PEAK TABLE.", _MEND)
    if len(blocks) > 1:
        titles = [block.labels.get("TITLE", "") or "without title" for block in blocks]
        raise ReadError(
            f"{source} holds {len(blocks)} spectra: {listed(titles)}.", "Save each one as a file of its own."
        )
    return blocks[0]


def _check_technique(block: Block, source: str, technique: str) -> None:
    stated = block.labels.get("DATATYPE", "")
    words = re.sub(r"\s*(spectrum|spectra|peak table|interferogram)\s*", "", stated, flags=re.IGNORECASE)
    if "INTERFEROGRAM" in stated.upper():
        raise ReadError(f"{source} is an interferogram.", "Transform it to a spectrum first.")
    own = technique_of(words) if words else ""
    if own and own != technique:
        raise ReadError(f"{source} says that it is {own}, but it was given as {technique}.", f"Give it with --{own}.")


def _unit(block: Block, source: str) -> str:
    word = block.labels.get("XUNITS", "")
    unit = unit_of(word.rstrip(";. "))
    if word and not unit:
        raise ReadError(
            f"{source} has an axis in '{printable(word, 40)}'.", "Only axes in 1/cm, nm, µm, meV, THz are read."
        )
    return unit


# Data


def _decoded(block: Block, source: str) -> tuple[Any, Any]:
    """Axis and ordinate (n,), both scaled, as many as the header says."""
    if block.form not in _FORMS:
        raise ReadError(f"{source} has its data in the form '{printable(block.form, 40)}'.", _MEND)
    header = {label: _number(block, label, source) for label in (*_NEEDED, *_FACTORS) if block.labels.get(label)}
    if block.form == _FORMS[0]:
        missing = [label for label in _NEEDED if label not in header]
        if missing:
            raise ReadError(f"{source} lacks the label {missing[0]}.", _MEND)
    if "NPOINTS" in header and not 2 <= header["NPOINTS"] <= 1e6:
        raise ReadError(f"{source} says that it has {header['NPOINTS']:g} points.", _MEND)
    pointed = _with_points(block, header.get("NPOINTS"))
    if sum(_repeats(line) for line in pointed) > 2 * header.get("NPOINTS", 0.0) + 1000:
        raise ReadError(f"{source} is damaged: it repeats values more often than it has points.", _MEND)
    lines = [_written_out(line) for line in pointed]
    if any("?" in line for line in lines):
        raise ReadError(f"{source} marks points as missing by '?'.", _MEND)
    x, y = _library(block, header, lines, source)
    _check_points(x, y, header, block, source)
    return x, y


def _number(block: Block, label: str, source: str) -> float:
    word = block.labels[label].replace(",", ".")
    try:
        number = float(word)
    except ValueError:
        number = float("nan")
    if not np.isfinite(number):
        raise ReadError(f"{source}: {label} is '{printable(word, 40)}', no number.", _MEND)
    return number


def _with_points(block: Block, points: float | None) -> list[str]:
    """The lines with decimal commas as points. What a comma means follows from the number of points in the header."""
    lines = block.data
    if not any(re.search(r"\d,\d", line) for line in lines) or any("." in line for line in lines):
        return lines
    pointed = [re.sub(r"(?<=\d),(?=\d)", ".", line) for line in lines]
    values = sum(len(re.split(r"[\s;]+", line.strip(" ;"))) for line in pointed)
    expected = values / 2 if block.form == _FORMS[1] else values - len(lines)
    return pointed if points is not None and expected == points else lines


def _has_repeats(line: str) -> bool:
    return _EXPONENT.search(line) is None and any(sign in line for sign in _REPEATS)


def _repeats(line: str) -> int:
    """How many values the repeat counts of a line stand for."""
    return sum(_times(found) for found in _REPEATED.finditer(line)) if _has_repeats(line) else 0


def _times(found: re.Match[str]) -> int:
    return int(f"{_REPEATS.index(found[2]) + 1}{found[3][:12]}")


def _written_out(line: str) -> str:
    """Repeat counts, which may have several digits, replaced by what they repeat."""
    return _REPEATED.sub(_repeated, line) if _has_repeats(line) else line


def _repeated(found: re.Match[str]) -> str:
    gap = " " if found[1][:1].isdigit() or found[1][:1] == "." else ""
    return gap.join([found[1]] * _times(found))


def _library(block: Block, header: dict[str, float], lines: Sequence[str], source: str) -> tuple[Any, Any]:
    try:
        import jcamp
    except ImportError:
        raise UsageError(
            f"{source} is a JCAMP-DX file, and the package jcamp that reads them is not installed.",
            "Install it: pip install 'sitesym[jcamp]'; or save the spectrum as text in two columns.",
        ) from None
    name = {"PEAKTABLE": "PEAK TABLE"}.get(block.data_label, block.data_label)
    whole = {label: int(number) if label == "NPOINTS" else number for label, number in header.items()}
    head = ["##TITLE=x", *(f"##{label}={number}" for label, number in whole.items())]
    said = io.StringIO()
    try:
        with redirect_stdout(said):
            found = jcamp.read([*head, f"##{name}={block.form}", *lines, "##END="])
    except Exception as error:
        raise ReadError(f"{source} holds data that cannot be decoded: {printable(str(error), 80)}.", _MEND) from None
    _check_said(said.getvalue(), header, source)
    return np.asarray(found["x"], dtype=float), np.asarray(found["y"], dtype=float)


# Checks


def _check_said(said: str, header: dict[str, float], source: str) -> None:
    """Check values within the data: those of the ordinate must hold, those of the axis to a step and a half."""
    if "Y-Check failed" in said:
        raise ReadError(f"{source} is damaged: a check value within its data does not hold.", _MEND)
    step = abs(header.get("LASTX", 0.0) - header.get("FIRSTX", 0.0)) / max(header.get("NPOINTS", 2.0) - 1, 1)
    for line in said.splitlines():
        numbers = [float(word) for word in re.findall(r"[-+]?\d+(?:\.\d*)?(?:[eE][-+]?\d+)?", line)]
        if line.startswith("X-Check") and len(numbers) == 2:
            off = abs(numbers[0] - numbers[1]) * abs(header.get("XFACTOR", 1.0))
            if off > 1.5 * step:
                raise ReadError(f"{source} is damaged: its axis does not run on evenly at {numbers[0]:g}.", _MEND)


def _check_points(x: Any, y: Any, header: dict[str, float], block: Block, source: str) -> None:
    points = header.get("NPOINTS")
    if len(x) != len(y) or (points is not None and len(y) != points) or not len(y):
        said = f"its header says {points:g}" if points is not None else f"there are {len(x)} places on its axis"
        raise ReadError(f"{source} is damaged: {len(y)} points were read, and {said}.", _MEND)
    if not (np.isfinite(x).all() and np.isfinite(y).all()):
        raise ReadError(f"{source} holds values that are no numbers.", _MEND)
    if not block.labels.get("FIRSTY"):
        return
    first = _number(block, "FIRSTY", source)
    room = 0.02 * float(np.ptp(y)) + 1e-9
    if abs(y[0] - first) > room and abs(y[0] / header.get("YFACTOR", 1.0) - first) > room:
        raise ReadError(f"{source} is damaged: its first value is {y[0]:g}, and its header says {first:g}.", _MEND)
