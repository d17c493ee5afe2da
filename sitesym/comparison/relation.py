"""The relation of two crystals: how one group is embedded in the other, or why it is not."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
import numpy.typing as npt

from sitesym.comparison.lattice import LatticeRelation, PrimitiveLattice, relation, strained_onto
from sitesym.comparison.matching import AtomMatch, matches, may_stand_on
from sitesym.comparison.operations import exact_origin
from sitesym.comparison.wavevectors import Star, folded_stars
from sitesym.groups.operation import Booleans, Floats, Integers
from sitesym.symmetry.crystal import CrystalSymmetry

Complexes = npt.NDArray[np.complex128]

_WHOLE = 0.02
_LATTICES_TRIED = 40


@dataclass(frozen=True, eq=False)
class Embedding:
    """The child laid into the parent.

    lattices       primitive lattices of parent and child.
    lattice        supercell, axes, strain, and the parent's operation for each one of the child's factor group.
    match          partners of the atoms, displacements, origin.
    translations   (g, 3) lattice translation of the parent, in its a, b, c, by which the child's operation differs.
    rotation       (3, 3) orthogonal: a row vector in the parent's Cartesian axes times this is that in the child's.
    substitutions  element of the child -> element of the parent on whose sites it stands, where they differ.
    stars          wavevectors of the parent that fold to the child's zone centre, that centre first.
    """

    parent: CrystalSymmetry
    child: CrystalSymmetry
    lattices: tuple[PrimitiveLattice, PrimitiveLattice]
    lattice: LatticeRelation
    match: AtomMatch
    translations: Floats
    rotation: Floats
    substitutions: dict[str, str]
    stars: tuple[Star, ...]

    @property
    def operations(self) -> Integers:
        """(g,) for each operation of the child's factor group its index in the parent's."""
        return self.lattice.operations

    @property
    def translationengleiche(self) -> int:
        """By what factor the point group shrinks: the number of orientation states."""
        return len(self.parent.rotations) // len(self.child.rotations)

    @property
    def klassengleiche(self) -> int:
        """By what factor the primitive cell grows: translations that are lost."""
        return round(abs(float(np.linalg.det(self.lattice.supercell))))

    @property
    def index(self) -> int:
        """Index of the child's space group in the parent's."""
        return self.translationengleiche * self.klassengleiche

    @property
    def is_average(self) -> bool:
        """Whether parent sites are only partly occupied, so that some have no atom in the child."""
        return len(self.match.atoms) < self.klassengleiche * len(self.parent.positions)

    @cached_property
    def amplitudes(self) -> tuple[float, ...]:
        """For each star the root of the summed squares of the displacements with its wavevectors, Å a child cell."""
        fields = self.match.displacements
        squares = []
        for star in self.stars:
            waves = np.array([self._wave(arm, fields) for arm in _conventional(star, self.lattices[0])])
            squares.append(float((np.abs(waves) ** 2).sum()) * self.klassengleiche)
        return tuple(float(np.sqrt(square)) for square in squares)

    def _wave(self, arm: Floats, fields: Floats) -> Complexes:
        """(n, 3) mean of the displacements of each parent atom under one wavevector."""
        phases = np.exp(-2j * np.pi * (self.match.cells @ arm))
        sums = np.zeros((len(self.parent.positions), 3), dtype=complex)
        np.add.at(sums, self.match.atoms, phases[:, None] * fields)
        return np.asarray(sums / self.klassengleiche)


def _conventional(star: Star, lattice: PrimitiveLattice) -> Floats:
    """(k, 3) the arms in units of the parent's a*, b*, c*."""
    return np.asarray(np.array(star.arms, dtype=np.float64) @ np.linalg.inv(lattice.basis).T)


@dataclass(frozen=True, slots=True)
class Refusal:
    """Why there is no relation: `code` is contents, lattice, operations or atoms; `reason` a sentence."""

    code: str
    reason: str


def find_relation(
    parent: CrystalSymmetry, child: CrystalSymmetry, strain: float, displacement: float
) -> Embedding | Refusal:
    """Lay the child into the parent with the smallest displacements, or say at which step that fails.

    strain  largest relative change of a length, displacement the longest one of an atom in Å.
    """
    copies = _copies(parent, child)
    if not copies:
        return Refusal(
            "contents", "the atoms in the child's primitive cell are no whole multiple of those in the parent's"
        )
    allowed = may_stand_on(parent, child)
    if len(child.atoms) > copies * len(parent.atoms):
        return Refusal("contents", "the child has more sites than the parent, counted by volume")
    if not allowed.any(axis=1).all():
        return Refusal("contents", "some atoms of the child have no counterpart of their kind in the parent")
    lattices = PrimitiveLattice.of(parent), PrimitiveLattice.of(child)
    scale = _scale(parent, child, lattices, copies)
    supercells, stretches = strained_onto(*lattices, copies, strain, scale)
    if not len(supercells):
        return Refusal("lattice", f"no sublattice of the parent is within {100 * strain:g} % of the child's lattice")
    related = [
        one
        for supercell, stretch in zip(supercells, stretches, strict=True)
        if (one := relation(*lattices, supercell, stretch)) is not None
    ]
    if not related:
        return Refusal("operations", "rotations of the child's factor group are missing in the parent's")
    return _best(parent, child, lattices, related, allowed, displacement)


