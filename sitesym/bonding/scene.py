"""The atoms, their contacts, and the plain questions that the rule for bonds asks of them."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from sitesym.bonding.chemistry import Elements, Kind
from sitesym.bonding.contacts import Booleans, Contacts, ranges
from sitesym.structure import Floats, Integers

FAR_SIDE = 0.95
"""A contact is the far side of a triangle when both other sides are shorter by this factor, relative to the radii."""

BRIDGED_METALS = 0.88
"""Metal atoms that share a neighbour are bonded to each other only below this ratio to the sum of radii.

It lies between the W-W bond in W6S8 (0.82), the V-V pairs of monoclinic VO2 (0.86) and the mere contacts of rutile
(0.92) or LaMnO3 (0.93).
"""


@dataclass(frozen=True, eq=False)
class Scene:
    """n atoms and m contacts between them.

    elements  tables of the elements.
    kind      (n,) `Kind` of each atom; differs from that of its element for lithium and magnesium in organometallics.
    contacts  the contacts, shorter than the cut-off.
    """

    elements: Elements
    kind: Integers
    contacts: Contacts

    @property
    def n(self) -> int:
        """Number of atoms."""
        return len(self.kind)

    @cached_property
    def ratio(self) -> Floats:
        """(m,) distance over the sum of the covalent radii."""
        return ratios(self.elements, self.contacts)

    def between(self, one: Booleans, other: Booleans) -> Booleans:
        """(m,) contacts with one atom in the mask `one` and its partner in the mask `other`, both (n,)."""
        i, j = self.contacts.first, self.contacts.second
        return np.asarray((one[i] & other[j]) | (one[j] & other[i]))

    def are(self, *kinds: Kind) -> Booleans:
        """(n,) atoms of these kinds."""
        return np.asarray(np.isin(self.kind, kinds))

    def other_than(self, atoms: Booleans) -> Integers:
        """(m,) the partner of the atom that is in the mask (the second one if both are)."""
        i, j = self.contacts.first, self.contacts.second
        return np.where(atoms[i], j, i)

    def with_kind(self, atoms: Booleans, kind: Kind) -> Scene:
        """The same with these atoms given another kind."""
        return replace(self, kind=np.where(atoms, kind, self.kind))

    def count(self, contacts: Booleans, partner: Booleans | None = None) -> Integers:
        """(n,) number of the contacts in the (m,) mask at each atom, those to a `partner` in the (n,) mask only."""
        i, j = self.contacts.first[contacts], self.contacts.second[contacts]
        ends, others = np.concatenate([i, j]), np.concatenate([j, i])
        if partner is not None:
            ends = ends[partner[others]]
        return np.bincount(ends, minlength=self.n)

    @cached_property
    def far_side(self) -> Booleans:
        """(m,) contacts of a metal atom, ionic ones included, that are the far side of a triangle.

        The two atoms share a neighbour, no metal, that is nearer to both, or that is oxygen or a halogen while neither
        of the two is: zirconium and silicon in zircon on either side of an oxygen atom. For two metal atoms see
        `BRIDGED_METALS`.
        """
        metal = self.are(Kind.METAL, Kind.IONIC)
        solid = metal | self.are(Kind.METALLOID, Kind.NONMETAL)
        among, metals = self.between(solid, solid), self.between(metal, metal)
        limit = np.where(metals, np.where(self.ratio > BRIDGED_METALS, np.inf, 0.0), FAR_SIDE * self.ratio)
        sides = np.flatnonzero(among & ~metals)
        suspects = np.flatnonzero(among & self.contacts.partner(metal))
        anion = self.elements.valence[self.elements.index] > 0
        central = ~metals & ~self.contacts.partner(anion)
        return _far_sides(self.contacts, self.ratio, sides, suspects, limit, ~metal, central, anion)

    @cached_property
    def anion_order(self) -> Integers:
        """(n,) place of each atom among the anions, most electronegative first; a large number for all others."""
        return np.asarray(self.elements.order[self.elements.index])


def ratios(elements: Elements, contacts: Contacts) -> Floats:
    """(m,) distance over the sum of the covalent radii."""
    radius = elements.radius[elements.index]
    return np.asarray(contacts.distance / (radius[contacts.first] + radius[contacts.second]))


def _far_sides(
    contacts: Contacts,
    ratio: Floats,
    sides: Integers,
    suspects: Integers,
    limit: Floats,
    bridges: Booleans,
    central: Booleans,
    anion: Booleans,
) -> Booleans:
    """(m,) mask of the suspects i-j that are the far side of a triangle i-x-j.

    x is an atom of `bridges` with i-x and j-x among the `sides`, both with a ratio below the (m,) `limit` of the
    suspect, or at any ratio if x is an `anion` and the suspect is in the (m,) mask `central`.
    """
    result = np.zeros(len(contacts), dtype=bool)
    if not len(suspects) or not len(sides):
        return result
    i, j, shift = contacts.first[sides], contacts.second[sides], contacts.shift[sides]
    start, end = np.concatenate([i, j]), np.concatenate([j, i])
    step, length = np.concatenate([shift, -shift]), np.tile(ratio[sides], 2)
    order = np.flatnonzero(bridges[end])
    order = order[np.argsort(start[order], kind="stable")]
    start, end, step, length = start[order], end[order], step[order], length[order]
    atoms, reach = len(bridges), 2 * int(abs(step).max(initial=0)) + int(abs(contacts.shift).max(initial=0)) + 1
    keys = _key(start, end, step, atoms, reach)
    by_key = np.argsort(keys)
    offset = np.searchsorted(start, contacts.first[suspects])
    number = np.searchsorted(start, contacts.first[suspects], side="right") - offset
    which = np.repeat(suspects, number)
    leg = ranges(offset, number)
    wanted = _key(contacts.second[which], end[leg], step[leg] - contacts.shift[which], atoms, reach)
    match = by_key[np.minimum(np.searchsorted(keys[by_key], wanted), len(keys) - 1)]
    shorter = np.maximum(length[leg], length[match]) < limit[which]
    found = (keys[match] == wanted) & (shorter | (central[which] & anion[end[leg]]))
    result[which[found]] = True
    return result


def _key(start: Integers, end: Integers, step: Integers, atoms: int, reach: int) -> Integers:
    """One integer for a directed contact; each component of `step` lies in -reach ... reach."""
    width = 2 * reach + 1
    key = start * atoms + end
    for axis in range(3):
        key = key * width + step[:, axis] + reach
    return np.asarray(key, dtype=np.int64)
