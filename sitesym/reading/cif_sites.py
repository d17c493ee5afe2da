"""The atoms of a CIF as they are listed: element, occupancy, disorder group and coordinates of each."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass

import numpy as np

from sitesym.errors import NotAStructureError, ReadError
from sitesym.reading.cif_document import Block
from sitesym.reading.cif_values import is_unknown, number_of
from sitesym.reading.elements import element_of_type, elements_of_label, is_dummy
from sitesym.reading.expansion import MOST_ATOMS, too_large
from sitesym.reading.listing import Listing
from sitesym.reading.text import counted, listed, printable
from sitesym.structure import FULL, Floats, OpenQuestion

_FRACTIONAL = ("_atom_site_fract_x", "_atom_site_fract_y", "_atom_site_fract_z")
_CARTESIAN = ("_atom_site_cartn_x", "_atom_site_cartn_y", "_atom_site_cartn_z")
_LABELS = ("_atom_site_label", "_atom_site_label_atom_id", "_atom_site_auth_atom_id", "_atom_site_id")
_OUTSIDE = 5.0
_NO_ELEMENT = ("x", "xx", "q")
"""Type symbols that stand for an atom of unknown kind as often as for no atom."""


@dataclass(frozen=True, slots=True)
class _Row:
    """One line of the list of atoms."""

    label: str
    type_symbol: str
    coordinates: tuple[float, float, float]
    occupancy: float
    group: str


def read_sites(block: Block, lattice: Floats, known: Collection[str]) -> tuple[Listing, tuple[OpenQuestion, ...]]:
    """The listed atoms, and what was left out or guessed. `known` are the elements of the formula.

    Raises ReadError for a value that is no number or an element that cannot be told, NotAStructureError when no atom
    is left.
    """
    rows, left_out, unknown, empty = _rows(block)
    if not rows:
        raise NotAStructureError("No atom in the file has coordinates.", "Give a file with a refined structure.")
    elements, guessed = _elements(rows, known)
    coordinates = np.array([row.coordinates for row in rows])
    fractional, frame = _fractional(block, coordinates, lattice)
    listing = Listing(
        lattice,
        fractional,
        tuple(row.label for row in rows),
        tuple(row.type_symbol for row in rows),
        tuple(elements),
        np.array([min(row.occupancy, 1.0) for row in rows]),
        tuple(row.group for row in rows),
    )
    questions = _left_out_questions(left_out, unknown, empty) + _guessed_question(guessed) + _excess_question(rows)
    return listing, questions + frame + _outside_question(fractional)


def _rows(block: Block) -> tuple[list[_Row], list[str], list[str], list[str]]:
    """The atoms, and the labels of what is left out.

    That is what has no coordinates or is marked as no atom, what has a type symbol that names no element, and what has
    no occupancy.
    """
    axes = _FRACTIONAL if block.column(_FRACTIONAL[0]) else _CARTESIAN
    columns = [block.column(tag) for tag in axes]
    size = max(map(len, columns))
    if size > MOST_ATOMS:
        raise too_large(size)
    types = _column(block, size, "_atom_site_type_symbol")
    labels = _column(block, size, *_LABELS)
    flags = _column(block, size, "_atom_site_calc_flag", "_atom_site_calc_flags")
    occupancies = _column(block, size, "_atom_site_occupancy")
    groups = _groups(block, size)
    if any(len(column) != size for column in columns):
        raise ReadError("The coordinates of the atoms are incomplete.", "Give _atom_site_fract_x, _y and _z for all.")
    rows, left_out, unknown, empty = [], [], [], []
    for index in range(size):
        label = printable(labels[index] or types[index], 60) or f"atom {index + 1}"
        kind = "" if is_unknown(types[index]) else types[index].strip()
        position = [number_of(column[index], f"{tag} of {label}") for tag, column in zip(axes, columns, strict=True)]
        occupancy = _occupancy(occupancies[index], label)
        if None in position or flags[index].lower() == "dum" or is_dummy(kind, label):
            placed = None not in position and flags[index].lower() != "dum"
            if placed and kind.strip("0123456789").lower() in _NO_ELEMENT:
                unknown.append(f"{label} ({printable(kind, 20)})")
            else:
                left_out.append(label)
        elif occupancy == 0:
            empty.append(label)
        else:
            x, y, z = (value for value in position if value is not None)
            rows.append(_Row(label, kind, (x, y, z), occupancy, groups[index]))
    return rows, left_out, unknown, empty


def _column(block: Block, size: int, *tags: str) -> tuple[str, ...]:
    values = block.column(*tags) or ("",) * size
    if len(values) != size:
        raise ReadError(f"{tags[0]} has {len(values)} values for {size} atoms.", "Complete the list of atoms.")
    return values


def _groups(block: Block, size: int) -> list[str]:
    """Disorder assembly and group joined, "" for the common part."""
    assemblies = _column(block, size, "_atom_site_disorder_assembly")
    groups = _column(block, size, "_atom_site_disorder_group")
    return [
        "" if is_unknown(group) or group.strip() == "0" else _joined("" if is_unknown(part) else part, group)
        for part, group in zip(assemblies, groups, strict=True)
    ]


def _joined(assembly: str, group: str) -> str:
    """`A` and `1` -> `A1`, `A` and `-1` -> `-A1`: the sign, which marks disorder about a symmetry element, leads."""
    group, assembly = printable(group, 20), printable(assembly, 20)
    return f"-{assembly}{group[1:]}" if group.startswith("-") else f"{assembly}{group}"


def _occupancy(text: str, label: str) -> float:
    value = number_of(text, f"_atom_site_occupancy of {label}")
    if value is not None and value < 0:
        raise ReadError(f"The occupancy of {label} is {value:g}, below zero.", "Correct it in the file.")
    return 1.0 if value is None else value


def _elements(rows: list[_Row], known: Collection[str]) -> tuple[list[str], list[tuple[str, str]]]:
    """The element of each row, and the (label, element) pairs that had to be guessed.

    A label in capitals such as CA1 may mean two elements; then the one that no other site is known to be is taken, if
    the formula holds both, else the likelier.
    """
    choices = [_choices(row, known) for row in rows]
    certain = {names[0] for names in choices if len(names) == 1}
    elements: list[str] = []
    guessed: list[tuple[str, str]] = []
    for row, names in zip(rows, choices, strict=True):
        if not names:
            raise ReadError(
                f"The element of site {row.label} cannot be told from its name.",
                "Add _atom_site_type_symbol to the list of atoms.",
            )
        missing = [name for name in names if name not in certain]
        element = missing[0] if len(missing) == 1 and known else names[0]
        elements.append(element)
        unsure = len(names) > 1 or (known and element not in known and element not in ("D", "T"))
        if unsure and not row.type_symbol:
            guessed.append((row.label, element))
    return elements, guessed


def _choices(row: _Row, known: Collection[str]) -> tuple[str, ...]:
    if row.type_symbol:
        element = element_of_type(row.type_symbol, known)
        if element == "H" and row.label[:1] == "D" and "D" in known and "H" not in known:
            element = "D"
        return (element,) if element else elements_of_label(row.type_symbol, known)
    return elements_of_label(row.label, known)


def _fractional(block: Block, coordinates: Floats, lattice: Floats) -> tuple[Floats, tuple[OpenQuestion, ...]]:
    """Fractional coordinates as they are, or from Cartesian ones by the file's own matrix, else in the usual frame."""
    if block.column(_FRACTIONAL[0]):
        return coordinates, ()
    matrix = np.array([[_entry(block, f"matrix_{i}{j}") for j in (1, 2, 3)] for i in (1, 2, 3)], dtype=np.float64)
    vector = np.array([_entry(block, f"vector_{i}") for i in (1, 2, 3)], dtype=np.float64)
    if np.isfinite(matrix).all() and abs(np.linalg.det(matrix)) > 0:
        return coordinates @ matrix.T + np.nan_to_num(vector), ()
    question = OpenQuestion(
        "frame_assumed", "The coordinates are in Å without a matrix; a was taken along x and b in the xy plane."
    )
    return coordinates @ np.linalg.inv(lattice), (question,)


