"""Readers of the HTML page that know nothing of the views: html.parser for the page, ElementTree for its drawings."""

from __future__ import annotations

import re
import xml.etree.ElementTree as Tree
from html.parser import HTMLParser
from pathlib import Path

from views_cases import ascii_labels

import sitesym
from sitesym.analysis import Analysis

ROOT = Path(__file__).parent.parent
DEMO = ROOT / "structures_demo"
SVG = "{http://www.w3.org/2000/svg}"
VOID = {"area", "base", "br", "col", "embed", "hr", "img", "input", "link", "meta", "source", "track", "wbr"}


class Reader(HTMLParser):
    """Elements, ids, attributes, visible text by section, tables with their cells; raises where tags do not match."""

    def __init__(self, document: str) -> None:
        super().__init__(convert_charrefs=True)
        self.open: list[str] = []
        self.elements: list[tuple[str, dict[str, str]]] = []
        self.text: dict[str, str] = {}
        self.tables: list[list[list[str]]] = []
        self.captions = 0
        self._section = ""
        self._hidden = 0
        self.feed(document)
        self.close()
        assert not self.open, f"left open: {self.open}"

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        attributes = {name: value or "" for name, value in attrs}
        assert len(attributes) == len(attrs), f"an attribute stands twice on {tag}"
        self.elements.append((tag, attributes))
        if tag not in VOID:
            self.open.append(tag)
        if tag == "section":
            self._section = attributes["id"]
        self._open_table(tag)

    def _open_table(self, tag: str) -> None:
        if tag == "table":
            self.tables.append([])
        if tag == "caption":
            self.captions += 1
        if tag == "tr":
            self.tables[-1].append([])
        if tag in ("td", "th"):
            self.tables[-1][-1].append("")

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.elements.append((tag, {name: value or "" for name, value in attrs}))

    def handle_endtag(self, tag: str) -> None:
        assert self.open, f"</{tag}> closes nothing"
        assert self.open.pop() == tag, f"</{tag}> closes another element"

    def handle_data(self, data: str) -> None:
        if not {"style", "desc", "title"} & set(self.open):
            self.text[self._section] = self.text.get(self._section, "") + data
        if {"td", "th"} & set(self.open):
            self.tables[-1][-1][-1] += data

    def values(self, attribute: str) -> list[str]:
        return [attributes[attribute] for _, attributes in self.elements if attribute in attributes]


def demo(name: str) -> Analysis:
    return sitesym.analyse(sitesym.read(DEMO / name))


def squeezed(text: str) -> str:
    """One line, labels plain."""
    return ascii_labels(" ".join(text.split()))


def drawings(document: str) -> list[Tree.Element]:
    """Every inline drawing of a page, parsed as XML."""
    found = re.findall(r"<svg.*?</svg>", document, re.DOTALL)
    return [
        Tree.fromstring(one if "xmlns" in one else one.replace("<svg", f'<svg xmlns="{SVG[1:-1]}"', 1)) for one in found
    ]
