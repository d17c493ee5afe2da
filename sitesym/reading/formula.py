"""A chemical formula as files write it -> atoms in one formula unit."""

from __future__ import annotations

import re

from sitesym.reading.elements import symbols

_TOKEN = re.compile(r"([A-Z][a-z]?)|([(\[{])|([)\]}])|(\d+/\d+|\d*\.?\d+|\d+\.)|\s+")
_PARTS = re.compile(r"[,;·*]|(?<=\s)\.(?=\s)")
_FACTOR = re.compile(r"\s*(\d+/\d+|\d*\.?\d+)?")


def parse_formula(text: str | None) -> dict[str, float]:
    """Element -> atoms in `C107 H142 N14 O26`, `Ca (Al1.94 Fe.06) Si2 O10 D4`, `Ca S O4 . 2 H2 O`, `Fe1/3 Li I2 O6`.

    Returns {} when the text is missing or is no formula with definite numbers (`(C2 H4)n`).
    """
    total: dict[str, float] = {}
    for part in _PARTS.split(text or ""):
        match = _FACTOR.match(part)
        factor = match[1] if match else None
        amounts = _parse_part(part[match.end() :] if match else part)
        if amounts is None:
            return {}
        for element, count in amounts.items():
            total[element] = total.get(element, 0.0) + count * (_value(factor) if factor else 1.0)
    return {element: count for element, count in total.items() if count > 0}


def unknown_symbols(text: str | None) -> frozenset[str]:
    """What is written like a chemical symbol in a formula, and is none: `Xx` in `Na Xx O3`."""
    return frozenset(re.findall(r"[A-Z][a-z]?(?![a-z])", text or "")) - frozenset(symbols())


def _parse_part(text: str) -> dict[str, float] | None:
    """One part without separators; None when it holds anything but elements, numbers and brackets."""
    levels: list[list[tuple[dict[str, float], float]]] = [[]]
    position = 0
    while position < len(text):
        match = _TOKEN.match(text, position)
        if match is None:
            return None
        position = match.end()
        element, opening, closing, number = match.groups()
        if element and element in symbols():
            levels[-1].append(({element: 1.0}, 1.0))
        elif opening:
            levels.append([])
        elif closing and len(levels) > 1:
            levels[-2].append((_sum(levels.pop()), 1.0))
        elif number and levels[-1]:
            levels[-1][-1] = (levels[-1][-1][0], _value(number))
        elif element or closing or number:
            return None
    return _sum(levels[0]) if len(levels) == 1 else None


def _sum(terms: list[tuple[dict[str, float], float]]) -> dict[str, float]:
    total: dict[str, float] = {}
    for amounts, factor in terms:
        for element, count in amounts.items():
            total[element] = total.get(element, 0.0) + count * factor
    return total


def _value(text: str) -> float:
    numerator, _, denominator = text.partition("/")
    return float(numerator) / float(denominator or 1) if float(denominator or 1) else 0.0
