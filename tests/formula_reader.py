"""Reads intensities as they are printed, `(a cos²θ + b sin²θ)²/4 + √3 |c|² sin²2θ`, and gives their value.

Written from the notation of the trade, with no code of the project: letters, numbers, roots, fractions in brackets,
products by standing side by side, squares, absolute values, cos and sin of θ or 2θ with a power before the argument.
"""

from __future__ import annotations

import re

import numpy as np

_TOKEN = re.compile(r"\s*((?:cos|sin)[²⁴]?2?θ|\d+(?:\.\d+)?(?:e-?\d+)?|√\d+|[a-z]|[-+/()|²])")
_POWERS = {"": 1, "²": 2, "⁴": 4}


class Reader:
    """A descent through one formula; `letters` may be complex, the angle is in radians."""

    def __init__(self, text: str, letters: dict[str, complex], angle: float = 0.0) -> None:
        self.tokens: list[str] = []
        place = 0
        text = text.rstrip()
        while place < len(text):
            found = _TOKEN.match(text, place)
            if found is None:
                raise ValueError(f"'{text[place:]}' cannot be read")
            self.tokens.append(found[1])
            place = found.end()
        self.letters, self.angle, self.place = letters, angle, 0

    def value(self) -> complex:
        result = self.sum()
        if self.place != len(self.tokens):
            raise ValueError(f"nothing was expected after {self.tokens[: self.place]}")
        return result

    @property
    def next(self) -> str:
        return self.tokens[self.place] if self.place < len(self.tokens) else ""

    def take(self) -> str:
        self.place += 1
        return self.tokens[self.place - 1]

    def sum(self) -> complex:
        sign = -1 if self.next == "-" and self.take() else 1
        result = sign * self.product()
        while self.next in ("+", "-"):
            sign = 1 if self.take() == "+" else -1
            result += sign * self.product()
        return result

    def product(self) -> complex:
        result: complex = self.power()
        while self.next and (self.next not in "+-)|" or (self.next == "|" and not self.inside)):
            if self.next == "/":
                self.take()
                result /= self.power()
            else:
                result *= self.power()
        return result

    @property
    def inside(self) -> bool:
        """Whether an absolute value is open, so that a bar closes it."""
        return self.tokens[: self.place].count("|") % 2 == 1

    def power(self) -> complex:
        result = self.atom()
        if self.next == "²":
            self.take()
            result = result**2
        return result

    def atom(self) -> complex:
        token = self.take()
        if token in "(|":
            result = self.sum()
            if self.take() != {"(": ")", "|": "|"}[token]:
                raise ValueError("a bracket stays open")
            return abs(result) if token == "|" else result
        if token.startswith("√"):
            return complex(np.sqrt(float(token[1:])))
        if token.startswith(("cos", "sin")):
            turns = 2 if "2θ" in token else 1
            power = next((power for sign, power in _POWERS.items() if sign and sign in token), 1)
            function = np.cos if token.startswith("cos") else np.sin
            return complex(function(turns * self.angle) ** power)
        return complex(float(token)) if token[0].isdigit() else self.letters[token]


def evaluated(text: str, letters: dict[str, complex], degrees: float = 0.0) -> float:
    """The value of a printed intensity."""
    return float(np.real(Reader(text, letters, np.radians(degrees)).value()))


def is_exact(text: str) -> bool:
    """Whether no coefficient is a decimal fraction, which is printed with four figures."""
    return "." not in text
