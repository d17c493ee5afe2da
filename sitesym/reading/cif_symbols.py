"""Space-group symbols as files write them -> settings tabulated in the library gemmi."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

import numpy as np

from sitesym.reading.listing import DENOMINATOR, Operations
from sitesym.reading.text import printable
from sitesym.structure import Floats

if TYPE_CHECKING:
    import gemmi

_MARKUP = re.compile(r"<[^>]*>|[_~$'\"\\]")
_SCREW = re.compile(r"\((\d)\)")
_BAR = re.compile("([1346])[\u0304\u0305]")
_CHOICE = re.compile(r"(?i)\s*(?:[:;]\s*([12HRSZ])|\(?\s*origin(?:\s+choice)?\s*([12])\s*\)?|\s([HRSZ]))$")
_JOINED_CHOICE = re.compile(r"([Rr].*\S)([HRhr])|(.+[a-z])([SZ])")
_ORIGINS = {"S": "1", "Z": "2"}
_SLASHED = re.compile(r"(-?[2346][1-5]?)/([a-z])")

METRIC = 0.01
"""A cell fits a group when its metric changes by less than this part under every operation."""


def clean_symbol(text: str | None) -> str:
    """A Hermann-Mauguin symbol without markup: `P2(1)/n` -> `P21/n`, `P 2~1~/c` -> `P 21/c`; "" for `?`."""
    plain = _BAR.sub(r"-\1", _MARKUP.sub("", printable(text or "", 60)))
    plain = " ".join(_SCREW.sub(r"\1", plain).split())
    return "" if plain in ("?", ".") else plain


def settings_of_symbol(symbol: str) -> list[gemmi.SpaceGroup]:
    """The tabulated settings that a cleaned Hermann-Mauguin symbol may mean.

    Several where it leaves the origin or the axes of a rhombohedral group open, none when it is no known symbol.
    """
    import gemmi

    bare, choice = _split_choice(symbol)
    found = next(
        (group for name in _spellings(bare) if (group := gemmi.find_spacegroup_by_name(name)) is not None), None
    )
    if found is None:
        return []
    settings = [group for group in gemmi.spacegroup_table() if group.hm == found.hm]
    chosen = [group for group in settings if group.ext == choice]
    return chosen or settings


def _split_choice(symbol: str) -> tuple[str, str]:
    """`F d -3 m :2` -> `F d -3 m` and 2; `R3cH` -> `R3c` and H; the letters S and Z stand for origins 1 and 2."""
    match = _CHOICE.search(symbol)
    if match:
        letter = next(part for part in match.groups() if part).upper()
        return symbol[: match.start()], _ORIGINS.get(letter, letter)
    if joined := _JOINED_CHOICE.fullmatch(symbol):
        bare, letter = (part for part in joined.groups() if part)
        return bare, _ORIGINS.get(letter, letter.upper())
    return symbol, ""


def _spellings(symbol: str) -> list[str]:
    """The symbol as it stands, without spaces, and shortened from the full form (`P 21/n 21/m 21/a` -> `P n m a`)."""
    names = [symbol, symbol.replace(" ", "")]
    lattice, *parts = symbol.split() or [""]
    if len([part for part in parts if part != "1"]) > 1:
        keep_first = parts[0][:1] in "346" and "-3" not in parts
        short = [part if (place == 0 and keep_first) else _SLASHED.sub(r"\2", part) for place, part in enumerate(parts)]
        names.append(" ".join([lattice, *short]))
    return names


def setting_of_hall(symbol: str) -> gemmi.SpaceGroup | None:
    """The tabulated setting with this Hall symbol, None when it is none."""
    import gemmi

    try:
        return gemmi.find_spacegroup_by_ops(gemmi.symops_from_hall(symbol.replace("''", '"')))
    except (RuntimeError, ValueError):
        return None


def settings_of_number(number: int) -> list[gemmi.SpaceGroup]:
    """All tabulated settings of a space-group type, the reference setting first."""
    import gemmi

    settings = [group for group in gemmi.spacegroup_table() if group.number == number]
    return sorted(settings, key=lambda group: not group.is_reference_setting())


def setting_of_operations(operations: Operations) -> gemmi.SpaceGroup | None:
    """The tabulated setting with exactly these operations, None when there is none."""
    import gemmi

    rotations = (operations.rotations * DENOMINATOR).tolist()
    group = gemmi.GroupOps([_operation(W, w) for W, w in zip(rotations, operations.translations.tolist(), strict=True)])
    return gemmi.find_spacegroup_by_ops(group)


def _operation(rotation: list[list[int]], translation: list[int]) -> gemmi.Op:
    import gemmi

    operation = gemmi.Op("x,y,z")
    operation.rot, operation.tran = rotation, translation
    return operation


def operations_of(setting: gemmi.SpaceGroup) -> Operations:
    """All operations of a tabulated setting, centring included."""
    return as_operations(list(setting.operations()))


def as_operations(operations: list[gemmi.Op]) -> Operations:
    """Operations of the library as integer arrays."""
    rotations = np.array([operation.rot for operation in operations], dtype=np.int64) // DENOMINATOR
    translations = np.array([operation.tran for operation in operations], dtype=np.int64) % DENOMINATOR
    return Operations(rotations, translations)


def fits_cell(operations: Operations, lattice: Floats) -> bool:
    """The operations leave the metric of the cell as it is, within rounding of the cell's numbers."""
    metric = lattice @ lattice.T
    moved = np.einsum("mki,kl,mlj->mij", operations.rotations, metric, operations.rotations)
    return bool(np.abs(moved - metric).max() <= METRIC * np.abs(metric).max())
