"""Cautions from composition and units: flags to check before a sample is mounted, ground or lit, never a clearance.

The table with its sources is `sitesym/data/hazards.toml`. A sample that raises no flag may still be dangerous; the
safety data sheet, the local rules and the people responsible for safety decide.
"""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from sitesym.analysis import Analysis
from sitesym.bonding.chemistry import Kind, kind_of
from sitesym.bonding.graph import connected_parts
from sitesym.experiment.bench import Laser
from sitesym.structure import Structure
from sitesym.units import bonds_of

_ISOTOPES = {"D": "H", "T": "H"}
_HALOGENS = frozenset({"F", "Cl", "Br", "I"})
_ORDER = ("explosive", "radioactive", "toxic", "corrosive", "flammable", "oxidizing")
_VISIBLE = (400.0, 700.0)
_COLD = 270.0
_PAIR = re.compile(r"([A-Z][a-z]?)-([A-Z][a-z]?)")


@dataclass(frozen=True, slots=True)
class Flag:
    """Something about the sample to check.

    kind    "explosive", "radioactive", "toxic", "corrosive", "flammable", "oxidizing", or "unknown" where the file
            does not allow to tell.
    cause   what raised it: an element, a unit, a group.
    """

    kind: str
    cause: str
    words: str
    source: str


@dataclass(frozen=True, slots=True)
class Caution:
    """Something to mind in the measurement."""

    topic: str
    words: str
    source: str


@dataclass(frozen=True, slots=True)
class Hazards:
    """Cautions of one plan: what they are worth (`preface`), flags of the sample, cautions of the measurement."""

    preface: str
    flags: tuple[Flag, ...]
    cautions: tuple[Caution, ...]


@dataclass(frozen=True, slots=True)
class _Part:
    """A connected part of the graph of bonds.

    elements     of its atoms, hydrogen isotopes as H; neighbours lists of places in `elements`.
    is_finite    a molecule, an ion or an atom; not a chain, layer or net.
    """

    elements: tuple[str, ...]
    neighbours: tuple[tuple[int, ...], ...]
    is_finite: bool


def hazards_of(analysis: Analysis, lasers: Sequence[Laser] = (), temperature: float | None = None) -> Hazards:
    """All cautions for measuring this crystal.

    lasers       the lines that will be used; without any, the cautions of lines of every kind are left to the reader.
    temperature  K, of the sample, if it is not at room temperature.
    """
    flags = sample_flags(analysis.structure)
    always = [Caution(entry["topic"], entry["words"], entry["source"]) for entry in _table()["always"]]
    conditions = _conditions(flags, lasers, temperature)
    when = [
        Caution(entry["when"], entry["words"], entry["source"])
        for entry in _table()["when"]
        if entry["when"] in conditions
    ]
    return Hazards(_table()["preface"], flags, (*always, *when))


def _conditions(flags: Sequence[Flag], lasers: Sequence[Laser], temperature: float | None) -> set[str]:
    """Which of the table's conditions hold. Colour is not to be told from a structure, so that one always stands."""
    found = {"coloured or black sample"}
    if any(flag.kind == "explosive" for flag in flags):
        found.add("energetic sample")
    if any(not _VISIBLE[0] <= laser.air <= _VISIBLE[1] for laser in lasers):
        found.add("invisible beam")
    if any(laser.air < _VISIBLE[0] for laser in lasers):
        found.add("ultraviolet beam")
    if any(_may_be_doubled(laser) for laser in lasers):
        found.add("frequency-doubled or pumped laser")
    if temperature is not None and temperature < _COLD:
        found.add("cryostat")
    return found


def _may_be_doubled(laser: Laser) -> bool:
    """Doubled neodymium lasers, and green to yellow lines that no atomic transition holds."""
    return "doubled" in laser.name or (500 < laser.air < 570 and not laser.fixed)


def sample_flags(structure: Structure) -> tuple[Flag, ...]:
    """Flags of a sample by its elements, its composition, its units and the groups in them, the gravest kind first."""
    elements = frozenset(structure.composition)
    parts = _parts(structure)
    found = [*_unknown(structure), *_by_element(elements), *_by_composition(elements)]
    found += [*_by_unit(elements, parts), *_by_group(parts)]
    rank = {kind: place for place, kind in enumerate(_ORDER)}
    return tuple(sorted(dict.fromkeys(found), key=lambda flag: rank.get(flag.kind, -1)))


def _unknown(structure: Structure) -> Iterator[Flag]:
    """What the file hides."""
    unnamed = [element for element in structure.composition if kind_of({element: 1.0}) == Kind.UNKNOWN]
    if unnamed or "A" in structure.composition:
        words = "The file does not name its elements: nothing can be told about the sample. Give them with --elements."
        yield Flag("unknown", "elements", words, "")
    if any(question.code == "hydrogen_missing" for question in structure.questions):
        words = "Hydrogen atoms are missing from the file: groups that contain them are not recognised."
        yield Flag("unknown", "hydrogen", words, "")


