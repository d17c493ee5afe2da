"""Direct products of species and symmetrised powers of degenerate ones: what overtones and combinations can be.

Characters of the symmetrised power of order n by Newton's recursion, which generalises the well-known formulae for the
second and third powers (Tisza, Z. Phys. 82, 48, 1933; Wilson, Decius and Cross 1955, section 7-3).
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from functools import lru_cache

import numpy as np

from sitesym.errors import UsageError
from sitesym.groups.irreps import Representation
from sitesym.groups.operation import Floats, index_of
from sitesym.groups.point_group import PointGroup
from sitesym.groups.subduction import Multiplicities, reduce_characters


def species_of(group: PointGroup, label: str) -> Representation:
    """One species of a group. Raises UsageError for a label that the group does not have."""
    for one in group.species:
        if one.label == label:
            return one
    raise UsageError(f"{group.schoenflies} has no species {label}.", "Species are printed by `sitesym report`.")


def product(group: PointGroup, labels: Sequence[str]) -> Multiplicities:
    """Species in the product of several different vibrations, each excited once: a combination band."""
    characters = np.prod([species_of(group, label).characters for label in labels], axis=0)
    return reduce_characters(group.species, characters)


def symmetrised_power(group: PointGroup, label: str, order: int) -> Multiplicities:
    """Species of one vibration excited `order` times: an overtone; fewer than the plain power if degenerate."""
    return reduce_characters(group.species, power_characters(group, label, order))


def level(group: PointGroup, quanta: Sequence[tuple[str, int]]) -> Multiplicities:
    """Species of a level with several vibrations, each (label, number of quanta) a vibration of its own."""
    characters = np.prod([power_characters(group, label, order) for label, order in quanta], axis=0)
    return reduce_characters(group.species, characters)


def difference(group: PointGroup, upper: str, lower: str) -> Multiplicities:
    """Species of a transition from a thermally excited level `lower` to `upper`: the product of both."""
    return product(group, (upper, lower))


def power_characters(group: PointGroup, label: str, order: int) -> Floats:
    """(n,) characters of the symmetrised power. Raises UsageError for an order below one."""
    if order < 1:
        raise UsageError(f"A vibration cannot be excited {order} times.", "Give a whole number of quanta, 1 or more.")
    one = species_of(group, label)
    powers = [one.characters[_power_indices(group, k)] for k in range(1, order + 1)]
    complete = [np.ones(len(group))]
    for n in range(1, order + 1):
        complete.append(sum((powers[k - 1] * complete[n - k] for k in range(1, n + 1)), np.zeros(len(group))) / n)
    return complete[order]


@lru_cache(maxsize=1024)
def _power_indices(group: PointGroup, power: int) -> np.typing.NDArray[np.int64]:
    """Index of the k-th power of every operation."""
    return index_of(np.linalg.matrix_power(group.matrices, power), group.matrices)


def counted(labels: Sequence[str]) -> tuple[tuple[str, int], ...]:
    """Labels with how often each occurs, in order of first appearance."""
    return tuple(Counter(labels).items())
