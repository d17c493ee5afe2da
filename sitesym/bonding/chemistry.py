"""What the rule for bonds must know of the elements: kind, covalent radius, bond-valence parameter.

The tables stand in sitesym/data/covalent_radii.toml and sitesym/data/bond_chemistry.toml with their sources.
"""

from __future__ import annotations

import tomllib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from enum import IntEnum
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np

from sitesym.bonding.contacts import Booleans
from sitesym.structure import Floats, Integers

DATA = Path(__file__).parent.parent / "data"


class Kind(IntEnum):
    """The role of an element in the rule."""

    UNKNOWN = 0
    HYDROGEN = 1
    NONMETAL = 2
    METALLOID = 3
    METAL = 4
    IONIC = 5


@dataclass(frozen=True, slots=True)
class Anion:
    """An element whose bonds are compared: its `valence`, and `offset` (Å) of its bond-valence parameter from oxide."""

    valence: int
    offset: float


@dataclass(frozen=True, eq=False, slots=True)
class Elements:
    """The elements of n atoms. Distinct contents are numbered below k, each mixture (`Ca/Mg`) for itself.

    names           k names.
    index           (n,) number of each atom's content.
    kind            (k,) `Kind`.
    radius          (k,) covalent radius in Å, the mean for a mixed site, 0 for an unnamed one.
    parameter       (k,) bond-valence parameter of the oxide in Å, NaN where none is known.
    valence         (k,) valence as an anion, 0 for all but oxygen and the halogens.
    offset          (k,) offset of the parameter for that anion, in Å.
    order           (k,) place among the anions, from the most electronegative; a large number for all others.
    single          (k,) whether it is one element.
    alike           (k, k) whether two contents share an element that makes up a fifth of each.
    """

    names: tuple[str, ...]
    index: Integers
    kind: Integers
    radius: Floats
    parameter: Floats
    valence: Floats
    offset: Floats
    order: Integers
    single: Booleans
    alike: Booleans

    def named(self, symbols: frozenset[str]) -> Booleans:
        """(n,) whether each atom's element, or one element of a mixed site, is among the symbols."""
        found = np.array([not symbols.isdisjoint(name.split("/")) for name in self.names], dtype=bool)
        return np.asarray(found[self.index])


@cache
def covalent_radii() -> dict[str, float]:
    """Covalent radius of every element from H to Cm in Å, D and T as H (Cordero and others 2008)."""
    radii: dict[str, float] = _table("covalent_radii.toml")["radii"]
    return radii | {"D": radii["H"], "T": radii["H"]}


@cache
def oxide_parameters() -> dict[str, float]:
    """Bond-valence parameter of each element's oxide in Å (Brese and O'Keeffe 1991)."""
    parameters: dict[str, float] = _table("bond_chemistry.toml")["oxide_parameters"]
    return parameters


@cache
def anions() -> dict[str, Anion]:
    """The anions whose bonds are compared, from the most electronegative."""
    rows = _table("bond_chemistry.toml")["anions"]
    return {row["element"]: Anion(row["valence"], row["offset"]) for row in rows}


@dataclass(frozen=True, slots=True)
class LongBonds:
    """Pairs of elements whose bonds reach to `reach` times the sum of radii."""

    elements: frozenset[str]
    partners: frozenset[str]
    reach: float

    def joins(self, one: str, other: str) -> bool:
        """Whether two names, mixed ones included, are such a pair."""
        a, b = one.split("/"), other.split("/")
        return any(not self.elements.isdisjoint(x) and not self.partners.isdisjoint(y) for x, y in ((a, b), (b, a)))


@cache
def long_bonds() -> tuple[LongBonds, ...]:
    """The pairs of elements with bonds longer than the usual cut-off."""
    rows = _table("bond_chemistry.toml")["long_bonds"]
    return tuple(LongBonds(frozenset(row["elements"]), frozenset(row["partners"]), row["reach"]) for row in rows)


@cache
def listed(kind: str) -> frozenset[str]:
    """The symbols of one list of the table of kinds."""
    return frozenset(_table("bond_chemistry.toml")["kinds"][kind])


@cache
def _table(name: str) -> dict[str, Any]:
    return tomllib.loads((DATA / name).read_text(encoding="utf-8"))


