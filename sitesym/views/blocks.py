"""A report as blocks of fields, tables and notes, and how text, Markdown and LaTeX set them.

The words in the blocks are made for one style and are ready for it.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from sitesym.version import __version__
from sitesym.views.layout import WIDTH, ZERO, table, width, wrap

_FIELD = 15


@dataclass(frozen=True, slots=True)
class Table:
    """Cells in columns; `align` has one of `<` and `>` for each, `shrink` columns that may be clipped in text."""

    header: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    align: str
    shrink: tuple[int, ...] = ()


@dataclass(frozen=True, slots=True)
class Block:
    """One section: title ("" for the first), fields with names, a table or None, notes. All of it may be empty."""

    title: str
    fields: tuple[tuple[str, str], ...] = ()
    table: Table | None = None
    notes: tuple[str, ...] = ()
    cautions: tuple[str, ...] = ()


def as_text(title: str, blocks: Iterable[Block]) -> str:
    """Plain text for a terminal of 80 columns."""
    lines = [part for line in title.split("\n") for part in (wrap(line) if width(line) > WIDTH else [line])]
    for block in blocks:
        parts = [_text_fields(block), _text_table(block), _text_notes(block)]
        body = [line for part in parts if part for line in ("", *part)]
        if block.title and body:
            lines += ["", block.title, "─" * width(block.title), *body[1:]]
        else:
            lines += body
    return "\n".join(line.rstrip() for line in lines) + "\n"


def _text_fields(block: Block) -> list[str]:
    fields = [line for name, words in block.fields for line in wrap(words, " " * _FIELD, f"{name:<{_FIELD}}")]
    return fields + [line for one in block.cautions for line in wrap(one, indent="    ", first="  ! ")]


def _text_table(block: Block) -> list[str]:
    if block.table is None:
        return []
    found = block.table
    rows = [found.header, *(tuple(cell or ZERO for cell in row) for row in found.rows)]
    gap = 2 if sum(max(map(width, column)) + 2 for column in zip(*rows, strict=True)) - 2 <= WIDTH else 1
    return table(rows, found.align, gap=gap, shrink=found.shrink)


def _text_notes(block: Block) -> list[str]:
    return [line for note in block.notes for line in wrap(note, indent="  ", first="- ")]


def as_markdown(title: str, blocks: Iterable[Block]) -> str:
    """Markdown with tables as most dialects have them."""
    lines = [f"# {title}"]
    for block in blocks:
        lines += ["", f"## {block.title}"] if block.title else []
        facts = [f"- {name}: {words}" for name, words in block.fields]
        facts += [f"- **Caution:** {one}" for one in block.cautions]
        parts = [facts, _markdown_table(block), [f"- {note}" for note in block.notes]]
        lines += [line for part in parts if part for line in ("", *part)]
    return "\n".join(lines) + "\n"


def _markdown_table(block: Block) -> list[str]:
    if block.table is None:
        return []
    rules = ["---:" if side == ">" else ":---" for side in block.table.align]
    return [f"| {' | '.join(cells)} |" for cells in (block.table.header, rules, *block.table.rows)]


def as_latex(title: str, blocks: Iterable[Block]) -> str:
    """Tables and lists for the body of a LaTeX document; no package is needed."""
    parts = [[f"% Tables by sitesym {__version__}. Put them into the body of a document; no package is needed."]]
    for block in blocks:
        facts = [f"{name}: {words}" for name, words in block.fields]
        facts += [f"Caution: {one}" for one in block.cautions]
        caption = ". ".join(filter(None, (title, block.title)))
        parts += [_latex_list(caption, facts), _latex_table(caption, block), _latex_list("Notes:", block.notes)]
    return "\n\n".join("\n".join(part) for part in parts if part) + "\n"


def _latex_list(title: str, items: Sequence[str]) -> list[str]:
    lines = [f"  \\item {item}" for item in items]
    return [f"\\noindent {title}", "\\begin{itemize}", *lines, "\\end{itemize}"] if lines else []


def _latex_table(caption: str, block: Block) -> list[str]:
    if block.table is None:
        return []
    columns = "".join("r" if side == ">" else "l" for side in block.table.align)
    rows = [f"{' & '.join(cells)} \\\\" for cells in block.table.rows]
    return [
        "\\begin{table}", f"\\caption{{{caption}}}", "\\centering", f"\\begin{{tabular}}{{{columns}}}", "\\hline",
        f"{' & '.join(block.table.header)} \\\\", "\\hline", *rows, "\\hline", "\\end{tabular}", "\\end{table}",
    ]  # fmt: skip
