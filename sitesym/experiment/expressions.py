"""Intensities printed in the letters of the Raman tensors: `c²`, `(a + b)²/4`, `(a cos²θ + b sin²θ)²`."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction

import numpy as np

from sitesym.groups.operation import Floats

Complexes = np.typing.NDArray[np.complex128]
_ZERO = 1e-9


def from_form(form: Complexes, letters: Sequence[str]) -> str:
    """A Hermitian form as a sum of squares with real or complex letters; "0" where it vanishes.

    The form is written by completing squares letter by letter (Lagrange), which gives back the usual shapes.
    """
    rest = np.array(form, dtype=complex)
    terms: list[str] = []
    for k in range(len(letters)):
        weight = rest[k, k].real
        if weight < _ZERO:
            continue
        row = rest[k] / weight
        terms.append(_square(weight, row, letters))
        rest = rest - weight * np.outer(row.conj(), row)
    return " + ".join(terms) if terms else "0"


def _square(weight: float, row: Complexes, letters: Sequence[str]) -> str:
    present = [(value, letter) for value, letter in zip(row, letters, strict=True) if abs(value) > _ZERO]
    if len(present) == 1:
        return _scaled(weight * abs(present[0][0]) ** 2, f"{present[0][1]}²")
    inside, scale = _tidy([value for value, _ in present], weight)
    words = _sum([(value, letter) for value, (_, letter) in zip(inside, present, strict=True)])
    return _scaled(scale, f"|{words}|²" if "i" in words else f"({words})²")


def _tidy(values: list[complex], weight: float) -> tuple[list[complex], float]:
    """Coefficients and the factor before their square: whole numbers or roots where there are such, else a factor 1."""
    smallest = min(abs(value) for value in values)
    scaled = [value / smallest for value in values]
    if all(_is_simple(abs(part)) for value in scaled for part in (value.real, value.imag)):
        return scaled, weight * smallest**2
    return [value * np.sqrt(weight) for value in values], 1.0


def _is_simple(value: float) -> bool:
    return value < _ZERO or _simple(value) is not None


def _sum(terms: list[tuple[complex, str]]) -> str:
    text = ""
    for value, letter in terms:
        real = abs(value.imag) < _ZERO
        number = value.real if real else (value / 1j).real if abs(value.real) < _ZERO else None
        if number is None:
            part, sign = f"({value.real:.3g}{value.imag:+.3g}i){letter}", "+"
        else:
            sign = "-" if number < 0 else "+"
            part = f"{_number(abs(number))}{'' if real else 'i'}{letter}"
        text += f" {sign} {part}" if text else (f"-{part}" if sign == "-" else part)
    return text


def _number(value: float) -> str:
    """A factor before a letter: nothing for 1, else a fraction, a root, or four figures."""
    found = _simple(value)
    return f"{value:.4g} " if found is None else found


def _simple(value: float) -> str | None:
    """A small fraction, perhaps with a root, as a factor before a letter; None for any other number."""
    if abs(value - 1) < 1e-9:
        return ""
    for root, symbol in ((1.0, ""), (2.0, "√2 "), (3.0, "√3 "), (6.0, "√6 ")):
        near = Fraction(value / np.sqrt(root)).limit_denominator(12)
        if near and abs(value / np.sqrt(root) - near) < 1e-9:
            fraction = f"{near.numerator}" if near.denominator == 1 else f"({near.numerator}/{near.denominator})"
            return symbol if near == 1 else f"{fraction} {symbol}"
    return None


def _scaled(weight: float, square: str) -> str:
    near = Fraction(weight).limit_denominator(36)
    if abs(weight - near) > 1e-9:
        return f"{weight:.4g} {square}"
    over = f"/{near.denominator}" if near.denominator > 1 else ""
    return (square if near.numerator == 1 else f"{near.numerator} {square}") + over


def of_angle(upper: Floats, letters: Sequence[str], functions: Sequence[str]) -> str:
    """Σ over components of (Σ letter · coefficient · function)²: `upper` is (components, functions, letters), real."""
    terms: list[str] = []
    for component in upper:
        parts = []
        for coefficients, function in zip(component, functions, strict=True):
            present = [(complex(v), letter) for v, letter in zip(coefficients, letters, strict=True) if abs(v) > _ZERO]
            if present:
                words = _sum(present)
                parts.append(f"({words}) {function}" if len(present) > 1 else f"{words} {function}")
        if parts:
            terms.append("(" + " + ".join(parts).replace("+ -", "- ") + ")²")
    return " + ".join(terms) if terms else "0"
