"""Oriented Hermann-Mauguin symbols of site groups, read off the operations in the axes of the report.

The symbol has one place for each set of symmetry directions of the lattice, a dot where nothing lies along them
(International Tables A, 2016, section 2.1.3.12), e.g. `m.mm`, `.2/m.`, `4/mm.m`.
"""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from sitesym.groups.operation import Floats
from sitesym.groups.point_group import PointGroup
from sitesym.groups.recognition import Elements

_CUBIC = (
    ((1, 0, 0), (0, 1, 0), (0, 0, 1)),
    ((1, 1, 1), (-1, -1, 1), (1, -1, -1), (-1, 1, -1)),
    ((1, -1, 0), (1, 1, 0), (0, 1, -1), (0, 1, 1), (-1, 0, 1), (1, 0, 1)),
)
_HEXAGONAL = (
    ((0, 0, 1),),
    ((1, 0, 0), (0, 1, 0), (-1, -1, 0)),
    ((1, -1, 0), (1, 2, 0), (-2, -1, 0)),
)
_TETRAGONAL = (((0, 0, 1),), ((1, 0, 0), (0, 1, 0)), ((1, -1, 0), (1, 1, 0)))
_ORTHORHOMBIC = (((1, 0, 0),), ((0, 1, 0),), ((0, 0, 1),))
_RANK = {"m": 0, "2": 1}


def directions(number: int) -> tuple[tuple[tuple[int, int, int], ...], ...]:
    """Sets of symmetry directions [uvw] for the lattice of a space group (International Tables A, table 2.1.3.1)."""
    if number <= 15:
        return ()
    if number <= 74:
        return _ORTHORHOMBIC
    if number <= 142:
        return _TETRAGONAL
    if number <= 194:
        return _HEXAGONAL[:2] if number in RHOMBOHEDRAL else _HEXAGONAL
    return _CUBIC


RHOMBOHEDRAL = frozenset({146, 148, 155, 160, 161, 166, 167})


def oriented_symbol(group: PointGroup, lattice: Floats, number: int) -> str:
    """Symbol of a site group whose operations are Cartesian matrices of the crystal with rows `lattice`."""
    if number <= 15:
        return group.hermann_mauguin
    return _symbol(group, np.ascontiguousarray(lattice).tobytes(), number)


@lru_cache(maxsize=1024)
def _symbol(group: PointGroup, data: bytes, number: int) -> str:
    lattice = np.frombuffer(data).reshape(3, 3)
    if not (group.elements.orders > 1).any():
        return "-1" if group.has_inversion else "1"
    places = [_place(group, _unit(np.array(one, dtype=float) @ lattice), number) for one in directions(number)]
    if places[1:2] == ["-3"]:
        places[0] = places[0].replace("4/m", "m")
    symbol = "".join(places)
    alone = symbol.strip(".") == "2/m"
    return symbol if alone else symbol.replace("2/m", "m")


def _unit(vectors: Floats) -> Floats:
    return np.asarray(vectors / np.linalg.norm(vectors, axis=1)[:, None])


def _place(group: PointGroup, lines: Floats, number: int) -> str:
    """What lies along one set of directions; lines that the site group itself carries into each other count once."""
    present: list[str] = []
    seen = np.zeros(len(lines), dtype=bool)
    for line in lines:
        images = np.abs(group.matrices @ line @ lines.T).max(axis=0) > 1 - 1e-4
        symbol = _along(group.elements, line)
        if symbol and not (images & seen).any():
            present.append(symbol)
        seen |= images
    if number > 194:
        present.sort(key=lambda symbol: (-_order(symbol), _RANK.get(symbol, 0)))
    return "".join(present) or "."


def _order(symbol: str) -> int:
    return {"4/m": 5, "4": 4, "-4": 4}.get(symbol, 0)


def _along(elements: Elements, line: Floats) -> str:
    """What lies along one line: `4/m`, `-3`, `2`, `m`, or nothing."""
    here = elements.along(line)
    turn = int(elements.orders[here & elements.proper].max(initial=1))
    roto_inversion = int(elements.orders[here & ~elements.proper].max(initial=1))
    if (elements.mirrors & here).any():
        return {1: "m", 3: "-6"}.get(turn, f"{turn}/m")
    if roto_inversion > 2 and roto_inversion >= turn:
        return f"-{roto_inversion}"
    return "" if turn == 1 else str(turn)