def _best(
    parent: CrystalSymmetry, child: CrystalSymmetry, lattices: tuple[PrimitiveLattice, PrimitiveLattice],
    related: list[LatticeRelation], allowed: Booleans, displacement: float,
) -> Embedding | Refusal:  # fmt: skip
    matched = [
        (one, match)
        for one in sorted(related, key=lambda one: one.mirrored)[:_LATTICES_TRIED]
        for match in matches(parent, child, lattices, one, allowed)
    ]
    if not matched:
        return Refusal("contents", "atoms of the child and of the parent cannot be paired")
    close = [pair for pair in matched if pair[1].largest <= displacement]
    if not close:
        least = min(match.largest for _, match in matched)
        reason = f"some atom would have to move by {least:.1f} Å at the least; {displacement:g} Å are allowed"
        return Refusal("atoms", reason)
    found = list(_embedded(parent, child, lattices, close))
    if not found:
        return Refusal("operations", "operations of the child's space group are missing in the parent's")
    return min(found, key=lambda one: (one.lattice.mirrored, round(one.match.root_mean_square, 3), one.lattice.strain))


def _embedded(
    parent: CrystalSymmetry, child: CrystalSymmetry, lattices: tuple[PrimitiveLattice, PrimitiveLattice],
    pairs: list[tuple[LatticeRelation, AtomMatch]],
) -> Iterator[Embedding]:  # fmt: skip
    for lattice, match in pairs:
        found = exact_origin(parent, child, lattices[0], lattice, match.origin)
        substitutions = _substitutions(parent, child, match)
        if found is not None and substitutions is not None:
            match, translations = _in_first_cell(parent, lattice, replace(match, origin=found[0]), found[1])
            own, lattice = _plain_supercell(lattices[1], lattice)
            yield Embedding(
                parent, child, (lattices[0], own), lattice, match, translations, _rotation(parent, child, lattice),
                substitutions, folded_stars(parent, lattices[0], lattice.supercell),
            )  # fmt: skip


def _in_first_cell(
    parent: CrystalSymmetry, lattice: LatticeRelation, match: AtomMatch, translations: Floats
) -> tuple[AtomMatch, Floats]:
    """The same with the child's origin between 0 and 1 in the parent's a, b, c."""
    home = np.floor(match.origin + 1e-6)
    rotations = parent.rotations[lattice.operations]
    moved = replace(match, origin=np.round(match.origin - home, 9) + 0.0, cells=match.cells - home)
    return moved, translations - (np.eye(3) - rotations) @ home


def _plain_supercell(child: PrimitiveLattice, lattice: LatticeRelation) -> tuple[PrimitiveLattice, LatticeRelation]:
    """Where nothing is multiplied, the child's primitive vectors are taken along those of the parent."""
    if abs(round(np.linalg.det(lattice.supercell))) != 1:
        return child, lattice
    change = np.rint(np.linalg.inv(lattice.supercell)).astype(np.int64)
    back = lattice.supercell.T
    rotations = np.rint(back @ child.rotations @ np.linalg.inv(back)).astype(np.int64)
    own = PrimitiveLattice(change @ child.basis, change @ child.vectors, rotations)
    return own, replace(lattice, supercell=np.eye(3, dtype=np.int64))


def _rotation(parent: CrystalSymmetry, child: CrystalSymmetry, lattice: LatticeRelation) -> Floats:
    """Orthogonal part of the map of the parent's Cartesian axes onto the child's (polar decomposition)."""
    left, _, right = np.linalg.svd(np.linalg.inv(lattice.axes @ parent.lattice) @ child.lattice)
    return np.asarray(left @ right)


def _substitutions(parent: CrystalSymmetry, child: CrystalSymmetry, match: AtomMatch) -> dict[str, str] | None:
    """Elements that stand on sites of others; None if one of them does so on sites of several kinds."""
    pairs: dict[str, str] = {}
    own = child.structure.elements
    for atom, partner in zip(child.atoms.tolist(), parent.atoms[match.atoms].tolist(), strict=True):
        element, place = own[atom], parent.structure.sites[partner]
        if {one.element for one in child.structure.sites[atom].occupants} <= {one.element for one in place.occupants}:
            continue
        if pairs.setdefault(element, place.element) != place.element:
            return None
    return pairs


def _copies(parent: CrystalSymmetry, child: CrystalSymmetry) -> int:
    """How many primitive cells of the parent are in one of the child, by the atoms in them; 0 if no whole number."""
    ratio = _atoms(child) / _atoms(parent)
    whole = round(ratio)
    return whole if whole and abs(ratio - whole) < _WHOLE * whole else 0


def _atoms(symmetry: CrystalSymmetry) -> float:
    return float(sum(symmetry.structure.sites[index].occupancy for index in symmetry.atoms.tolist()))


def _scale(
    parent: CrystalSymmetry, child: CrystalSymmetry, lattices: tuple[PrimitiveLattice, PrimitiveLattice], copies: int
) -> float:
    """How much longer the child's lengths are, for a compound of other elements; 1 for the same compound."""
    if set(child.structure.composition) <= set(parent.structure.composition):
        return 1.0
    return float((lattices[1].volume / (copies * lattices[0].volume)) ** (1 / 3))