def _entry(block: Block, name: str) -> float:
    tag = f"_atom_sites_fract_tran_{name}"
    value = number_of(block.value(tag), tag)
    return float("nan") if value is None else value


def _left_out_questions(left_out: list[str], unknown: list[str], empty: list[str]) -> tuple[OpenQuestion, ...]:
    questions = []
    if left_out:
        message = f"{counted(len(left_out), 'site')} without coordinates, or no atoms, left out: {listed(left_out)}."
        questions.append(OpenQuestion("dummy_atoms", message))
    if unknown:
        message = (
            f"{counted(len(unknown), 'site')} left out, whose type symbol names no element: {listed(unknown)}. "
            "If atoms are there, every count below lacks their vibrations; then correct _atom_site_type_symbol."
        )
        questions.append(OpenQuestion("dummy_atoms", message))
    if empty:
        questions.append(
            OpenQuestion("empty_sites", f"{counted(len(empty), 'site')} with occupancy 0 left out: {listed(empty)}.")
        )
    return tuple(questions)


def _guessed_question(guessed: list[tuple[str, str]]) -> tuple[OpenQuestion, ...]:
    if not guessed:
        return ()
    names = listed([f"{label} as {element}" for label, element in dict.fromkeys(guessed)])
    return (OpenQuestion("elements_guessed", f"The element was guessed from the name of the site: {names}."),)


def _excess_question(rows: list[_Row]) -> tuple[OpenQuestion, ...]:
    over = [row for row in rows if row.occupancy > 2 - FULL]
    if not over:
        return ()
    worst = max(over, key=lambda row: row.occupancy)
    shown = f"{worst.label} ({worst.occupancy:g})"
    message = f"{counted(len(over), 'site')} with an occupancy over 1 taken as full, such as {shown}."
    return (OpenQuestion("occupancy_over_one", message),)


def _outside_question(fractional: Floats) -> tuple[OpenQuestion, ...]:
    largest = float(np.abs(fractional).max())
    if largest <= _OUTSIDE:
        return ()
    return (
        OpenQuestion(
            "coordinates_outside",
            f"A fractional coordinate is {largest:.4g}: atoms lie many cells away, or the numbers are in Å.",
        ),
    )
