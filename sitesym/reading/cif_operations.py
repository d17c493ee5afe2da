"""The symmetry operations that a CIF lists, completed to a group."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

import numpy as np

from sitesym.errors import ReadError
from sitesym.reading.cif_document import Block
from sitesym.reading.cif_symbols import as_operations
from sitesym.reading.cif_values import is_unknown
from sitesym.reading.listing import DENOMINATOR, Operations, identity
from sitesym.reading.text import printable
from sitesym.structure import Integers

if TYPE_CHECKING:
    import gemmi

_TAGS = (
    "_space_group_symop_operation_xyz",
    "_symmetry_equiv_pos_as_xyz",
    "_space_group_symop_magn_operation_xyz",
    "_space_group_symop_ssg_operation_algebraic",
    "_space_group_symop_magn_ssg_operation_algebraic",
)
_CENTRINGS = ("_space_group_symop_magn_centering_xyz", "_space_group_symop_magn_ssg_centering_algebraic")
_NUMBER_BEFORE = re.compile(r"^\s*\(?\d+\)?[.:]?\s+(?=[-+xyzXYZ\d.])")
_MOST = 2000
_LARGEST = 3
_PLACES = np.cumprod([1, *[2 * _LARGEST + 1] * 9, *[DENOMINATOR] * 2], dtype=np.int64)
"""Weights that turn the nine elements (-3 ... 3) and three translations (0 ... 23) of an operation into one number."""


def listed_operations(block: Block) -> Operations | None:
    """The operations in the file, the identity always among them and repetitions left out; None when it lists none.

    Of operations in superspace the part that acts on the average structure is taken, of magnetic ones that on
    positions. Raises ReadError for one that cannot be understood.
    """
    texts = [text for text in block.column(*_TAGS) if not is_unknown(text)]
    if not texts:
        return None
    operations = _distinct(_joined(identity(), _parsed(texts)))
    centrings = [text for text in block.column(*_CENTRINGS) if not is_unknown(text)]
    return _distinct(_products(_parsed(centrings), operations)) if centrings else operations


def _parsed(texts: list[str]) -> Operations:
    operations = as_operations([_parse(text) for text in texts])
    determinants = np.round(np.linalg.det(operations.rotations))
    if (np.abs(determinants) != 1).any():
        bad = texts[int(np.argmax(np.abs(determinants) != 1))]
        raise _not_understood(bad)
    return operations


def _parse(text: str) -> gemmi.Op:
    import gemmi

    plain = _NUMBER_BEFORE.sub("", text.strip().strip("'\";"))
    plain = re.sub(r"[xX]([123])", lambda match: "xyz"[int(match[1]) - 1], plain)
    parts = [part.strip() for part in plain.split(",")]
    try:
        return gemmi.Op(",".join(parts[:3]))
    except (RuntimeError, ValueError):
        raise _not_understood(text) from None


def _not_understood(text: str) -> ReadError:
    return ReadError(
        f"The symmetry operation {printable(text, 40)!r} cannot be understood.",
        "Write it like -x, y+1/2, -z+1/2; the translations are multiples of 1/24.",
    )


def complete(operations: Operations) -> Operations:
    """The smallest group that holds the operations, in the same order with the missing ones behind.

    Raises ReadError when that is no finite group, so that an operation must be misprinted.
    """
    group = operations
    while True:
        products = _products(operations, group)
        if np.abs(products.rotations).max() > _LARGEST:
            raise _no_group()
        larger = _distinct(_joined(group, products))
        if len(larger) == len(group):
            return group
        if len(larger) > _MOST:
            raise _no_group()
        group = larger


def _no_group() -> ReadError:
    return ReadError(
        "The symmetry operations in the file make no space group.",
        "One of them is misprinted: correct it, or delete the list if the file also gives the symbol.",
    )


def _products(left: Operations, right: Operations) -> Operations:
    """All products, left after right."""
    rotations = np.einsum("aij,bjk->baik", left.rotations, right.rotations)
    translations = np.einsum("aij,bj->bai", left.rotations, right.translations) + left.translations[None]
    return Operations(rotations.reshape(-1, 3, 3), translations.reshape(-1, 3) % DENOMINATOR)


def _joined(first: Operations, second: Operations) -> Operations:
    return Operations(
        np.concatenate([first.rotations, second.rotations]), np.concatenate([first.translations, second.translations])
    )


def _distinct(operations: Operations) -> Operations:
    rows = np.concatenate([operations.rotations.reshape(-1, 9) + _LARGEST, operations.translations], axis=1)
    keep: Integers = np.sort(np.unique(rows @ _PLACES, return_index=True)[1])
    return Operations(operations.rotations[keep], operations.translations[keep])
