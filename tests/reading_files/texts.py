"""Invented structure files: a CIF from its parts, and published structures small enough to write out.

Cells and coordinates: rock salt, rutile, diamond, calcite and aragonite as in Wyckoff, Crystal Structures, 2nd ed.
(1963-1968); from memory, rounded.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from sitesym.reading import read
from sitesym.structure import Structure

CUBIC = (5.64, 5.64, 5.64, 90, 90, 90)
ROCK_SALT = ("Na Na 0 0 0", "Cl Cl 0.5 0.5 0.5")


def cif(
    atoms: tuple[str, ...] | list[str],
    cell: tuple[Any, ...] = CUBIC,
    *,
    symbol: str = "",
    hall: str = "",
    number: str = "",
    operations: tuple[str, ...] = (),
    columns: str = "label type_symbol fract_x fract_y fract_z",
    extra: str = "",
    name: str = "test",
) -> str:
    """A CIF text; each of `atoms` is one line of the loop of atoms, `columns` names its columns."""
    tags = ("length_a", "length_b", "length_c", "angle_alpha", "angle_beta", "angle_gamma")
    lines = [f"data_{name}", *(f"_cell_{tag} {value}" for tag, value in zip(tags, cell, strict=True) if value != "")]
    lines += [f"_symmetry_space_group_name_H-M '{symbol}'"] if symbol else []
    lines += [f"_symmetry_space_group_name_Hall '{hall}'"] if hall else []
    lines += [f"_space_group_IT_number {number}"] if number else []
    if operations:
        lines += ["loop_", "_symmetry_equiv_pos_as_xyz", *(f"'{operation}'" for operation in operations)]
    lines += [extra, "loop_", *(f"_atom_site_{column}" for column in columns.split()), *atoms]
    return "\n".join(lines) + "\n"


def read_text(tmp_path: Any, text: str | bytes, name: str = "structure.cif", **options: Any) -> Structure:
    """Write the text to a file and read it."""
    path = tmp_path / name
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return read(path, **options)


def codes(structure: Structure) -> list[str]:
    """The codes of all open questions."""
    return [question.code for question in structure.questions]


def message(structure: Structure, code: str) -> str:
    """The sentence of one open question, "" when it was not asked."""
    return next((question.message for question in structure.questions if question.code == code), "")


def counts(structure: Structure) -> dict[str, float]:
    """Element -> atoms in the cell, rounded to 1e-6."""
    return {element: round(count, 6) for element, count in structure.composition.items()}


def distances(structure: Structure, centre: int) -> np.ndarray:
    """Sorted distances in Å from one site to all others and their images in the 27 cells around it."""
    shifts = np.array(np.meshgrid(*[(-1, 0, 1)] * 3)).reshape(3, -1).T
    difference = structure.fractional[None] + shifts[:, None] - structure.fractional[centre]
    found = np.linalg.norm(difference.reshape(-1, 3) @ structure.lattice, axis=1)
    return np.sort(found[found > 1e-6])
