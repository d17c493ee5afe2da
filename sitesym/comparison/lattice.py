"""How the child's primitive lattice sits in the parent's: integer matrices, strain, and the choice of axes.

Bases are rows. Coordinates of a point are a column x, and a lattice vector n a row of integers: the vector n @ basis.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from itertools import product

import numpy as np

from sitesym.groups.operation import Floats, Integers
from sitesym.symmetry.crystal import CrystalSymmetry
from sitesym.symmetry.primitive import primitive_cell

_COMBINATIONS = np.array([one for one in product((-1, 0, 1), repeat=2) if any(one)], dtype=np.int64)
_SHORTER = 1 - 1e-9


@dataclass(frozen=True, eq=False)
class PrimitiveLattice:
    """The primitive lattice of a crystal in a basis of short vectors, right-handed.

    basis      (3, 3) rows: the primitive vectors in terms of a, b, c of the report.
    vectors    (3, 3) the same in Å, in the Cartesian axes of the report.
    rotations  (f, 3, 3) integers: the factor group in this basis, in the order of the report.
    """

    basis: Floats
    vectors: Floats
    rotations: Integers

    @classmethod
    def of(cls, symmetry: CrystalSymmetry) -> PrimitiveLattice:
        """The lattice of a crystal whose symmetry is known."""
        short = primitive_cell(symmetry).basis
        basis = short_basis(short @ symmetry.lattice) @ short
        basis = basis * np.sign(np.linalg.det(basis))
        rotations = np.rint(np.linalg.inv(basis.T) @ symmetry.rotations @ basis.T).astype(np.int64)
        return cls(basis, basis @ symmetry.lattice, rotations)

    @cached_property
    def volume(self) -> float:
        """Å³."""
        return float(abs(np.linalg.det(self.vectors)))

    def between(self, shortest: float, longest: float) -> Integers:
        """(k, 3) all lattice vectors with lengths in this range (Å)."""
        reach = np.floor(longest * np.linalg.norm(np.linalg.inv(self.vectors), axis=0)).astype(int)
        grid = np.stack(np.meshgrid(*(np.arange(-n, n + 1) for n in reach), indexing="ij"), axis=-1).reshape(-1, 3)
        lengths = np.linalg.norm(grid @ self.vectors, axis=1)
        return np.asarray(grid[(lengths >= shortest) & (lengths <= longest)], dtype=np.int64)


def short_basis(vectors: Floats) -> Integers:
    """(3, 3) rows: integer combinations of the vectors that no further combination makes shorter (Minkowski)."""
    change = np.eye(3, dtype=np.int64)
    while True:
        change = change[np.argsort(np.linalg.norm(change @ vectors, axis=1), kind="stable")]
        trials = (_shortened(change, vectors, place) for place in (2, 1, 0))
        shorter = next((one for one in trials if one is not None), None)
        if shorter is None:
            return change
        change = shorter


def _shortened(change: Integers, vectors: Floats, place: int) -> Integers | None:
    """The basis with its vector at `place` made shorter by the other two, None if it cannot be."""
    trials = change[place] + _COMBINATIONS @ np.delete(change, place, axis=0)
    lengths = np.linalg.norm(trials @ vectors, axis=1)
    best = int(lengths.argmin())
    if lengths[best] >= _SHORTER * np.linalg.norm(change[place] @ vectors):
        return None
    result = change.copy()
    result[place] = trials[best]
    return result


@dataclass(frozen=True, eq=False)
class LatticeRelation:
    """One way to lay the child's lattice onto a sublattice of the parent's.

    supercell   (3, 3) integers, rows: the child's primitive vectors in terms of the parent's.
    axes        (3, 3) rows: the child's a, b, c in terms of the parent's a, b, c, the strain taken out.
    stretches   (3,) principal stretches, child over parent, ascending; 1 is no strain.
    operations  (g,) for each operation of the child's factor group, the one of the parent's with its rotation part.
    """

    supercell: Integers
    axes: Floats
    stretches: Floats
    operations: Integers

    @property
    def strain(self) -> float:
        """Largest relative change of a length."""
        return float(np.abs(self.stretches - 1).max())

    @property
    def mirrored(self) -> bool:
        """Whether the child had to be turned into its mirror image."""
        return bool(np.linalg.det(self.axes) < 0)


def strained_onto(
    parent: PrimitiveLattice, child: PrimitiveLattice, copies: int, strain: float, scale: float = 1.0
) -> tuple[Integers, Floats]:
    """Sublattices of the parent, `copies` times its volume, that the child's lattice is a strained image of.

    strain  the largest relative change of any length that is allowed. scale: the parent is first blown up by this.

    Returns (k, 3, 3) integer matrices and (k, 3) principal stretches, one of each class equivalent under the parent.
    """
    wanted = child.vectors / scale
    lengths = np.linalg.norm(wanted, axis=1)
    shells = [parent.between(length / (1 + strain), length / (1 - strain)) for length in lengths]
    triples = _triples(parent, _representatives(shells[0], parent.rotations), shells[1], shells[2], wanted, strain)
    determinants = np.rint(np.linalg.det(triples)).astype(np.int64) if len(triples) else np.zeros(0, dtype=np.int64)
    triples = triples[np.abs(determinants) == copies]
    stretches = _stretches(triples @ parent.vectors, wanted)
    kept = (np.abs(stretches - 1) <= strain).all(axis=1)
    triples, stretches = triples[kept], stretches[kept]
    first = _first_of_class(triples, parent.rotations)
    order = first[np.argsort(np.abs(stretches[first] - 1).max(axis=1), kind="stable")]
    return triples[order], stretches[order]


def _representatives(vectors: Integers, rotations: Integers) -> Integers:
    """One vector of each set that the rotations carry into each other."""
    images = np.einsum("fij,nj->nfi", rotations, vectors)
    names = [max(map(tuple, orbit)) for orbit in images.tolist()]
    return vectors[[index for index, name in enumerate(names) if name == tuple(vectors[index].tolist())]]


def _triples(
    parent: PrimitiveLattice, first: Integers, second: Integers, third: Integers, wanted: Floats, strain: float
) -> Integers:
    """(k, 3, 3) triples whose scalar products lie as near to the wanted ones as the strain allows."""
    one, two, three = (vectors @ parent.vectors for vectors in (first, second, third))
    found = []
    with_third = _near(two, three, wanted[1], wanted[2], strain)
    for index, vector in enumerate(one):
        pairs = np.flatnonzero(_near(vector[None], two, wanted[0], wanted[1], strain)[0])
        ends = _near(vector[None], three, wanted[0], wanted[2], strain)[0]
        rows, columns = np.nonzero(with_third[pairs] & ends)
        start = np.broadcast_to(first[index], (len(rows), 3))
        found.append(np.stack([start, second[pairs[rows]], third[columns]], axis=1))
    return np.concatenate(found) if found else np.zeros((0, 3, 3), dtype=np.int64)


def _near(left: Floats, right: Floats, wanted_left: Floats, wanted_right: Floats, strain: float) -> Floats:
    """Whether v·w agrees with the wanted product c·d: it differs by (2s + s²)|v||w| at most under a strain s."""
    room = (2 * strain + strain**2) * np.outer(np.linalg.norm(left, axis=1), np.linalg.norm(right, axis=1))
    return np.asarray(np.abs(left @ right.T - wanted_left @ wanted_right) <= room + 1e-9)


def _stretches(parent: Floats, child: Floats) -> Floats:
    """(k, 3) principal stretches that bring the bases `parent` (k, 3, 3) onto `child` (3, 3), both as rows."""
    gradient = np.linalg.inv(parent) @ child if len(parent) else np.zeros((0, 3, 3))
    return np.asarray(np.sort(np.linalg.svd(gradient, compute_uv=False), axis=1))


def _first_of_class(triples: Integers, rotations: Integers) -> Integers:
    """Index of the first of each set that the parent's rotations carry into each other."""
    seen: dict[tuple[int, ...], int] = {}
    for index, triple in enumerate(triples):
        images = (triple @ rotations.transpose(0, 2, 1)).reshape(-1, 9)
        seen.setdefault(max(map(tuple, images.tolist())), index)
    return np.array(list(seen.values()), dtype=np.int64)


