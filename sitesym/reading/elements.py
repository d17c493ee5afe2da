"""Chemical symbols: which words are elements, and which element a site's name means.

Covalent radii are those of the library gemmi: Cordero and others (2008), Dalton Trans. 2832.
"""

from __future__ import annotations

import re
from collections.abc import Collection
from functools import cache

HYDROGENS = frozenset({"H", "D", "T"})
"""The isotopes of hydrogen: alike in position and bonding, unlike in mass."""

_HEAVIEST = 98
"""Labels are read as elements up to californium only; heavier ones must be named in the formula."""

_WATER = re.compile(r"(?i)(wat|water|hoh|w|ow|aq)\d*[a-z']?$")
_PLAIN_TYPE = re.compile(r"([A-Za-z]{1,2})(\d*\.?\d*[+-]?\d*)")
_NOT_ATOMS = re.compile(r"(?i)(x|xx|lp|du|dum|bq|gh|q|vac|va|centroid|\?|\.)?\d*")
_CENTROID = re.compile(r"(Cg|Ct|Cnt|Cent)\d*[A-Z]?")
_HYDROGEN_NAMES = frozenset({"HO", "HF"})
"""Labels in capitals that are far more often hydrogen bound to something than holmium or hafnium."""


@cache
def symbols() -> dict[str, int]:
    """Chemical symbol -> atomic number, with D and T beside H."""
    import gemmi

    numbers = {gemmi.Element(number).name: number for number in range(1, 119)}
    return numbers | {"D": 1, "T": 1}


@cache
def covalent_radius(element: str) -> float | None:
    """Covalent radius in Å, None for a name that is no element."""
    import gemmi

    if element not in symbols():
        return None
    return float(gemmi.Element("H" if element in HYDROGENS else element).covalent_r)


@cache
def atomic_weight(element: str) -> float:
    """Standard atomic weight; that of the isotope for D (2.014) and T (3.016)."""
    import gemmi

    return {"D": 2.014, "T": 3.016}.get(element) or float(gemmi.Element(element).weight)


def element_of_type(text: str, known: Collection[str]) -> str | None:
    """The element that a type symbol such as `Fe3+`, `O2-`, `D0` or `CU` names, None when it names none."""
    match = _PLAIN_TYPE.fullmatch(text.strip())
    if not match:
        return None
    symbol = match[1].capitalize()
    if symbol not in symbols() or (symbol == "T" and "T" not in known):
        return None
    first = symbol[:1]
    if match[1].isupper() and len(symbol) == 2 and known and symbol not in known and first in known:
        return first
    return symbol


def elements_of_label(label: str, known: Collection[str]) -> tuple[str, ...]:
    """The elements that a site's label may mean, likeliest first; more than one where only the context can tell.

    `known` are the elements of the formula, empty when the file gives none.
    """
    letters = (re.search(r"[A-Za-z]+", label) or [""])[0]
    if _WATER.fullmatch(re.sub(r"[^A-Za-z0-9']", "", label)) and not (letters[:1].upper() == "W" and "W" in known):
        return ("O",)
    two, one = letters[:2].capitalize(), letters[:1].upper()
    names = [name for name in dict.fromkeys((two, one)) if _may_be(name, known)]
    if known and (inside := [name for name in names if name in known]):
        names = inside
    if len(names) < 2 or letters[1:2].islower():
        return tuple(names[:1])
    if not known and letters[:2] in _HYDROGEN_NAMES:
        return (one, two)
    return tuple(names)


def _may_be(name: str, known: Collection[str]) -> bool:
    if name == "T":
        return "T" in known
    if name == "D":
        return not known or not HYDROGENS.isdisjoint(known)
    return name in known or 0 < symbols().get(name, 0) <= _HEAVIEST


def is_dummy(type_symbol: str, label: str) -> bool:
    """A centroid, lone pair, vacancy or other mark that is no atom."""
    if type_symbol.strip():
        return bool(_NOT_ATOMS.fullmatch(type_symbol.strip()))
    return bool(_CENTROID.fullmatch(label)) or label.lower().rstrip("0123456789") in ("vac", "va", "lp", "dum", "q")