@cache
def formula_rank(name: str) -> tuple[int, float, str]:
    """Where an element stands in a formula, the most electropositive first; a mixed site where its first element does.

    Metals come before the listed non-metals, ionic ones first of all.
    """
    symbol = name.split("/")[0]
    order = _table("bond_chemistry.toml")["formula_order"]
    last = {"D": "H", "T": "H"}.get(symbol, symbol)
    if last in order:
        return (2, order.index(last), symbol)
    return (0 if symbol in listed("ionic") else 1, 0.0, symbol)


def kind_of(shares: Mapping[str, float]) -> Kind:
    """Kind of a site by the shares of its elements.

    Ionic where ionic metals are the greater part, else metal if there is any, else metalloid; hydrogen counts only
    alone.
    """
    if not shares or not all(symbol in covalent_radii() for symbol in shares):
        return Kind.UNKNOWN
    total: dict[Kind, float] = {}
    for symbol, share in shares.items():
        kind = _kind_of_element(symbol)
        total[kind] = total.get(kind, 0.0) + share
    if total.get(Kind.IONIC, 0.0) > sum(total.values()) / 2:
        return Kind.IONIC
    rank = (Kind.METAL, Kind.METALLOID, Kind.NONMETAL, Kind.IONIC, Kind.HYDROGEN)
    return next(kind for kind in rank if kind in total)


def _kind_of_element(symbol: str) -> Kind:
    for word, kind in _KINDS.items():
        if symbol in listed(word):
            return kind
    return Kind.METAL


_KINDS = {
    "hydrogen": Kind.HYDROGEN,
    "nonmetal": Kind.NONMETAL,
    "metalloid": Kind.METALLOID,
    "ionic": Kind.IONIC,
}

Content = tuple[tuple[str, float], ...]


def describe(elements: Sequence[str], contents: Sequence[Mapping[str, float]] = ()) -> Elements:
    """The tables for the elements of n atoms; mixed sites are averaged by `contents`, equally where these are left out.

    A structure in which one atom is called A holds names by order (A, B, C, ...), not elements: all are unknown then.
    """
    sites = [tuple(content.items()) for content in contents] or [_equal(element) for element in elements]
    keys = list(zip(elements, sites, strict=True))
    number = {key: place for place, key in enumerate(dict.fromkeys(keys))}
    unnamed = "A" in set(elements)
    shares = [{} if unnamed else dict(site) for _, site in number]
    known = [{symbol: x for symbol, x in share.items() if symbol in covalent_radii()} for share in shares]
    table = anions()
    first = [next((symbol for symbol in share if symbol in table), "") for share in known]
    own = [table.get(symbol, Anion(0, 0.0)) for symbol in first]
    rank = {symbol: place for place, symbol in enumerate(table)}
    main = [{symbol for symbol, x in site if x >= 0.2 * sum(dict(site).values())} for _, site in number]
    return Elements(
        names=tuple(name for name, _ in number),
        index=np.array([number[key] for key in keys], dtype=np.int64),
        kind=np.array([kind_of(share) for share in shares], dtype=np.int64),
        radius=np.array([_mean(share, covalent_radii(), 0.0) for share in known]),
        parameter=np.array([_mean(share, oxide_parameters(), np.nan) for share in known]),
        valence=np.array([float(anion.valence) for anion in own]),
        offset=np.array([anion.offset for anion in own]),
        order=np.array([rank.get(symbol, len(rank)) for symbol in first], dtype=np.int64),
        single=np.array([len(site) == 1 for _, site in number], dtype=bool),
        alike=np.array([[not one.isdisjoint(other) for other in main] for one in main], dtype=bool),
    )


def _equal(element: str) -> Content:
    return tuple((symbol, 1.0) for symbol in element.split("/"))


def _mean(shares: Mapping[str, float], values: Mapping[str, float], otherwise: float) -> float:
    """Mean of the values, weighted by the shares of those elements that have one."""
    weight = sum(share for symbol, share in shares.items() if symbol in values)
    total = sum(share * values[symbol] for symbol, share in shares.items() if symbol in values)
    return total / weight if weight else otherwise
