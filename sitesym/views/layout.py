"""Plain text in columns: widths as a terminal counts them, wrapping, tables, blocks side by side."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable, Sequence

WIDTH = 80
ZERO = "·"
NO_BREAK = "\u00a0"
"""A space at which `wrap` breaks no line; it is printed as an ordinary one."""


def width(text: str) -> int:
    """Places that the text takes in a terminal: combining signs none, wide East Asian characters two."""
    return sum(_places(one) for one in text)


def _places(character: str) -> int:
    if unicodedata.combining(character):
        return 0
    return 2 if unicodedata.east_asian_width(character) in "WF" else 1


def pad(text: str, size: int, align: str = "<") -> str:
    """The text filled with spaces to `size` places: on the right for `<`, on the left for `>`."""
    spaces = " " * max(0, size - width(text))
    return spaces + text if align == ">" else text + spaces


def clip(text: str, size: int) -> str:
    """The text, its end replaced by `…` where it takes more than `size` places."""
    if width(text) <= size:
        return text
    kept, used = "", 0
    for one in text:
        used += _places(one)
        if used > size - 1:
            break
        kept += one
    return kept.rstrip() + "…"


def clip_start(text: str, size: int) -> str:
    """The text, its beginning replaced by `…`: the end of a path tells more than its start."""
    return clip(text[::-1], size)[::-1] if text.isascii() else clip(text, size)


def wrap(text: str, indent: str = "", first: str | None = None, size: int = WIDTH) -> list[str]:
    """Lines of at most `size` places, the first one led by `first`, the others by `indent`."""
    lines, current = [], indent if first is None else first
    empty = True
    for word in _words(text, size - width(indent)):
        if not empty and width(current) + 1 + width(word) > size:
            lines.append(current)
            current, empty = indent, True
        current += word if empty else f" {word}"
        empty = False
    return [line.replace(NO_BREAK, " ") for line in (*lines, current)]


def _words(text: str, size: int) -> Iterable[str]:
    """The words of a text, those longer than a line cut to pieces."""
    for word in re.split(r"[ \t\r\n\f\v]+", text.strip()):
        while width(word) > size:
            head = clip(word, size).removesuffix("…")
            yield head
            word = word[len(head) :]
        yield word


def table(rows: Sequence[Sequence[str]], align: str, gap: int = 2, shrink: Sequence[int] = ()) -> list[str]:
    """Rows in columns, trailing spaces removed.

    align   one of `<` and `>` for each column.
    shrink  columns that may be clipped, in turn, so that a line keeps to `WIDTH` places.
    """
    sizes = [max(width(cell) for cell in column) for column in zip(*rows, strict=True)]
    excess = sum(sizes) + gap * (len(sizes) - 1) - WIDTH
    for column in shrink:
        cut = min(max(excess, 0), max(sizes[column] - 5, 0))
        sizes[column] -= cut
        excess -= cut
    return [_line(row, sizes, align, " " * gap) for row in rows]


def _line(row: Sequence[str], sizes: Sequence[int], align: str, gap: str) -> str:
    cells = zip(row, sizes, align, strict=True)
    return gap.join(pad(clip(cell, size), size, side) for cell, size, side in cells).rstrip()


def side_by_side(blocks: Iterable[Sequence[str]], gap: int = 4) -> list[str]:
    """Blocks of equal height set in rows across the page, an empty line between two rows."""
    lines: list[str] = []
    row: list[Sequence[str]] = []
    for block in blocks:
        if row and sum(_size(one) + gap for one in row) + _size(block) > WIDTH:
            lines += [*_joined(row, gap), ""]
            row = []
        row.append(block)
    return lines + (_joined(row, gap) if row else [])


def _size(block: Sequence[str]) -> int:
    return max(width(line) for line in block)


def _joined(blocks: Sequence[Sequence[str]], gap: int) -> list[str]:
    return [
        (" " * gap).join(pad(line, _size(block)) for line, block in zip(lines, blocks, strict=True)).rstrip()
        for lines in zip(*blocks, strict=True)
    ]
