"""The crystal structure as it was read: a lattice, sites with their occupants, and open questions.

A `Structure` holds what the file says and nothing derived from symmetry. Occupancies are kept, never rounded;
hydrogen isotopes are kept apart. Everything doubtful found on the way is an `OpenQuestion` beside the data.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from math import gcd

import numpy as np
import numpy.typing as npt

from sitesym.errors import NotAStructureError

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]

_ROUNDING = 2e-3
"""Relative error of amounts that come from occupancies written with three or four decimals."""

FULL = 0.999
"""An occupancy from here on counts as full: files round thirds and sixths to three or four decimals."""


@dataclass(frozen=True, slots=True)
class OpenQuestion:
    """Something about the input that the user must know before believing the result.

    `code` is a stable word for programs (such as `hydrogen_missing`), `message` a plain sentence.
    """

    code: str
    message: str


@dataclass(frozen=True, slots=True)
class Occupant:
    """One element on a site. `element` is a chemical symbol, D and T included; `occupancy` lies in (0, 1]."""

    element: str
    occupancy: float = 1.0


@dataclass(frozen=True, slots=True)
class Site:
    """One position of the cell with all that may sit there.

    `label` is the name in the file, `occupants` has one entry for an ordered site and several for a mixed one,
    `disorder_group` is the file's group of alternatives ("" for the common part).
    """

    label: str
    occupants: tuple[Occupant, ...]
    disorder_group: str = ""

    @property
    def element(self) -> str:
        """Symbol of the only occupant, or all of a mixed site joined by slashes (`Ca/Mg`)."""
        return "/".join(occupant.element for occupant in self.occupants)

    @property
    def occupancy(self) -> float:
        """Sum of the occupancies."""
        return sum(occupant.occupancy for occupant in self.occupants)

    @property
    def is_ordered(self) -> bool:
        """One element, fully there."""
        return len(self.occupants) == 1 and self.occupants[0].occupancy >= FULL


@dataclass(frozen=True, slots=True)
class DeclaredSymmetry:
    """The space group that the file itself states: any part may be missing (None)."""

    number: int | None = None
    hermann_mauguin: str | None = None
    hall: str | None = None


@dataclass(frozen=True, eq=False)
class Structure:
    """A periodic structure.

    lattice      (3, 3) rows are a, b, c in Å, in any Cartesian frame.
    fractional   (n, 3) coordinates along a, b, c.
    sites        n sites in the same order.
    declared     symmetry stated by the file.
    questions    what the reader found doubtful.
    name         the compound's name in the file, or "".
    source       where it came from (a path, "standard input", "ase.Atoms"), and `format` in words (CIF, POSCAR).
    """

    lattice: Floats
    fractional: Floats
    sites: tuple[Site, ...]
    declared: DeclaredSymmetry = DeclaredSymmetry()
    questions: tuple[OpenQuestion, ...] = ()
    name: str = ""
    source: str = ""
    format: str = ""

    def __post_init__(self) -> None:
        lattice = _frozen(self.lattice, (3, 3), "lattice")
        fractional = _frozen(self.fractional, (len(self.sites), 3), "coordinates")
        object.__setattr__(self, "lattice", lattice)
        object.__setattr__(self, "fractional", fractional)
        if not self.sites:
            raise NotAStructureError("The structure has no atoms.", "Check that the file lists atomic sites.")
        if abs(np.linalg.det(lattice)) < 1e-3 or np.linalg.cond(lattice) > 1e6:
            raise NotAStructureError("The cell has no volume.", "Check the cell lengths and angles.")

    def __len__(self) -> int:
        return len(self.sites)

    def __repr__(self) -> str:
        return f"Structure({self.formula}, {len(self)} sites in the cell, {self.format or 'no file'})"

    def _repr_html_(self) -> str:
        from sitesym.views.notebook import structure_html

        return structure_html(self)

    @property
    def volume(self) -> float:
        """Cell volume in Å³."""
        return float(abs(np.linalg.det(self.lattice)))

    @property
    def right_handed(self) -> tuple[Floats, Floats]:
        """Lattice and coordinates in a right-handed cell: of a left-handed one all three axes are reversed."""
        sign = np.sign(np.linalg.det(self.lattice))
        return self.lattice * sign, self.fractional * sign

    @cached_property
    def elements(self) -> tuple[str, ...]:
        """Element name of every site; mixed sites read like `Ca/Mg`."""
        return tuple(site.element for site in self.sites)

    @property
    def is_ordered(self) -> bool:
        """No partial or mixed occupancy anywhere."""
        return all(site.is_ordered for site in self.sites)

    @cached_property
    def kinds(self) -> Integers:
        """(n,) integers, equal for sites that symmetry may exchange: same occupants at the same occupancies."""
        keys = [_kind(site) for site in self.sites]
        number = {key: index for index, key in enumerate(dict.fromkeys(keys))}
        return np.array([number[key] for key in keys], dtype=np.int64)

    @property
    def composition(self) -> dict[str, float]:
        """Element -> atoms in the cell, occupancies counted."""
        count: dict[str, float] = {}
        for site in self.sites:
            for occupant in site.occupants:
                count[occupant.element] = count.get(occupant.element, 0.0) + occupant.occupancy
        return count

    @property
    def formula(self) -> str:
        """Empirical formula in Hill order, from the cell's content: `CCaO3`, `Ca0.9Mg0.1O`."""
        return hill_formula(self.composition)


def _kind(site: Site) -> tuple[tuple[str, float], ...]:
    return tuple(sorted((occupant.element, round(occupant.occupancy, 3)) for occupant in site.occupants))


def _frozen(values: npt.ArrayLike, shape: tuple[int, ...], what: str) -> Floats:
    array = np.array(values, dtype=np.float64)
    if array.shape != shape:
        raise NotAStructureError(f"The {what} have shape {array.shape}, not {shape}.", "Check the input.")
    if not np.isfinite(array).all():
        raise NotAStructureError(f"The {what} hold a value that is no finite number.", "Correct it in the file.")
    array.setflags(write=False)
    return array


def hill_formula(composition: dict[str, float]) -> str:
    """Empirical formula in Hill order (Hill 1900, J. Am. Chem. Soc. 22, 478), divided by the common divisor."""
    amounts = reduced(composition)
    return "".join(f"{element}{_amount(amounts[element])}" for element in _hill_order(amounts))


def reduced(composition: dict[str, float]) -> dict[str, float]:
    """Amounts divided by the common divisor of those that are whole, to within what occupancies are rounded to."""
    amounts = {element: amount for element, amount in composition.items() if amount > 0}
    whole = {
        element: round(amount)
        for element, amount in amounts.items()
        if round(amount) and abs(amount - round(amount)) < _ROUNDING * amount
    }
    divisor = gcd(*whole.values()) if whole else 1
    return {element: whole.get(element, amount) / divisor for element, amount in amounts.items()}


def _hill_order(elements: Sequence[str] | dict[str, float]) -> list[str]:
    names = sorted(elements)
    if "C" not in names:
        return names
    first = [name for name in ("C", "H", "D", "T") if name in names]
    return first + [name for name in names if name not in first]


def _amount(value: float) -> str:
    return "" if abs(value - 1) < 1e-9 else f"{value:.4g}"
