"""Numbers as CIF files write them: with standard uncertainties, as fractions, or not at all."""

from __future__ import annotations

import re
from math import isfinite

from sitesym.errors import ReadError
from sitesym.reading.text import printable

_NUMBER = re.compile(r"([+-]?(?:\d+\.?\d*|\.\d+)(?:[eEdD][+-]?\d+)?)(?:\(\d*\.?\d*\)?)?")
_FRACTION = re.compile(r"([+-]?)(\d+)\s*/\s*(\d+)(?:\(\d+\))?")
_UNKNOWN = frozenset({"", "?", ".", "'?'", "'.'"})


def is_unknown(text: str | None) -> bool:
    """The marks for "not known" and "does not apply", or nothing."""
    return text is None or text.strip() in _UNKNOWN


def parse_number(text: str | None) -> float | None:
    """The number in `0.123(4)`, `-.5`, `1/3` or `2.5E-3`; None for `?`, `.` and nothing.

    Raises ValueError for any other text, NaN and infinity included.
    """
    if text is None or is_unknown(text):
        return None
    stripped = text.strip()
    if fraction := _FRACTION.fullmatch(stripped):
        sign, above, below = fraction.groups()
        if int(below) == 0:
            raise ValueError(stripped)
        return float(sign + "1") * int(above) / int(below)
    match = _NUMBER.fullmatch(stripped)
    if not match:
        raise ValueError(stripped)
    value = float(match[1].replace("d", "e").replace("D", "e"))
    if not isfinite(value):
        raise ValueError(stripped)
    return value


def number_of(text: str | None, what: str) -> float | None:
    """The like, with a ReadError that names the item when the text is no number."""
    try:
        return parse_number(text)
    except ValueError:
        shown = printable(text or "", 40)
        raise ReadError(f"{what} is {shown!r}, which is no number.", "Correct it in the file.") from None
