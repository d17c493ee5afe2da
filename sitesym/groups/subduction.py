"""Reduction, restriction to a subgroup and induction from one, all through actual operations.

Multiplicities count *real* species: a pair of complex-conjugate representations is one species with a Frobenius norm
of two, by which every scalar product is divided.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from functools import lru_cache

import numpy as np

from sitesym.errors import InconsistencyError
from sitesym.groups.irreps import Representation
from sitesym.groups.operation import Floats, Integers
from sitesym.groups.point_group import PointGroup

Multiplicities = dict[str, int]
"""Species label -> how often it occurs; species that do not occur are left out."""


def counts(values: Floats) -> Integers:
    """Multiplicities rounded to integers; the one place where that is done.

    Raises InconsistencyError when a value is no non-negative integer to within 0.01.
    """
    rounded = np.rint(values)
    if np.abs(values - rounded).max(initial=0.0) > 0.01 or rounded.min(initial=0.0) < 0:
        raise InconsistencyError(
            f"A multiplicity came out as {values[np.argmax(np.abs(values - rounded))]:.3f}, which is no count.",
            "Try another tolerance: the operations found do not fit the atoms.",
        )
    return rounded.astype(np.int64)


def reduce_characters(species: Sequence[Representation], characters: Floats) -> Multiplicities:
    """How often each species occurs in a representation with these `characters` (n,), one for each operation."""
    found = counts(_projectors(tuple(species)) @ characters / len(characters))
    return {one.label: int(count) for one, count in zip(species, found, strict=True) if count}


@lru_cache(maxsize=1024)
def _projectors(species: tuple[Representation, ...]) -> Floats:
    """(species, operations) characters over norms."""
    return np.array([one.characters / one.norm for one in species])


def subduce(group: PointGroup, subgroup: PointGroup) -> dict[str, Multiplicities]:
    """Each species of `group` restricted to `subgroup`, whose operations must be among those of the group."""
    return {
        one.label: reduce_characters(subgroup.species, one.characters) for one in group.species_on(subgroup.matrices)
    }


def induce(group: PointGroup, subgroup: PointGroup) -> dict[str, Multiplicities]:
    """Each species of `subgroup` induced to `group`, by Frobenius reciprocity on the restriction."""
    norms = {one.label: one.norm for one in subgroup.species}
    own = {one.label: one.norm for one in group.species}
    induced: dict[str, Multiplicities] = {label: {} for label in norms}
    for label, parts in subduce(group, subgroup).items():
        for part, count in parts.items():
            shared = counts(np.array([count * norms[part] / own[label]]))
            induced[part][label] = int(shared[0])
    return induced


def total(parts: Mapping[str, int] | Multiplicities, table: Mapping[str, Multiplicities]) -> Multiplicities:
    """Map multiplicities through a table of `subduce` or `induce` and add up."""
    result: Multiplicities = {}
    for label, times in parts.items():
        for target, count in table[label].items():
            result[target] = result.get(target, 0) + times * count
    return result


def in_order(group: PointGroup, parts: Mapping[str, int]) -> Multiplicities:
    """The same multiplicities in the group's own order of species, without zeros."""
    return {one.label: parts[one.label] for one in group.species if parts.get(one.label)}


def added(*terms: Mapping[str, int]) -> Multiplicities:
    """Sum of several sets of multiplicities."""
    result: Multiplicities = {}
    for term in terms:
        for label, count in term.items():
            result[label] = result.get(label, 0) + count
    return result


def subtracted(whole: Mapping[str, int], part: Mapping[str, int]) -> Multiplicities:
    """Difference of two sets. Raises InconsistencyError where a count would become negative."""
    result = {label: count - part.get(label, 0) for label, count in whole.items()}
    negative = [label for label, count in result.items() if count < 0]
    negative += [label for label, count in part.items() if count and label not in whole]
    if negative:
        raise InconsistencyError(
            f"There are fewer modes of species {', '.join(negative)} than are to be taken away.",
            "Try another tolerance, or check that the structure is complete.",
        )
    return {label: count for label, count in result.items() if count}
