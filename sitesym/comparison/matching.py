"""Atoms of the child laid onto those of the undistorted parent: origin, partners, displacements."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.comparison.lattice import LatticeRelation, PrimitiveLattice, cosets
from sitesym.groups.operation import Booleans, Floats, Integers
from sitesym.structure import Site
from sitesym.symmetry.crystal import CrystalSymmetry

_FORBIDDEN = 1e6
_ORIGINS_TRIED = 64
_SAME_ORIGIN = 0.05
_ROUNDS = 4


@dataclass(frozen=True, eq=False)
class AtomMatch:
    """Every atom of the child's primitive cell beside its partner in the parent.

    origin         (3,) where the child's origin lies, in the parent's a, b, c.
    atoms          (n,) the partner among the parent's primitive atoms.
    cells          (n, 3) lattice translation that brings the partner there, in the parent's a, b, c.
    displacements  (n, 3) Å, Cartesian axes of the parent, the strain taken out: from the partner to the atom.
    """

    origin: Floats
    atoms: Integers
    cells: Floats
    displacements: Floats

    @property
    def largest(self) -> float:
        """The longest displacement in Å."""
        return float(np.linalg.norm(self.displacements, axis=1).max())

    @property
    def root_mean_square(self) -> float:
        """Å."""
        return float(np.sqrt((self.displacements**2).sum(axis=1).mean()))


def may_stand_on(parent: CrystalSymmetry, child: CrystalSymmetry) -> Booleans:
    """(n of the child, n of the parent) whether an atom may be taken for the other.

    It may where the parent's site can hold all its elements. An element that the parent does not have may stand
    anywhere: it is a substitution.
    """
    sites = [parent.structure.sites[index] for index in parent.atoms]
    known = {element for site in sites for element in _elements(site)}
    answers: dict[frozenset[str], list[bool]] = {}
    for index in child.atoms:
        wanted = _elements(child.structure.sites[index])
        if wanted not in answers:
            answers[wanted] = [wanted & known <= _elements(site) for site in sites]
    return np.array([answers[_elements(child.structure.sites[index])] for index in child.atoms])


def _elements(site: Site) -> frozenset[str]:
    return frozenset(occupant.element for occupant in site.occupants)


def matches(
    parent: CrystalSymmetry, child: CrystalSymmetry, lattices: tuple[PrimitiveLattice, PrimitiveLattice],
    lattice: LatticeRelation, allowed: Booleans,
) -> list[AtomMatch]:  # fmt: skip
    """Ways to lay the atoms of the child onto the parent in one relation of the lattices, each with its best origin."""
    ideal = _Supercell.of(parent, lattices[0], lattice)
    places = child.positions @ lattice.axes
    found: list[AtomMatch] = []
    for origin in _origins(places, parent, lattices[0], allowed):
        match = ideal.settled(places, origin, allowed)
        if match is not None and not any(_is_same(match, other, ideal) for other in found):
            found.append(match)
    return sorted(found, key=lambda one: one.root_mean_square)


def _is_same(one: AtomMatch, other: AtomMatch, ideal: _Supercell) -> bool:
    """Whether two origins differ by a lattice vector of the parent."""
    difference = (one.origin - other.origin) @ np.linalg.inv(ideal.parent.basis)
    return bool(np.linalg.norm((difference - np.rint(difference)) @ ideal.parent.vectors) < _SAME_ORIGIN)


def _origins(
    places: Floats, parent: CrystalSymmetry, lattice: PrimitiveLattice, allowed: Booleans
) -> list[Floats]:  # fmt: skip
    """(3,) origins that bring an atom with few possible partners onto one of them, in the parent's a, b, c."""
    choices = allowed.sum(axis=1)
    groups = {row.tobytes(): np.flatnonzero((allowed == row).all(axis=1)) for row in allowed}
    rarest = min(groups.values(), key=lambda members: (len(members) * choices[members[0]], members[0]))
    partners = np.flatnonzero(allowed[rarest[0]])
    origins: list[Floats] = []
    inverse = np.linalg.inv(lattice.basis)
    for atom in rarest:
        for partner in partners:
            origin = parent.positions[partner] - places[atom]
            away = [(origin - other) @ inverse for other in origins]
            if all(np.linalg.norm((one - np.rint(one)) @ lattice.vectors) > _SAME_ORIGIN for one in away):
                origins.append(origin)
            if len(origins) == _ORIGINS_TRIED:
                return origins
    return origins


@dataclass(frozen=True, eq=False)
class _Supercell:
    """The undistorted parent in the child's cell.

    positions (k, 3) in the parent's a, b, c, of `atoms` (k,) displaced by lattice translations `cells` (k, 3).
    to_child  (3, 3): a row in a, b, c of the parent times this gives coordinates in the child's primitive cell.
    """

    parent: PrimitiveLattice
    positions: Floats
    atoms: Integers
    cells: Floats
    to_child: Floats
    vectors: Floats

    @classmethod
    def of(cls, parent: CrystalSymmetry, lattice: PrimitiveLattice, relation: LatticeRelation) -> _Supercell:
        cells = cosets(relation.supercell) @ lattice.basis
        count = len(parent.positions)
        return cls(
            lattice,
            (parent.positions[None] + cells[:, None]).reshape(-1, 3),
            np.tile(np.arange(count), len(cells)),
            np.repeat(cells, count, axis=0),
            np.asarray(np.linalg.inv(relation.supercell @ lattice.basis), dtype=np.float64),
            relation.supercell @ lattice.vectors,
        )

    def settled(self, places: Floats, origin: Floats, allowed: Booleans) -> AtomMatch | None:
        """The best partners from this origin on, the origin moved until the mean displacement is zero.

        None if some atom has no partner of its kind left.
        """
        from scipy.optimize import linear_sum_assignment

        partners = None
        for _ in range(_ROUNDS):
            away = self._away(places[:, None] + origin - self.positions[None])
            cost = np.where(allowed[:, self.atoms], (away**2).sum(axis=2), _FORBIDDEN)
            rows, columns = linear_sum_assignment(cost)
            if cost[rows, columns].max() >= _FORBIDDEN:
                return None
            mean = away[rows, columns].mean(axis=0)
            origin = origin - mean @ np.linalg.inv(self.vectors) @ np.linalg.inv(self.to_child)
            if partners is not None and (columns == partners).all():
                break
            partners = columns
        return self._match(places, origin, columns)

    def _away(self, difference: Floats) -> Floats:
        """Shortest vectors in Å (..., 3) for differences in the parent's a, b, c, up to translations of the child.

        Rounding in a basis of short vectors is exact for all that are shorter than half the spacing of its planes.
        """
        inside = difference @ self.to_child
        return np.asarray((inside - np.rint(inside)) @ self.vectors)

    def _match(self, places: Floats, origin: Floats, partners: Integers) -> AtomMatch:
        difference = places + origin - self.positions[partners]
        displacements = self._away(difference)
        steps = np.rint(difference @ self.to_child) @ np.linalg.inv(self.to_child)
        return AtomMatch(origin, self.atoms[partners], self.cells[partners] + steps, displacements)
