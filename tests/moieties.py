"""Formulas of moieties as CIF files state them, and the like of our own units, to be compared.

The syntax is that of the core dictionary of the CIF (`_chemical_formula_moiety`): moieties separated by commas, each
with an optional factor before parentheses and its charge behind.
"""

import re
from collections import Counter
from fractions import Fraction
from math import gcd

from sitesym.units import Unit

_CHARGE = re.compile(r"(?:(?<=\s)\d+)?[+-](?=[\s)]|$)")
_TOKEN = re.compile(r"\s*(?:([A-Z][a-z]?)|([(\[])|([)\]]))(\d+(?:\.\d+)?)?")

Composition = tuple[tuple[str, Fraction], ...]


def stated(text: str) -> dict[Composition, Fraction]:
    """Composition -> count of each moiety that a file states; ValueError where it cannot be read."""
    result: dict[Composition, Fraction] = {}
    for part in _split(text.strip().strip("'\"; \n")):
        factor, body = re.fullmatch(r"\s*(\d+(?:\.\d+)?|n|m)?\s*(.*?)\s*", part, re.DOTALL).groups()
        if factor in ("n", "m"):
            raise ValueError(f"unknown number of {body}")
        key = composition(_counts(_CHARGE.sub("", body).strip()))
        result[key] = result.get(key, Fraction(0)) + Fraction(factor or 1)
    return result


def _split(text: str) -> list[str]:
    parts, depth = [""], 0
    for letter in text:
        depth += (letter in "([") - (letter in ")]")
        if letter == "," and depth == 0:
            parts.append("")
        else:
            parts[-1] += letter
    return parts


def _counts(text: str) -> Counter:
    """Element counts of a formula with brackets."""
    stack: list[Counter] = [Counter()]
    position = 0
    while position < len(text):
        match = _TOKEN.match(text, position)
        if match is None:
            raise ValueError(f"cannot read '{text[position:]}'")
        element, opening, closing, number = match.groups()
        position = match.end()
        if opening:
            stack.append(Counter())
        elif closing:
            inner = stack.pop()
            for name, count in inner.items():
                stack[-1][name] += count * Fraction(number or 1)
        else:
            stack[-1]["H" if element in "DT" else element] += Fraction(number or 1)
    return stack[0]


def composition(counts: dict[str, Fraction]) -> Composition:
    return tuple(sorted((name, Fraction(count)) for name, count in counts.items() if count))


def found(units: tuple[Unit, ...]) -> tuple[dict[Composition, Fraction], set[Composition]]:
    """Composition -> count of our units, occupancies counted, and which of them are chains, layers and nets; these are
    counted by their smallest formula.
    """
    result: dict[Composition, Fraction] = {}
    nets = set()
    for unit in units:
        counts: Counter = Counter()
        for element, count in re.findall(r"([A-Z][a-z]?)([0-9.]*)", unit.formula):
            counts["H" if element in "DT" else element] += Fraction(count or "1")
        key, number = composition(counts), Fraction(unit.occupancy).limit_denominator(100)
        if unit.is_net:
            key, times = smallest(key)
            number *= times
            nets.add(key)
        result[key] = result.get(key, Fraction(0)) + number
    return result, nets


def smallest(key: Composition) -> tuple[Composition, int]:
    """The formula divided by the common divisor of its counts, and that divisor; fractional counts stay as they are."""
    if any(count.denominator != 1 for _, count in key):
        return key, 1
    divisor = gcd(*(int(count) for _, count in key))
    return tuple((name, count / divisor) for name, count in key), divisor


def agree(parts: dict[Composition, Fraction], own: dict[Composition, Fraction], nets: set[Composition]) -> bool:
    """The same moieties in the same proportion; those that we find endless are compared by their smallest formula."""
    compared: dict[Composition, Fraction] = {}
    for key, count in parts.items():
        reduced, times = smallest(key)
        key, count = (reduced, count * times) if reduced in nets else (key, count)
        compared[key] = compared.get(key, Fraction(0)) + count
    if compared.keys() != own.keys():
        return False
    ratios = [own[key] / count for key, count in compared.items()]
    return max(ratios) - min(ratios) < Fraction(1, 50) * max(ratios)


def words(parts: dict[Composition, Fraction]) -> str:
    """The parts in one line, counts divided by the smallest."""
    least = min(parts.values(), default=Fraction(1))
    return ", ".join(
        f"{_plain(count / least)} " * (count != least) + "".join(f"{name}{_plain(n)}" for name, n in key)
        for key, count in parts.items()
    )


def _plain(value: Fraction) -> str:
    return "" if value == 1 else f"{float(value):.4g}"
