"""POSCAR and CONTCAR files (the VASP manual's description of POSCAR): text -> Structure.

Both generations are read: with and without a line of element names; selective dynamics; direct and Cartesian
coordinates; one scale factor, three, or a negative one that stands for the volume. Velocities behind are left alone.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from sitesym.errors import NotAStructureError, ReadError, UsageError
from sitesym.reading.checks import by_weight, check_structure
from sitesym.reading.elements import symbols
from sitesym.reading.expansion import MOST_ATOMS, too_large
from sitesym.reading.listing import LARGEST, Listing, identity, numbered
from sitesym.reading.merging import assemble
from sitesym.reading.text import counted, listed, printable
from sitesym.structure import Floats, OpenQuestion, Structure

_NAME = re.compile(r"([A-Z][a-z]?)(?=$|[\d_./])\S*")
_TAIL_NAME = re.compile(r"[#!]?\s*([A-Z][a-z]?)\d*")
_HEAD = 8
_NO_NAMES = frozenset({
    "the", "cell", "vectors", "lattice", "poscar", "contcar", "structure", "generated", "created", "converted",
    "written", "made", "produced", "unknown", "untitled", "title", "comment", "system", "name", "none", "test",
    "atoms", "unit", "primitive", "conventional", "supercell", "file", "from",
})  # fmt: skip
"""First words of comments that name no compound."""


@dataclass(frozen=True, slots=True)
class _Species:
    """Runs of like atoms: how many, and their names, () where the file gives none."""

    counts: tuple[int, ...]
    names: tuple[str, ...]
    lines: int


def looks_like_poscar(text: str) -> bool:
    """The first lines have the shape of a POSCAR: scale, three vectors, then names or counts."""
    lines = text.splitlines()[:_HEAD]
    if len(lines) < 7 or len(_numbers(lines[1])) not in (1, 3):
        return False
    if any(len(_numbers(line)[:3]) != 3 for line in lines[2:5]):
        return False
    return _counts(lines[5]) != () or (_names(lines[5]) != () and _counts(lines[6]) != ())


def read_poscar(text: str, source: str, elements: Sequence[str] | None = None) -> Structure:
    """The structure in a POSCAR text.

    `elements` names the species where the file does not. Raises ReadError with the line at fault, UsageError when
    `elements` does not fit the file.
    """
    lines = text.splitlines()
    lattice, scale = _lattice(lines)
    species = _species(lines)
    first, cartesian, mode = _mode(lines, 5 + species.lines)
    total = sum(species.counts)
    if total > MOST_ATOMS:
        raise too_large(total)
    rows = _coordinates(lines, first, total)
    fractional = (rows * scale) @ np.linalg.inv(lattice) if cartesian else rows
    tails = [" ".join(line.split()[3:]) for line in lines[first : first + total]]
    names, named, questions = _choose_names(species, elements, lines[0], tails)
    kinds = [name for name, count in zip(names, species.counts, strict=True) for _ in range(count)]
    listing = Listing(
        lattice,
        fractional,
        numbered(kinds),
        tuple(kinds),
        tuple(kinds),
        np.ones(total),
        ("",) * total,
    )
    content = assemble(listing, identity())
    if "configuration" in mode.lower():
        questions += (OpenQuestion("several_frames", "The file is a sequence of structures; this is the first."),)
    questions += check_structure(lattice, content.fractional, content.sites, named) + content.questions
    return Structure(
        lattice,
        content.fractional,
        content.sites,
        questions=by_weight(questions),
        name=_compound_name(lines[0]),
        source=source,
        format="POSCAR",
    )


def _compound_name(comment: str) -> str:
    """The comment where it may name a compound (`CaCO3 calcite`, `2H-MoS2`), else ""."""
    name = printable(comment, 80)
    match = re.match(r"\d{0,2}([^\W\d_]+)", name)
    return name if match and match[1].lower() not in _NO_NAMES else ""


def _numbers(line: str) -> list[float]:
    """The numbers at the start of a line, up to the first word that is none."""
    found = []
    for word in line.split():
        try:
            found.append(float(word.replace("d", "e").replace("D", "e")))
        except ValueError:
            break
    return found


def _vector(lines: list[str], index: int, what: str) -> list[float]:
    values = _numbers(lines[index])[:3] if index < len(lines) else []
    if len(values) != 3 or not np.isfinite(values).all():
        shown = f" ({printable(lines[index], 60)})" if index < len(lines) else ", which is missing,"
        raise ReadError(f"POSCAR, line {index + 1}{shown} is no {what}.", "Give three numbers; it may be cut off.")
    return values


def _lattice(lines: list[str]) -> tuple[Floats, Floats]:
    """The scaled (3, 3) lattice in Å and the scale of x, y and z."""
    vectors = np.array([_vector(lines, index, "lattice vector") for index in (2, 3, 4)])
    factors = _numbers(lines[1])
    if len(factors) not in (1, 3) or not np.isfinite(factors).all() or 0 in factors:
        raise ReadError(f"POSCAR, line 2 ({printable(lines[1], 40)}) is no scale factor.", "Give one number, or three.")
    if max(np.abs(vectors).max(), np.abs(factors).max()) > LARGEST**3:
        raise NotAStructureError("The lattice of the POSCAR is too large.", "Give lengths in Å in lines 2 to 5.")
    volume = abs(float(np.linalg.det(vectors)))
    if volume < 1e-9:
        raise NotAStructureError("The three lattice vectors have no volume.", "Correct lines 3 to 5 of the POSCAR.")
    if len(factors) == 3 and min(factors) < 0:
        raise ReadError("POSCAR, line 2: of three scale factors none may be negative.", "Correct it.")
    if factors[0] < 0:
        factors = [float(np.cbrt(-factors[0] / volume))]
    scale = np.broadcast_to(np.array(factors), (3,))
    return vectors * scale, scale


def _species(lines: list[str]) -> _Species:
    """The counts of lines 6 or 7, and the names of line 6."""
    line = lines[5] if len(lines) > 5 else ""
    if counts := _counts(line):
        return _Species(counts, (), 1)
    names = _names(line)
    counts = _counts(lines[6]) if len(lines) > 6 else ()
    if not names or len(names) != len(counts):
        raise ReadError(
            f"POSCAR, lines 6 and 7: {len(line.split())} names for {counted(len(counts), 'count')} of atoms.",
            "Give each element a name in line 6 and a number of atoms in line 7.",
        )
    unknown = [name for name in names if name not in symbols()]
    if unknown:
        raise ReadError(f"POSCAR, line 6: {listed(list(unknown))} is no element.", "Give chemical symbols.")
    return _Species(counts, names, 2)


def _counts(line: str) -> tuple[int, ...]:
    """Whole numbers of atoms at the start of a line, () when it does not begin with one or all are zero."""
    words = re.split(r"[#!]", line)[0].split()
    counts = tuple(int(word) for word in words if word.isdecimal())
    return counts if len(counts) == len(words) and sum(counts) > 0 else ()


def _names(line: str) -> tuple[str, ...]:
    """Words that begin like chemical symbols; potentials behind them (`Fe_pv`, `O/1a2b3c`) are dropped."""
    words = re.split(r"[#!]", line)[0].split()
    matches = [_NAME.fullmatch(word) for word in words]
    return tuple(match[1] for match in matches if match) if all(matches) else ()


def _mode(lines: list[str], index: int) -> tuple[int, bool, str]:
    """Line index of the first atom, whether coordinates are Cartesian, and the line that says so."""
    word = lines[index].strip() if index < len(lines) else ""
    if word[:1] in "sS" and word:
        index += 1
        word = lines[index].strip() if index < len(lines) else ""
    if word[:1].lower() not in tuple("dckf"):
        raise ReadError(
            f"POSCAR, line {index + 1} ({printable(word, 40)}) says neither Direct nor Cartesian.",
            "Add the line before the coordinates.",
        )
    return index + 1, word[0] in "cCkK", word


def _coordinates(lines: list[str], first: int, total: int) -> Floats:
    if len(lines) < first + total:
        raise ReadError(
            f"The POSCAR announces {counted(total, 'atom')} and lists {max(len(lines) - first, 0)}.",
            "Complete the coordinates; the file may be cut off.",
        )
    return np.array([_vector(lines, index, "coordinate") for index in range(first, first + total)])


def _choose_names(
    species: _Species, elements: Sequence[str] | None, title: str, tails: list[str]
) -> tuple[tuple[str, ...], bool, tuple[OpenQuestion, ...]]:
    """A name for each run of atoms, whether it is an element, and where it comes from if not from line 6."""
    if elements is not None:
        return _given_names(species, tuple(elements)), True, ()
    if species.names:
        return species.names, True, ()
    sources = {"the comments behind the atoms": _tail_names(species, tails), "its first line": _title_names(title)}
    for source, names in sources.items():
        if len(names) == len(species.counts) == len(set(names)):
            message = f"The file has no line of elements; {listed(list(names), 12)} were taken from {source}."
            return names, True, (OpenQuestion("elements_from_comment", message),)
    names = tuple(map(_letters, range(len(species.counts))))
    message = (
        f"The file names no elements; its {counted(len(names), 'kind')} of atoms are called {listed(list(names), 12)}. "
        "Name them with --elements."
    )
    return names, False, (OpenQuestion("elements_unnamed", message),)


def _given_names(species: _Species, elements: tuple[str, ...]) -> tuple[str, ...]:
    unknown = [name for name in elements if name not in symbols()]
    if unknown:
        raise UsageError(f"{listed(unknown)} is no chemical symbol.", "Give symbols such as Ca, C, O.")
    if len(elements) != len(species.counts):
        raise UsageError(
            f"{counted(len(elements), 'element')} for {counted(len(species.counts), 'kind')} of atoms in the POSCAR.",
            "Give one element for each number of atoms, in the same order.",
        )
    if species.names and species.names != elements:
        raise UsageError(
            f"The POSCAR names its elements {', '.join(species.names)}, not {', '.join(elements)}.",
            "Leave the elements out, or correct line 6 of the file.",
        )
    return elements


def _tail_names(species: _Species, tails: list[str]) -> tuple[str, ...]:
    """The element in the comment behind every atom, when each run of atoms has one."""
    words = [re.sub(r"^([TF.]\S*\s+){3}", "", tail) for tail in tails]
    matches = [_TAIL_NAME.fullmatch(word.strip()) for word in words]
    names = [match[1] if match and match[1] in symbols() else "" for match in matches]
    runs = []
    start = 0
    for count in species.counts:
        run = set(names[start : start + count])
        if len(run) != 1 or "" in run:
            return ()
        runs.append(run.pop())
        start += count
    return tuple(runs)


def _title_names(title: str) -> tuple[str, ...]:
    words = title.split()
    return tuple(words) if all(word in symbols() for word in words) else ()


def _letters(index: int) -> str:
    """A ... Z, AA, AB, ..."""
    name = ""
    index += 1
    while index:
        index, place = divmod(index - 1, 26)
        name = chr(ord("A") + place) + name
    return name