def _by_element(elements: frozenset[str]) -> Iterator[Flag]:
    for entry in _table()["element"]:
        present = sorted(elements & set(entry["elements"]))
        if present:
            yield _flag(entry, ", ".join(present))


def _by_composition(elements: frozenset[str]) -> Iterator[Flag]:
    present = frozenset(_ISOTOPES.get(one, one) for one in elements)
    for entry in _table()["composition"]:
        needed, options = set(entry["all"]), set(entry.get("one_of", ()))
        holds = needed <= present and not present & set(entry["none"]) and (not options or present & options)
        if holds and (not entry.get("only") or present <= needed | options):
            yield _flag(entry, entry["words"].partition(":")[0].lower())


def _by_unit(elements: frozenset[str], parts: Sequence[_Part]) -> Iterator[Flag]:
    present = frozenset(_ISOTOPES.get(one, one) for one in elements)
    kinds = {(frozenset(Counter(part.elements).items()), _bonded_pairs(part)) for part in parts if part.is_finite}
    for entry in _table()["unit"]:
        pairs = {frozenset(pair) for words in entry["bonds"] for pair in _PAIR.findall(words)}
        for content, bonded in kinds:
            if content == frozenset(entry["atoms"].items()) and pairs <= bonded and set(entry["with"]) <= present:
                yield _flag(entry, entry["unit"])


def _bonded_pairs(part: _Part) -> frozenset[frozenset[str]]:
    return frozenset(
        frozenset((part.elements[i], part.elements[j])) for i, others in enumerate(part.neighbours) for j in others
    )


def _by_group(parts: Sequence[_Part]) -> Iterator[Flag]:
    distinct = {(part.elements, part.neighbours): part for part in parts}.values()
    for entry in _table()["group"]:
        if any(_occurs(entry, part) for part in distinct):
            yield _flag(entry, entry["group"])


def _occurs(entry: Mapping[str, Any], part: _Part) -> bool:
    """Whether a group stands in a unit as often as it must; matches of the same atoms count once."""
    places: set[frozenset[int]] = set()
    for match in _matches(entry, part, ()):
        places.add(frozenset(match))
        if len(places) >= entry["at_least"]:
            return True
    return False


def _matches(entry: Mapping[str, Any], part: _Part, chosen: tuple[int, ...]) -> Iterator[tuple[int, ...]]:
    """Atoms of the unit in the order of the group's, found atom by atom along its bonds."""
    place = len(chosen)
    if place == len(entry["atoms"]):
        yield chosen
        return
    before = [chosen[min(bond)] for bond in entry["bonds"] if max(bond) == place]
    options = part.neighbours[before[0]] if before else range(len(part.elements))
    for atom in dict.fromkeys(options):
        if atom in chosen or not all(atom in part.neighbours[other] for other in before):
            continue
        degree = entry["degree"][place]
        if _is_element(entry["atoms"][place], part.elements[atom]) and degree in (0, len(part.neighbours[atom])):
            yield from _matches(entry, part, (*chosen, atom))


def _is_element(wanted: str, element: str) -> bool:
    if wanted == "X":
        return element in _HALOGENS
    if wanted == "M":
        return kind_of({element: 1.0}) in (Kind.METAL, Kind.IONIC)
    return element == wanted


def _parts(structure: Structure) -> list[_Part]:
    """The connected parts of the structure; a mixed site counts as its most frequent element."""
    bonds = bonds_of(structure)
    found = connected_parts(len(structure), bonds.first, bonds.second, bonds.shift)
    members: dict[int, list[int]] = {}
    for atom, part in enumerate(found.part.tolist()):
        members.setdefault(part, []).append(atom)
    neighbours: list[list[int]] = [[] for _ in range(len(structure))]
    for i, j in zip(bonds.first.tolist(), bonds.second.tolist(), strict=True):
        neighbours[i].append(j)
        neighbours[j].append(i)
    main = [max(site.occupants, key=lambda one: one.occupancy).element for site in structure.sites]
    result = []
    for number, atoms in members.items():
        place = {atom: k for k, atom in enumerate(atoms)}
        result.append(
            _Part(
                tuple(_ISOTOPES.get(main[atom], main[atom]) for atom in atoms),
                tuple(tuple(place[other] for other in neighbours[atom]) for atom in atoms),
                bool(found.dimension[number] == 0),
            )
        )
    return result


def _flag(entry: Mapping[str, Any], cause: str) -> Flag:
    return Flag(entry["kind"], cause, entry["words"], entry["source"])


@lru_cache(maxsize=1)
def _table() -> dict[str, Any]:
    import tomllib
    from importlib.resources import files

    return tomllib.loads(files("sitesym.data").joinpath("hazards.toml").read_text(encoding="utf-8"))
