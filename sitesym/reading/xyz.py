"""Plain XYZ files: a number of atoms, a comment, and a symbol with three coordinates in Å a line."""

from __future__ import annotations

import re

import numpy as np

from sitesym.errors import ReadError
from sitesym.reading.elements import symbols
from sitesym.reading.molecule import Molecule
from sitesym.reading.text import counted, printable

_ATOM = re.compile(r"\s*([A-Za-z]{1,2}|\d{1,3})((?:\s+[+-]?(?:\d+\.?\d*|\.\d+)(?:[eEdD][+-]?\d+)?){3})(?:\s.*)?$")


def looks_like_xyz(text: str) -> bool:
    """The first line is a whole number, the third an atom, and no lattice stands in the comment."""
    lines = text.splitlines()[:3]
    return (
        len(lines) == 3
        and lines[0].strip().isdecimal()
        and _ATOM.match(lines[2]) is not None
        and not re.search(r"(?i)lattice\s*=", lines[1])
    )


def read_xyz(text: str, source: str) -> Molecule:
    """The first molecule of the file. Raises ReadError with the line at fault."""
    lines = text.splitlines()
    total = int(lines[0])
    if len(lines) < total + 2:
        raise ReadError(
            f"{source} announces {counted(total, 'atom')} and lists {len(lines) - 2}.",
            "Complete the file; it may be cut off.",
        )
    elements, positions = [], []
    for number, line in enumerate(lines[2 : total + 2], start=3):
        match = _ATOM.match(line)
        element = _element(match[1]) if match else ""
        if not match or not element:
            raise ReadError(
                f"{source}, line {number} ({printable(line, 60)}) is no atom.", "Write a symbol and three numbers."
            )
        elements.append(element)
        positions.append([float(word.replace("d", "e").replace("D", "e")) for word in match[2].split()])
    return Molecule(tuple(elements), np.array(positions).reshape(-1, 3), printable(lines[1]), source)


def _element(word: str) -> str:
    """A symbol in any letter case, or an atomic number; "" when it is neither."""
    if word.isdecimal():
        return next((symbol for symbol, number in symbols().items() if number == int(word)), "")
    return word.capitalize() if word.capitalize() in symbols() else ""
