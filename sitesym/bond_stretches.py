"""Species of the stretching vibrations of each kind of bond: how many C=O, N-H or Pt-Cl bands a molecule has.

The bonds between two elements are carried into each other by the group. The number that an operation leaves in place is
its character in the representation that they span (Wilson, Decius and Cross, Molecular Vibrations, 1955, chapter 6; for
carbonyls common practice). Stretches of different kinds of bonds mix where species agree, and those of a cage with more
bonds than vibrations are not all independent.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from sitesym.bonding.chemistry import formula_rank
from sitesym.groups.operation import Floats
from sitesym.groups.point_group import PointGroup
from sitesym.groups.subduction import Multiplicities, in_order, reduce_characters
from sitesym.vibrations import permutations_of


@dataclass(frozen=True, slots=True)
class BondStretches:
    """`count` bonds between two elements (`pair`, as C-O) and the species of the free molecule that they span."""

    pair: str
    count: int
    species: Multiplicities


def bond_stretches(
    group: PointGroup, positions: Floats, bonds: Sequence[tuple[int, int]], elements: Sequence[str]
) -> tuple[BondStretches, ...]:
    """The stretches of a molecule by kinds of bonds.

    group      its point group; positions (n, 3) Å of exactly that symmetry, the centre at the origin.
    bonds      pairs of its n atoms, closed under the group; `elements` their n names.
    """
    permutations = permutations_of(group, positions)
    found = []
    for pair in sorted({bond_name(elements[i], elements[j]) for i, j in bonds}):
        chosen = np.array([bond for bond in bonds if bond_name(elements[bond[0]], elements[bond[1]]) == pair])
        images = np.sort(permutations[:, chosen], axis=2)
        fixed = (images == np.sort(chosen, axis=1)).all(axis=2).sum(axis=1)
        species = in_order(group, reduce_characters(group.species, fixed.astype(np.float64)))
        found.append(BondStretches(pair, len(chosen), species))
    return tuple(found)


def bond_name(one: str, other: str) -> str:
    """`C-O`, `O-H`: the more electropositive element first, hydrogen last."""
    first, second = sorted((one, other), key=lambda element: (element in ("H", "D", "T"), formula_rank(element)))
    return f"{first}-{second}"
