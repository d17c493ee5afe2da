"""Intensities printed in the letters of the Raman tensors: `c²`, `(a + b)²/4`, `(a cos²θ + b sin²θ)²`."""

from __future__ import annotations

import re
from collections.abc import Sequence
from fractions import Fraction
from math import lcm, sqrt

import numpy as np

from sitesym.groups.operation import Floats

Complexes = np.typing.NDArray[np.complex128]
_ZERO = 1e-9
_SQUARED = {"1": "", "cos²θ": "cos⁴θ", "sin²θ": "sin⁴θ", "sin2θ": "sin²2θ", "cos2θ": "cos²2θ"}


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
        part = value / sqrt(root)
        for below in range(1, 13):
            above = round(part * below)
            if above and abs(part - above / below) < 1e-9:
                fraction = f"{above}" if below == 1 else f"({above}/{below})"
                return symbol if above == below else f"{fraction} {symbol}"
    return None


def _scaled(weight: float, square: str) -> str:
    near = Fraction(weight).limit_denominator(36)
    if abs(weight - near) > 1e-9:
        return f"{weight:.4g} {square}"
    over = f"/{near.denominator}" if near.denominator > 1 else ""
    return (square if near.numerator == 1 else f"{near.numerator} {square}") + over


def of_angle(upper: Floats, letters: Sequence[str], functions: Sequence[str], *, complex_letters: bool = False) -> str:
    """Σ over components of (Σ letter · coefficient · function)²: `upper` is (components, functions, letters), real.

    functions  "1" and those of an angle, `cos²θ`, `sin²θ`, `sin2θ`, `cos2θ`. With complex letters bars stand for round
    brackets. Components may be mixed among themselves where that makes the text shorter; "0" where all vanish.
    """
    blocks = np.asarray(upper, dtype=float)
    mixed = _squares_of(blocks.reshape(len(blocks), -1)).reshape(-1, *blocks.shape[1:])
    texts = [_angle_sum(one, letters, functions, complex_letters) for one in (blocks, mixed)]
    return min(texts, key=len)


def _squares_of(rows: Floats) -> Floats:
    """As few rows as there can be with the same sum of squares (Lagrange)."""
    rest = rows.T @ rows
    found = []
    for k in range(len(rest)):
        weight = rest[k, k]
        if weight > _ZERO:
            row = rest[k] / np.sqrt(weight)
            found.append(np.where(np.abs(row) < _ZERO, 0.0, row))
            rest = rest - np.outer(row, row)
    return np.array(found).reshape(-1, rows.shape[1])


def _angle_sum(blocks: Floats, letters: Sequence[str], functions: Sequence[str], bars: bool) -> str:
    terms = [_angle_square(block, letters, functions, bars) for block in blocks if np.abs(block).max(initial=0) > _ZERO]
    return " + ".join(terms) if terms else "0"


def _angle_square(block: Floats, letters: Sequence[str], functions: Sequence[str], bars: bool) -> str:
    """The square of one component's amplitude, letters and functions apart where it is a product of the two."""
    leading = block[np.abs(block) > _ZERO][0]
    block = block * np.sign(leading)
    i, j = np.unravel_index(int(np.abs(block).argmax()), block.shape)
    by_letter, by_function = block[i], block[:, j] / block[i, j]
    if not np.allclose(np.outer(by_function, by_letter), block, rtol=0, atol=_ZERO):
        coefficients, weight = _tidy([complex(value) for value in block.ravel() if abs(value) > _ZERO], 1.0)
        tidy = np.zeros(block.shape)
        tidy[np.abs(block) > _ZERO] = np.real(coefficients)
        return _scaled(weight, _squared(_angle_words(tidy, letters, functions), bars))
    words, weight = _one_square(by_letter, letters, 1.0, bars)
    kept = [(value, name) for value, name in zip(by_function, functions, strict=True) if abs(value) > _ZERO]
    if len(kept) == 1:
        return f"{_scaled(weight, words)} {_SQUARED[kept[0][1]]}".rstrip()
    turned, weight = _one_square(by_function, [f" {name}" for name in functions], weight, False)
    return f"{_scaled(weight, words)} {_without_one(turned)}"


def _one_square(values: Floats, names: Sequence[str], weight: float, bars: bool) -> tuple[str, float]:
    """The square of a sum of names, and the factor before it."""
    present = [(complex(value), name) for value, name in zip(values, names, strict=True) if abs(value) > _ZERO]
    if len(present) == 1:
        name = present[0][1]
        return (f"|{name}|²" if bars else f"{name}²"), weight * abs(present[0][0]) ** 2
    inside, scale = _tidy([value for value, _ in present], weight)
    words = _sum([(value, name) for value, (_, name) in zip(inside, present, strict=True)])
    return _squared(" ".join(words.split()), bars), scale


def _without_one(words: str) -> str:
    """`(2 1 + cos2θ)²` without the function 1 behind a number."""
    return re.sub(r"(?<=[\d)]) 1(?= |\))", "", words)


def _angle_words(tidy: Floats, letters: Sequence[str], functions: Sequence[str]) -> str:
    parts = []
    for coefficients, function in zip(tidy, functions, strict=True):
        present = [(complex(v), letter) for v, letter in zip(coefficients, letters, strict=True) if abs(v) > _ZERO]
        if present:
            words = _sum(present)
            parts.append(f"({words}) {function}" if len(present) > 1 else f"{words} {function}")
    return " + ".join(part.removesuffix(" 1") for part in parts).replace("+ -", "- ")


def _squared(words: str, bars: bool) -> str:
    return f"|{words}|²" if bars else f"({words})²"


def expanded(form: Floats, letters: Sequence[str]) -> str:
    """A real quadratic form multiplied out: `(8 a² + 4 ab + 3 b²)/15`; "0" where it vanishes.

    With complex letters a² stands for |a|² and ab for the real part of a*b.
    """
    pairs = [(j, k) for j in range(len(letters)) for k in range(j, len(letters)) if abs(form[j, k]) > _ZERO]
    if not pairs:
        return "0"
    values = [float(form[j, k]) * (1 if j == k else 2) for j, k in pairs]
    names = [f"{letters[j]}²" if j == k else f"{letters[j]}{letters[k]}" for j, k in pairs]
    fractions = [Fraction(value).limit_denominator(360) for value in values]
    exact = all(abs(value - near) < _ZERO for value, near in zip(values, fractions, strict=True))
    denominator = lcm(*(near.denominator for near in fractions)) if exact else 1
    words = _sum([(complex(value * denominator), f" {name}") for value, name in zip(values, names, strict=True)])
    words = re.sub(r"^- ", "-", " ".join(words.split()))
    if denominator == 1:
        return words
    return f"({words})/{denominator}" if len(names) > 1 else f"{words}/{denominator}"
