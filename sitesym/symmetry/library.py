"""The only place that calls spglib: checked input, one kind of failure, plain values out.

spglib crashes the interpreter on numbers that are not finite and on a negative tolerance, and reports failure in
several ways; both are dealt with here. Tables of the 530 settings are those of Hall (Acta Cryst. A 37, 517, 1981) and
International Tables B, as spglib stores them.
"""

from __future__ import annotations

import os
import warnings
from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np
import spglib

from sitesym.errors import InconsistencyError, UsageError
from sitesym.groups.operation import Floats, Integers

os.environ.setdefault("SPGLIB_WARNING", "OFF")  # its remarks on attempts that failed before one succeeded

LARGEST_TOLERANCE = 2.0
"""Å. Beyond this every atom meets its neighbours and no space group means anything."""


@dataclass(frozen=True, eq=False)
class Search:
    """What spglib finds in a cell of n atoms; the names are explained in its manual.

    transformation, shift   x_standard = transformation @ x_input + shift.
    rotations, translations (m, 3, 3) and (m, 3) in the input basis, pure translations included.
    wyckoffs, orbits        letter and representative atom of every input atom.
    primitive_of            (n,) which atom of the primitive cell each input atom is.
    standard_*              the standardised conventional cell; `standard_primitive_of` links its atoms.
    """

    number: int
    hall_number: int
    transformation: Floats
    shift: Floats
    rotations: Integers
    translations: Floats
    wyckoffs: tuple[str, ...]
    orbits: Integers
    primitive_of: Integers
    standard_lattice: Floats
    standard_positions: Floats
    standard_primitive_of: Integers

    @property
    def order(self) -> int:
        """Operations of the space group per primitive cell, whatever cell was given."""
        return len(setting_operations(self.hall_number)[0]) // centrings(self.hall_number)


@dataclass(frozen=True, slots=True)
class Setting:
    """One tabulated setting of a space group; `full` keeps the directions (`P 1 21/c 1`)."""

    hall_number: int
    number: int
    short: str
    full: str
    hall: str
    choice: str

    @property
    def symbol(self) -> str:
        """The usual symbol without blanks; that of a monoclinic setting with unique axis a or c keeps its directions.

        `R-3c`, `Pbnm`, `P2_1/n` for cell choice 2 of number 14, `P 1 1 2_1/b`.
        """
        if 3 <= self.number <= 15:
            if not self.choice.startswith("b"):
                return self.full
            letter, _, second, _ = self.full.split()
            return letter + second
        return self.short.replace(" ", "")


def search(lattice: Floats, positions: Floats, kinds: Integers, tolerance: float) -> Search:
    """Space group of a cell (rows of `lattice` in Å, fractional positions) at a tolerance in Å.

    Raises UsageError for a tolerance outside 0 to 2 Å, InconsistencyError when no group is found.
    """
    if not (np.isfinite(tolerance) and 0 < tolerance <= LARGEST_TOLERANCE):
        raise UsageError(
            f"A tolerance of {tolerance} Å is of no use.", f"Give one between 0 and {LARGEST_TOLERANCE} Å."
        )
    if not (np.isfinite(lattice).all() and np.isfinite(positions).all()):
        raise InconsistencyError("The cell holds a value that is no finite number.", "Correct the structure.")
    found = _dataset(lattice, positions, kinds, tolerance)
    if found is None:
        raise InconsistencyError(
            f"No space group could be found at a tolerance of {tolerance:g} Å.",
            "Atoms may lie too close together; look at the structure or try a smaller --tolerance.",
        )
    return Search(
        int(found.number),
        int(found.hall_number),
        found.transformation_matrix,
        found.origin_shift,
        found.rotations.astype(np.int64),
        found.translations,
        tuple(found.wyckoffs),
        found.crystallographic_orbits,
        found.mapping_to_primitive,
        found.std_lattice,
        found.std_positions,
        found.std_mapping_to_primitive,
    )


def _dataset(lattice: Floats, positions: Floats, kinds: Integers, tolerance: float) -> Any:
    """None on failure, whichever way this version of spglib (or the user's setting of it) reports one."""
    try:
        return _quietly(spglib.get_symmetry_dataset, (lattice, positions, kinds), tolerance)
    except Exception as error:
        if type(error).__module__.startswith("spglib"):
            return None
        raise


def _quietly(function: Callable[..., Any], *arguments: Any) -> Any:
    """Call spglib without its warnings on how it will report failures in future."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        return function(*arguments)


@lru_cache(maxsize=530)
def setting(hall_number: int) -> Setting:
    """Symbols of one of the 530 settings."""
    entry = _quietly(spglib.get_spacegroup_type, hall_number)
    parts = [part.strip() for part in entry.international.split("=")]
    return Setting(hall_number, entry.number, parts[0], parts[-1], entry.hall_symbol, entry.choice)


@lru_cache(maxsize=530)
def setting_operations(hall_number: int) -> tuple[Integers, Floats]:
    """Rotations (m, 3, 3) and translations (m, 3) of a setting, centring translations included."""
    database = _quietly(spglib.get_symmetry_from_database, hall_number)
    return database["rotations"].astype(np.int64), database["translations"]


@lru_cache(maxsize=530)
def centrings(hall_number: int) -> int:
    """Lattice points in the conventional cell of a setting: 1, 2, 3 or 4."""
    rotations, _ = setting_operations(hall_number)
    return int((rotations == np.eye(3, dtype=np.int64)).all(axis=(1, 2)).sum())


@lru_cache(maxsize=230)
def settings_of(number: int) -> tuple[Setting, ...]:
    """All tabulated settings of a space group, the standard one first."""
    return tuple(setting(hall) for hall in range(_first_hall(number), _first_hall(number + 1)))


@lru_cache(maxsize=1)
def _first_halls() -> tuple[int, ...]:
    numbers = [setting(hall).number for hall in range(1, 531)]
    return tuple(numbers.index(number) + 1 for number in range(1, 231))


def _first_hall(number: int) -> int:
    return 531 if number > 230 else _first_halls()[number - 1]
