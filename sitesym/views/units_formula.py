"""The units of a crystal in one line, and its formula written by them: `CaSO₄·2H₂O`, `(NH₄)₂SO₄`."""

from __future__ import annotations

from math import gcd
from typing import TYPE_CHECKING

from sitesym.bonding.chemistry import formula_rank
from sitesym.views.labels import TEXT, Style
from sitesym.views.molecule_sentences import units_words

if TYPE_CHECKING:
    from sitesym.analysis import Analysis
    from sitesym.molecular import MolecularAnalysis

_ANIONS = ("F", "Cl", "Br", "I", "O", "S", "Se", "Te")
"""Elements that stand behind as single atoms."""

_CATION, _ANION, _NEUTRAL = range(3)
_Part = tuple[int, tuple[int, float, str], str, bool]


def units_entries(analysis: Analysis, style: Style = TEXT) -> tuple[str, ...]:
    """The units, and last the formula that they make: `2 SO₄ (Td on C₂)`, …, `together CaSO₄·2H₂O`."""
    formula = units_formula(analysis, style)
    return (*units_words(analysis, style), *([style.plain("together ") + formula] if formula else []))


def units_formula(analysis: Analysis, style: Style = TEXT) -> str:
    """Cations, anions, then neutral molecules after a raised dot; "" where it is not simple or adds nothing.

    It is simple where the crystal is ordered and holds single atoms and common molecules and ions only.
    """
    molecular = analysis.molecular
    if molecular is None or molecular.nets or molecular.unfollowed or not analysis.structure.is_ordered:
        return ""
    if not molecular.molecules or any(row.known is None for row in molecular.molecules):
        return ""
    amounts = _amounts(molecular)
    divisor = gcd(*amounts.values())
    ions = [(part, count // divisor) for part, count in sorted(amounts.items()) if part[0] != _NEUTRAL]
    guests = [(part, count // divisor) for part, count in sorted(amounts.items()) if part[0] == _NEUTRAL]
    if not ions:
        return ""
    written = "".join(_ion(part, count) for part, count in ions)
    formulas = [written, *(part[2] for part, _ in guests)]
    if len(formulas) == 1 and written == analysis.formula:
        return ""
    numbers = ["", *(str(count) if count > 1 else "" for _, count in guests)]
    terms = (number + style.formula(one) for number, one in zip(numbers, formulas, strict=True))
    return style.plain("·").join(terms)


def _amounts(molecular: MolecularAnalysis) -> dict[_Part, int]:
    """How many of each kind of unit the primitive cell holds."""
    amounts: dict[_Part, int] = {}
    for row in molecular.molecules:
        charge = row.known.charge if row.known else 0
        kind = _CATION if charge > 0 else _ANION if charge < 0 else _NEUTRAL
        part = (kind, (0, 0.0, ""), row.name, True)
        amounts[part] = amounts.get(part, 0) + row.units.count
    for one in molecular.atoms:
        name = one.units.unit.name
        part = (_ANION if name in _ANIONS else _CATION, formula_rank(name), name, False)
        amounts[part] = amounts.get(part, 0) + one.units.count
    return amounts


def _ion(part: _Part, count: int) -> str:
    name, several = part[2], part[3]
    if count == 1:
        return name
    return f"({name}){count}" if several else f"{name}{count}"
