"""Why a unit is what it is: sentences made from the verdicts on its bonds and on its refused contacts."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from sitesym.bonding import Bonds, Verdict
from sitesym.bonding.chemistry import formula_rank
from sitesym.bonding.graph import Parts
from sitesym.structure import Floats, Integers

_UNTOLD = (Verdict.FAR_SIDE, Verdict.METALS, Verdict.BEYOND, Verdict.HYDROGEN_BOND)
"""Contacts that nobody would take for bonds are not spoken of."""

_KINDS = {1: "chain", 2: "layer", 3: "three-dimensional net"}


@dataclass(frozen=True, slots=True)
class _Line:
    """All contacts of one pair of elements with one verdict in one unit: names and the range of lengths in Å."""

    pair: str
    shortest: float
    longest: float

    def __str__(self) -> str:
        low, high = f"{self.shortest:.2f}", f"{self.longest:.2f}"
        return f"{self.pair} ({low} Å)" if low == high else f"{self.pair} ({low} to {high} Å)"


def reasons(bonds: Bonds, parts: Parts, elements: Sequence[str]) -> list[str]:
    """One text for each part: what holds it together, and which near contacts were not counted."""
    taken = _Summary(bonds.first, bonds.second, bonds.distance, bonds.verdict, parts, elements).lines
    told = ~np.isin(bonds.refusal, _UNTOLD)
    refused = bonds.refused.where(told)
    left = _Summary(refused.first, refused.second, refused.distance, bonds.refusal[told], parts, elements).lines
    return [
        _text(bonds, int(dimension), taken.get(number, {}), left.get(number, {}))
        for number, dimension in enumerate(parts.dimension)
    ]


def _text(bonds: Bonds, dimension: int, taken: dict[int, list[_Line]], left: dict[int, list[_Line]]) -> str:
    sentences = [f"{_list(lines)}: bonded ({bonds.words(verdict)})." for verdict, lines in taken.items()]
    if dimension:
        sentences.append(f"The bonds form an endless {_KINDS[dimension]}, which is treated by atomic sites.")
    sentences += [f"{_list(lines)}: not bonded ({bonds.words(verdict)})." for verdict, lines in left.items()]
    return " ".join(sentences) or "No other atom is within the reach of a bond."


def _list(lines: Sequence[_Line]) -> str:
    words = [str(line) for line in lines]
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} and {words[-1]}"


@dataclass(frozen=True, eq=False)
class _Summary:
    """m contacts with their verdicts, to be gathered by unit, verdict and pair of elements."""

    first: Integers
    second: Integers
    distance: Floats
    verdict: Integers
    parts: Parts
    elements: Sequence[str]

    @cached_property
    def lines(self) -> dict[int, dict[int, list[_Line]]]:
        """Unit -> verdict -> lines. A contact between two units belongs to both."""
        result: dict[int, dict[int, list[_Line]]] = defaultdict(lambda: defaultdict(list))
        if not len(self.first):
            return result
        names = sorted(set(self.elements), key=formula_rank)
        index = np.array([names.index(element) for element in self.elements])
        pair = np.sort(np.column_stack([index[self.first], index[self.second]]), axis=1)
        rows = np.concatenate([self._rows(self.first, pair), self._rows(self.second, pair)])
        unique, inverse = np.unique(rows, axis=0, return_inverse=True)
        low, high = np.full(len(unique), np.inf), np.zeros(len(unique))
        np.minimum.at(low, inverse.ravel(), np.tile(self.distance, 2))
        np.maximum.at(high, inverse.ravel(), np.tile(self.distance, 2))
        for (unit, verdict, one, other), shortest, longest in zip(unique.tolist(), low, high, strict=True):
            pair_name = f"{names[one]}-{names[other]}"
            result[unit][verdict].append(_Line(pair_name, float(shortest), float(longest)))
        return result

    def _rows(self, ends: Integers, pair: Integers) -> Integers:
        """(m, 4) unit, verdict and pair of names of each contact at one of its ends."""
        return np.column_stack([self.parts.part[ends], self.verdict, pair])
