"""The page on a molecule alone, and the page on two molecules side by side."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from sitesym.version import __version__
from sitesym.views.blocks import Block, Table
from sitesym.views.free_molecule import blocks, compared_names, comparison_blocks
from sitesym.views.labels import HTML, TEXT
from sitesym.views.templating import environment, ready

if TYPE_CHECKING:
    from sitesym.molecule_analysis import MoleculeAnalysis, MoleculeComparison
    from sitesym.views.figures import Picture

_CAPTIONS = {
    "molecule": "Places of the atoms in the molecule's axes.",
    "vibrations": "Internal vibrations by species and kind.",
    "stretches": "Stretches of each kind of bond.",
    "species": "Species of the point group, and what belongs to them.",
    "bands": "A / B where the two differ, in shaded rows; one number where they agree.",
}
_LOWER = ("cm⁻¹", "x", "y", "z")


@dataclass(frozen=True, slots=True)
class Grid:
    """A table in ready HTML: heads and cells, each with whether it is a number; rows with whether they stand out."""

    heads: tuple[tuple[str, bool], ...]
    rows: tuple[tuple[tuple[tuple[str, bool], ...], bool], ...]


@dataclass(frozen=True, slots=True)
class Shown:
    """A picture and the lines below it, ready HTML."""

    picture: Picture
    lines: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Part:
    """One section of the page, in the order in which it shows; `counts` are name, number and species."""

    name: str
    title: str
    cautions: tuple[str, ...] = ()
    counts: tuple[tuple[str, str, str], ...] = ()
    fields: tuple[tuple[str, str], ...] = ()
    pictures: tuple[Shown, ...] = ()
    grid: Grid | None = None
    spectrum: str = ""
    notes: tuple[str, ...] = ()

    @property
    def caption(self) -> str:
        """What the table shows."""
        return _CAPTIONS[self.name]


def molecule_page(result: MoleculeAnalysis) -> str:
    """The whole report on a molecule as an HTML document in one string, to be written as UTF-8."""
    from sitesym.views.figures import free_spectrum, molecule_picture

    head, answer, *others = blocks(result, HTML)
    titled = {block.title: block for block in others}
    atoms = titled.pop(_ATOMS, Block(""))
    counts = (
        tuple((ready(name), number, ready(sum_)) for name, number, sum_ in answer.table.rows) if answer.table else ()
    )
    parts = [
        Part("answer", "Answer", _texts(head.cautions), counts, _fields(head), notes=_texts(answer.notes)),
        _section(atoms, "molecule", "Molecule", (Shown(molecule_picture(result), ()),)),
        *(_section(block, block.title.split()[0].lower(), block.title) for block in titled.values()),
    ]
    spectrum = free_spectrum(result, "bands-drawing")
    if spectrum:
        parts.insert(3, Part("bands", "Known bands", spectrum=spectrum, notes=(_SPECTRUM_NOTE,)))
    name = result.known.name if result.known else ""
    return _document(
        TEXT.formula(result.formula), "Vibrations of a molecule alone", HTML.formula(result.formula),
        " · ".join(dict.fromkeys(filter(None, (name, result.molecule.name)))),
        f"Point group {HTML.schoenflies(result.point_group)}", result.molecule.source, parts,
    )  # fmt: skip


_ATOMS = "Atoms in the molecule's axes"
_SPECTRUM_NOTE = (
    "From high to low wavenumbers, as is custom in infrared; infrared above the axis, Raman below. In brackets the "
    "axes of the molecule along which the dipole may point."
)


def comparison_page(result: MoleculeComparison) -> str:
    """The report on two molecules side by side, likewise."""
    from sitesym.views.figures import molecule_picture

    head, bands, telling = comparison_blocks(result, HTML)
    pictures = []
    for name, one in (("A", result.first), ("B", result.second)):
        group = f"point group {HTML.schoenflies(one.point_group)}"
        where = HTML.plain(one.molecule.source or one.molecule.name)
        lines = (f"<b>{name}</b> {HTML.formula(one.formula)}, {group}", where)
        pictures.append(Shown(molecule_picture(one, f"molecule-{name}"), _texts(filter(None, lines))))
    parts = [
        Part("answer", telling.title, _texts(head.cautions), notes=_texts(telling.notes)),
        Part("molecules", "Molecules", pictures=tuple(pictures)),
        _section(bands, "bands", "Numbers of bands"),
    ]
    formulas = [HTML.formula(one.formula) for one in (result.first, result.second)]
    groups = [HTML.schoenflies(one.point_group) for one in (result.first, result.second)]
    title = " and ".join(dict.fromkeys(TEXT.formula(one.formula) for one in (result.first, result.second)))
    names = " and ".join(compared_names(result))
    return _document(
        f"{title}: {names}", "Two molecules side by side", " and ".join(dict.fromkeys(formulas)), names,
        f"A: point group {groups[0]}, B: point group {groups[1]}", "", parts,
    )  # fmt: skip


def _section(block: Block, name: str, title: str, pictures: tuple[Shown, ...] = ()) -> Part:
    grid = _grid(block.table) if block.table else None
    return Part(name, title, _texts(block.cautions), (), _fields(block), pictures, grid, notes=_texts(block.notes))


def _fields(block: Block) -> tuple[tuple[str, str], ...]:
    """Fields but for the file, which stands in the masthead."""
    return tuple((ready(name), ready(words)) for name, words in block.fields if name != "File")


def _texts(texts: Iterable[str]) -> tuple[str, ...]:
    return tuple(map(ready, texts))


def _grid(table: Table) -> Grid:
    """Rows in which two numbers stand side by side, `9 / 18`, stand out."""
    numbers = [side == ">" for side in table.align]
    rows = tuple(
        (tuple(zip(_texts(cells), numbers, strict=True)), any(" / " in cell for cell in cells)) for cells in table.rows
    )
    return Grid(tuple(zip(map(_head, table.header), numbers, strict=True)), rows)


def _head(words: str) -> str:
    return ready(words if words in _LOWER else words[:1].upper() + words[1:])


def _document(title: str, kind: str, heading: str, name: str, groups: str, source: str, parts: Sequence[Part]) -> str:
    return environment().get_template("molecule.html").render(
        title=title, kind=kind, heading=ready(heading), name=name, groups=ready(groups), source=source,
        parts=[(part, part) for part in parts], version=__version__,
    )  # fmt: skip
