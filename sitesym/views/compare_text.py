"""A comparison of two structures as plain text for a terminal of 80 columns: first a paragraph for a draft."""

from __future__ import annotations

from typing import TYPE_CHECKING

from sitesym.views.blocks import as_text
from sitesym.views.compare_blocks import blocks
from sitesym.views.compare_words import paragraph, title
from sitesym.views.labels import TEXT
from sitesym.views.layout import wrap

if TYPE_CHECKING:
    from sitesym.comparison import Comparison


def render(result: Comparison) -> str:
    """The whole comparison, ending in a line feed."""
    head = "\n".join([title(result, TEXT), "", *wrap(paragraph(result, TEXT))])
    return as_text(head, blocks(result, TEXT))
