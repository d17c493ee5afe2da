"""Readers of the drawings of molecules that know nothing of the views: boxes, lines and texts by their places."""

from __future__ import annotations

import re
import xml.etree.ElementTree as Tree
from dataclasses import dataclass
from functools import cache
from typing import Any

from literature import expanded, reference
from views_cases import ascii_labels

from sitesym.analysis import Analysis, analyse
from sitesym.known_units import composition_of
from sitesym.molecular import MoleculeRow

SVG = "{http://www.w3.org/2000/svg}"
CASES: list[dict[str, Any]] = reference("correlations.toml")["case"]
NAMES = {case["name"]: number for number, case in enumerate(CASES)}


@cache
def analysed(index: int) -> Analysis:
    """The crystal of one case of the reference file."""
    case = CASES[index]
    sites = [{"label": site["label"], "element": site["element"], "xyz": site["position"]} for site in case["sites"]]
    return analyse(expanded(case["hermann_mauguin"], case["lattice"], sites), scan=False)


def row_of(index: int) -> MoleculeRow:
    """The unit that the case is about."""
    wanted = composition_of(CASES[index]["unit"])
    return next(row for row in analysed(index).molecular.molecules if composition_of(row.formula) == wanted)


@dataclass(frozen=True)
class Box:
    """A box of a correlation diagram: its section, column 0 to 2, species, number, letters and further lines."""

    section: str
    column: int
    label: str
    count: int
    letters: str
    lines: tuple[str, ...]
    left: float
    top: float
    right: float
    bottom: float

    @property
    def middle(self) -> float:
        return (self.top + self.bottom) / 2


def words_of(element: Tree.Element) -> str:
    return ascii_labels("".join(element.itertext()))


def plain(label: str) -> str:
    """A label of the reference file as the drawing sets it, without subscripts and superscripts."""
    return label.replace("Sigma_", "Σ").replace("Sigma", "Σ").replace("Pi_", "Π").replace("Pi", "Π").replace("-", "−")


class Diagram:
    """A correlation diagram read back."""

    def __init__(self, svg: str) -> None:
        self.root = Tree.fromstring(svg)
        texts = [one for one in self.root if one.tag == f"{SVG}text"]
        self.titles = [
            (float(one.attrib["y"]), words_of(one)) for one in texts if one.get("font-style") == "italic"
        ]  # fmt: skip
        groups = [one for one in self.root if one.tag == f"{SVG}g" and one.find(f"{SVG}rect") is not None]
        lefts = sorted({float(one[0].attrib["x"]) for one in groups})
        self.boxes = [self._box(one, lefts) for one in groups]
        self.loose = [(float(one.attrib["x"]), float(one.attrib["y"]), words_of(one)) for one in texts]

    def _box(self, group: Tree.Element, lefts: list[float]) -> Box:
        rect = group[0]
        left, top, width, height = (float(rect.attrib[name]) for name in ("x", "y", "width", "height"))
        label, *others = [one for one in group if one.tag == f"{SVG}text"]
        base = float(label.attrib["y"])
        found = re.fullmatch(r"(\d*)(.*)", words_of(label))
        beside = "".join(words_of(one) for one in others if float(one.attrib["y"]) == base)
        below = tuple(words_of(one) for one in others if float(one.attrib["y"]) > base)
        section = max(one for one in self.titles if one[0] < top)[1]
        return Box(
            section,
            lefts.index(left),
            found[2],
            int(found[1] or 1),
            beside,
            below,
            left,
            top,
            left + width,
            top + height,
        )

    def column(self, section: str, column: int) -> list[Box]:
        return [box for box in self.boxes if (box.section, box.column) == (section, column)]

    def counts(self, section: str, column: int) -> dict[str, int]:
        return {box.label: box.count for box in self.column(section, column)}

    def next_to(self, box: Box) -> set[Box]:
        """Boxes of the next column that a line leads to; every line must begin and end at the middle of a side."""
        ends = set()
        for path in self.root.iter(f"{SVG}path"):
            x1, y1, x2, y2 = (float(value) for value in re.findall(r"[\d.]+", path.attrib["d"]))
            if abs(x1 - box.right) < 0.2 and abs(y1 - box.middle) < 0.2:
                ends.add(next(b for b in self.boxes if abs(b.left - x2) < 0.2 and abs(b.middle - y2) < 0.2))
        return ends

    def reached(self, box: Box) -> set[str]:
        """Species of the crystal that a box of the free molecule leads to."""
        return {end.label for middle in self.next_to(box) for end in self.next_to(middle)}


def heads_of(svg: str) -> dict[str, list[tuple[str, ...]]]:
    """Heads of the groups in infrared and in Raman, from left to right, each with its components."""
    root = Tree.fromstring(svg)
    axis = max(float(one.attrib["y1"]) for one in root.findall(f"{SVG}line"))
    found: dict[str, list[tuple[float, tuple[str, ...]]]] = {"infrared": [], "raman": []}
    for group in root.findall(f"{SVG}g"):
        texts = group.findall(f"{SVG}text")
        upright = [one for one in texts if "transform" not in one.attrib]
        row = "raman" if float(upright[0].attrib["y"]) > axis else "infrared"
        turned = [words_of(one) for one in texts if "transform" in one.attrib]
        heads = [words_of(one) for one in upright]
        found[row].append((float(upright[0].attrib["x"]), (*heads, *turned)))
    assert all(groups == sorted(groups) for groups in found.values())
    return {row: [heads for _, heads in groups] for row, groups in found.items()}
