"""What a CIF calls its space group: Hall symbol, Hermann-Mauguin symbol and number, each as tabulated settings."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from sitesym.reading.cif_document import Block
from sitesym.reading.cif_symbols import (
    clean_symbol,
    setting_of_hall,
    setting_of_operations,
    settings_of_number,
    settings_of_symbol,
)
from sitesym.reading.cif_values import parse_number
from sitesym.reading.listing import Operations
from sitesym.reading.text import printable
from sitesym.structure import DeclaredSymmetry

if TYPE_CHECKING:
    import gemmi

_SYMBOL_TAGS = (
    "_space_group_name_h-m_alt",
    "_symmetry_space_group_name_h-m",
    "_space_group_name_h-m_full",
    "_space_group_name_h-m",
)
_HALL_TAGS = ("_space_group_name_hall", "_symmetry_space_group_name_hall")
_NUMBER_TAGS = ("_space_group_it_number", "_symmetry_int_tables_number")


@dataclass(frozen=True, slots=True)
class Named:
    """One of the file's names for its group.

    word      what kind of name it is (`Hall symbol`), for messages.
    text      the name as it stands, cleaned.
    settings  the tabulated settings that it may mean, at least one.
    """

    word: str
    text: str
    settings: tuple[gemmi.SpaceGroup, ...]

    @property
    def number(self) -> int:
        """Number of the space-group type."""
        return self.settings[0].number


def named_groups(block: Block) -> tuple[Named, ...]:
    """All names in the block that are understood, the most exact first."""
    hall, symbol, number = block.value(*_HALL_TAGS), stated_symbol(block), _number(block)
    setting = setting_of_hall(hall) if hall else None
    found = (
        ("Hall symbol", printable(hall or "", 60), () if setting is None else (setting,)),
        ("Hermann-Mauguin symbol", symbol, tuple(settings_of_symbol(symbol)) if symbol else ()),
        ("space-group number", str(number), tuple(settings_of_number(number)) if number else ()),
    )
    return tuple(Named(word, text, settings) for word, text, settings in found if settings)


def stated_symbol(block: Block) -> str:
    """The Hermann-Mauguin symbol as it stands, cleaned; "" when there is none."""
    return clean_symbol(block.value(*_SYMBOL_TAGS))


def declared_symmetry(block: Block, names: tuple[Named, ...], operations: Operations) -> DeclaredSymmetry:
    """What the file declares: the number of the operations used, else of its names, and its symbols."""
    setting = setting_of_operations(operations)
    hall = block.value(*_HALL_TAGS)
    return DeclaredSymmetry(
        number=setting.number if setting is not None else (names[0].number if names else None),
        hermann_mauguin=stated_symbol(block) or (setting.xhm() if setting is not None else None),
        hall=setting.hall if setting is not None else (printable(hall, 60) if hall else None),
    )


def title(setting: gemmi.SpaceGroup) -> str:
    """`P 1 21/c 1 (number 14)`."""
    return f"{setting.xhm()} (number {setting.number})"


def _number(block: Block) -> int | None:
    try:
        value = parse_number(block.value(*_NUMBER_TAGS))
    except ValueError:
        return None
    return int(value) if value is not None and value in range(1, 231) else None
