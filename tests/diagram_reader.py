"""Reads a correlation diagram back from its drawing, line by line as a person would; no code of the views is used.

Left of the site column: from a species go right; at every joint with an upright line enter it; where the upright is
drawn through, pass. An upright ends in the species of the site whose line begins at it with nothing on the left; where
there is no such line, in the one whose line goes on to the right. Right of the site column the same, mirrored.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

UP, DOWN, LEFT, RIGHT = set("│┘└┤├┴┼"), set("│┐┌┤├┬┼"), set("─┐┘┤┬┴┼"), set("─┌└├┬┴┼")
MIRROR = str.maketrans("┐┘┌└┤├", "┌└┐┘├┤")
SPECIES = r"(?:[ABEGHT][₁₂₃]?[gu]?[′″]?|[ΣΠΔ][gu]?[⁺⁻]?)"


@dataclass(frozen=True)
class Diagram:
    """Links free -> site and site -> crystal with their numbers, and the letters beside each species."""

    down: dict[tuple[str, str], int]
    up: dict[tuple[str, str], int]
    letters: dict[str, dict[str, str]]


def read_diagram(lines: list[str]) -> Diagram:
    """`lines` are the heading and the drawing."""
    head, body = lines[0], lines[1:]
    width = max(map(len, lines))
    site = head.index("site")
    body = [line.ljust(width) for line in body]
    crystal = head.index("crystal")
    free_letters, site_letters, crystal_letters = ({}, {}, {})
    free, sites, crystals = {}, {}, {}
    for row, line in enumerate(body):
        if found := re.match(rf"({SPECIES}) .*?([I-] [R-])(?= )", line):
            free[row] = found[1]
            free_letters[found[1]] = found[2]
        if found := re.match(rf"({SPECIES}) +([I-] [R-])", line[site:]):
            sites[row] = found[1]
            site_letters[found[1]] = found[2]
        if found := re.match(rf"({SPECIES}) +([I-] [R-])", line[crystal:]):
            crystals[row] = found[1]
            crystal_letters[found[1]] = found[2]
    start = max(re.match(rf"{SPECIES} .*?[I-] [R-](?= )", body[row]).end() for row in free)
    end = max(site + re.match(rf"{SPECIES} +[I-] [R-]", body[row][site:]).end() for row in sites)
    left = [line[start : site - 1] for line in body]
    right = [line[end + 1 : crystal - 1][::-1].translate(MIRROR) for line in body]
    letters = {"free": free_letters, "site": site_letters, "crystal": crystal_letters}
    return Diagram(_links(left, free, sites), _links(right, crystals, sites), letters)


def _links(bus: list[str], outer: dict[int, str], inner: dict[int, str]) -> dict[tuple[str, str], int]:
    size = max(map(len, bus))
    grid = [row.ljust(size) for row in bus]
    return {
        (label, target): count for row, label in outer.items() for target, count in _targets(grid, row, inner).items()
    }


def _targets(grid: list[str], row: int, inner: dict[int, str]) -> dict[str, int]:
    found: dict[str, int] = {}
    line = grid[row]
    place = len(line) - len(line.lstrip(" "))
    through = 1
    last = None
    while place < len(line) and line[place] != " ":
        arms = _arms(grid, row, place)
        if line[place].isdigit() and not arms & {"U", "D"}:
            through = int(line[place])  # a number on a straight line
        elif line[place] != "│" and arms & {"U", "D"}:
            target = inner[_exit(grid, row, place)]
            found[target] = found.get(target, 0) + (int(line[place]) if line[place].isdigit() else 1)
            last = target
        place += 1
    if place == len(line) and row in inner and inner[row] != last:
        found[inner[row]] = found.get(inner[row], 0) + through
    return found


def _arms(grid: list[str], row: int, place: int) -> set[str]:
    sign = grid[row][place]
    if not sign.isdigit():
        return {name for name, signs in (("U", UP), ("D", DOWN), ("L", LEFT), ("R", RIGHT)) if sign in signs}
    around = {
        "U": (row - 1, place, DOWN),
        "D": (row + 1, place, UP),
        "L": (row, place - 1, RIGHT),
        "R": (row, place + 1, LEFT),
    }
    return {
        name
        for name, (r, p, facing) in around.items()
        if 0 <= r < len(grid) and 0 <= p < len(grid[0]) and (grid[r][p] in facing or grid[r][p].isdigit())
    }


def _exit(grid: list[str], row: int, place: int) -> int:
    """The row in which the upright line at this place goes over into the inner column."""
    top = bottom = row
    while "U" in _arms(grid, top, place):
        top -= 1
    while "D" in _arms(grid, bottom, place):
        bottom += 1
    rows = range(top, bottom + 1)
    begun = [
        r for r in rows if "R" in _arms(grid, r, place) and "L" not in _arms(grid, r, place) and grid[r][place] != "│"
    ]
    if begun:
        (only,) = begun
        return only
    (only,) = [r for r in rows if "R" in _arms(grid, r, place) and grid[r][place] != "│"]
    return only