def relation(
    parent: PrimitiveLattice, child: PrimitiveLattice, supercell: Integers, stretches: Floats
) -> LatticeRelation | None:
    """The relation in its plainest form, None if a rotation of the child is none of the parent's."""
    operations = _operations(parent.rotations, child.rotations, supercell)
    if operations is None:
        return None
    images = supercell @ parent.rotations.transpose(0, 2, 1)
    axes = np.linalg.inv(child.basis) @ images @ parent.basis
    wanted = np.linalg.det(axes) > 0
    chosen = np.flatnonzero(wanted if wanted.any() else ~wanted)
    best = min(chosen.tolist(), key=lambda index: _plainness(axes[index]))
    found = _operations(parent.rotations, child.rotations, images[best])
    assert found is not None
    return LatticeRelation(images[best], np.round(axes[best], 9) + 0.0, stretches, found)


def _plainness(axes: Floats) -> tuple[float, ...]:
    """Smaller for what is easier to read: few and small coefficients, on the diagonal, positive, a before b."""
    flat = axes.ravel()
    values = (np.abs(flat).sum(), -np.trace(axes), -flat.sum(), *-flat)
    return tuple(np.round(values, 6).tolist())


def _operations(parent: Integers, child: Integers, supercell: Integers) -> Integers | None:
    """For each rotation of the child its index among the parent's, None if one is not there."""
    turned = supercell.T @ child @ np.linalg.inv(supercell.T)
    whole = np.rint(turned).astype(np.int64)
    if np.abs(turned - whole).max() > 1e-6:
        return None
    known = {one.tobytes(): index for index, one in enumerate(parent)}
    found = [known.get(np.ascontiguousarray(one).tobytes(), -1) for one in whole]
    return None if min(found) < 0 else np.array(found, dtype=np.int64)


def cosets(matrix: Integers) -> Integers:
    """(m, 3) integers: one vector of each coset of Z³ after the sublattice spanned by the rows of a (3, 3) matrix."""
    size = abs(round(np.linalg.det(matrix)))
    adjugate = np.rint(np.linalg.inv(matrix) * size).astype(np.int64)
    steps = np.eye(3, dtype=np.int64)
    found = {(0, 0, 0): np.zeros(3, dtype=np.int64)}
    fresh = list(found.values())
    while fresh:
        grown: list[Integers] = []
        for vector in (one + step for one in fresh for step in steps):
            name = tuple((vector @ adjugate % size).tolist())
            if name not in found:
                found[name] = vector
                grown.append(vector)
        fresh = grown
    return np.array(list(found.values()))
