"""Words from files, made safe to print."""

from __future__ import annotations

import unicodedata


def printable(text: str, limit: int = 200) -> str:
    """The text without control characters, on one line, at most `limit` characters long.

    Markup and formulas stay as they are: views escape them. Control characters go, since they can steer a terminal.
    """
    kept = "".join(" " if unicodedata.category(sign) in ("Cc", "Cf", "Cs", "Zl", "Zp") else sign for sign in text)
    line = " ".join(kept.split())
    return line if len(line) <= limit else line[: limit - 1] + "…"


def listed(names: list[str], limit: int = 5) -> str:
    """`a, b, c and 4 more`."""
    shown = ", ".join(printable(name, 60) for name in names[:limit])
    return shown if len(names) <= limit else f"{shown} and {len(names) - limit} more"


def counted(number: int, noun: str, plural: str = "") -> str:
    """`1 atom`, `2 atoms`."""
    return f"{number} {noun}" if number == 1 else f"{number} {plural or noun + 's'}"


def amount(value: float) -> str:
    """A number of atoms: whole where it is whole, else three significant figures after rounding noise is gone."""
    return f"{round(value)}" if abs(value - round(value)) < 5e-3 else f"{value:.4g}"
