"""A CIF text as data blocks: tags in any letter case and old or new spelling, and the block that holds a structure."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from sitesym.errors import NotAStructureError, ReadError, UsageError
from sitesym.reading.cif_values import is_unknown
from sitesym.reading.text import counted, listed, printable

if TYPE_CHECKING:
    import gemmi.cif

_HEADER = re.compile(r"(?im)^[ \t]*data_\S*")
_FAULT = re.compile(r"\w+:(\d+):\d+\(\d+\): (.*)", re.DOTALL)
_COORDINATES = ("_atom_site_fract_x", "_atom_site_cartn_x")


@dataclass(frozen=True, slots=True)
class Block:
    """One data block.

    name     what follows `data_`.
    columns  tag in lower case, with dots as underscores -> the values, one for an item outside a loop.
    """

    name: str
    columns: dict[str, tuple[str, ...]]

    def column(self, *tags: str) -> tuple[str, ...]:
        """The values of the first of these tags that is present, () when none is."""
        return next((self.columns[tag] for tag in tags if tag in self.columns), ())

    def value(self, *tags: str) -> str | None:
        """The first known single value among these tags."""
        for tag in tags:
            values = self.columns.get(tag, ())
            if values and not is_unknown(values[0]):
                return values[0].strip()
        return None

    @property
    def has_atoms(self) -> bool:
        """At least one atom with a coordinate."""
        return any(not is_unknown(value) for tag in _COORDINATES for value in self.columns.get(tag, ()))


def parse(text: str, name: str) -> tuple[Block, ...]:
    """All data blocks of a CIF text.

    Raises ReadError with the line where the text is no CIF.
    """
    header = _HEADER.search(text)
    if header is None:
        raise ReadError(f"{name} has no line that begins with data_, so it is no CIF.", "Check what was saved.")
    lines_before = text.count("\n", 0, header.start())
    text = "\n" * lines_before + text[header.start() :]
    try:
        return _blocks(text)
    except ValueError as error:
        first = error
    try:
        return _blocks(re.sub(r"[^\x20-\x7e\t\r\n]", "?", text))
    except ValueError:
        raise _syntax_error(str(first), text, name) from None


def _blocks(text: str) -> tuple[Block, ...]:
    from gemmi import cif

    document = cif.Document()
    document.parse_string(text)
    return tuple(Block(block.name.strip(), _columns(block)) for block in document)


def _columns(block: gemmi.cif.Block) -> dict[str, tuple[str, ...]]:
    from gemmi import cif

    columns: dict[str, tuple[str, ...]] = {}
    for item in block:
        pair: Any = item.pair
        if pair is not None:
            columns.setdefault(_plain(pair[0]), (cif.as_string(pair[1]),))
        elif item.loop is not None:
            for tag in filter(_is_wanted, item.loop.tags):
                columns.setdefault(_plain(tag), tuple(map(cif.as_string, block.find_loop(tag))))
    return columns


def _plain(tag: str) -> str:
    return tag.lower().replace(".", "_")


def _is_wanted(tag: str) -> bool:
    """Loops of reflections and distances are long, and of no use here."""
    return _plain(tag).startswith(("_atom_site_", "_symmetry_", "_space_group", "_cell_", "_chemical_"))


def _syntax_error(message: str, text: str, name: str) -> ReadError:
    match = _FAULT.match(message)
    if not match:
        return ReadError(f"{name} is no valid CIF: {printable(message)}.", "Correct the file, or fetch it again.")
    number, fault = int(match[1]), printable(match[2])
    lines = text.splitlines()
    shown = printable(lines[number - 1], 60) if number <= len(lines) else ""
    where = f"{name}, line {number}" + (f" ({shown})" if shown else "")
    if "Wrong number of values" in fault:
        return ReadError(
            f"{where}: the loop that ends here lacks a value or has one too many.",
            "Complete the loop; the file may have been cut off.",
        )
    if "unterminated" in fault:
        return ReadError(f"{where}: a quoted text is not closed.", "Close it; the file may have been cut off.")
    return ReadError(f"{where}: this is no valid CIF ({fault}).", "Quote values with spaces, or fetch it again.")


def choose(blocks: tuple[Block, ...], wanted: str | int | None, name: str) -> Block:
    """The block that holds a structure, or the wanted one (name, or number from 1).

    Raises NotAStructureError when none does, ReadError when several do and none is chosen, UsageError when the wanted
    one is missing.
    """
    if wanted is not None:
        return _wanted(blocks, wanted, name)
    holding = [block for block in blocks if block.has_atoms]
    if not holding:
        raise NotAStructureError(
            f"{name} lists no atoms with coordinates.", "Give a CIF with _atom_site_fract_x, _y and _z."
        )
    if len(holding) > 1:
        raise ReadError(
            f"{name} holds {len(holding)} structures: {listed([block.name for block in holding], 12)}.",
            f"Choose one by its name, as --block {printable(holding[0].name, 40) or 1}, or by its number.",
        )
    return holding[0]


def _wanted(blocks: tuple[Block, ...], wanted: str | int, name: str) -> Block:
    named = [block for block in blocks if block.name.lower() == str(wanted).strip().lower().removeprefix("data_")]
    if named:
        return named[0]
    holding = [block for block in blocks if block.has_atoms] or list(blocks)
    number = int(wanted) if str(wanted).strip().isdecimal() else 0
    if 1 <= number <= len(holding):
        return holding[number - 1]
    names = listed([block.name for block in holding], 12)
    raise UsageError(
        f"{name} has no data block {printable(str(wanted), 40)!r}.",
        f"It holds {counted(len(holding), 'structure')}: {names}.",
    )
