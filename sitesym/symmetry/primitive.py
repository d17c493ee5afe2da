"""The primitive cell in the axes of the report, and how operations move its atoms."""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import combinations, product

import numpy as np

from sitesym.groups.operation import Floats, Integers
from sitesym.structure import Structure
from sitesym.symmetry.crystal import CrystalSymmetry


@dataclass(frozen=True, eq=False)
class PrimitiveCell:
    """The primitive cell of a crystal.

    structure  its atoms in the order of `CrystalSymmetry.positions`; lattice rows in the Cartesian axes of the report.
    basis      (3, 3) rows: the primitive vectors in terms of a, b, c.
    """

    structure: Structure
    basis: Floats


def primitive_cell(symmetry: CrystalSymmetry) -> PrimitiveCell:
    """A primitive cell with short edges; its coordinates are those of the conventional cell, not wrapped."""
    basis = _short_basis(symmetry.cell.centring_vectors, symmetry.lattice)
    sites = tuple(symmetry.structure.sites[index] for index in symmetry.atoms)
    fractional = symmetry.positions @ np.linalg.inv(basis)
    cell = replace(symmetry.structure, lattice=basis @ symmetry.lattice, fractional=fractional, sites=sites)
    return PrimitiveCell(cell, basis)


def _short_basis(centring: Floats, lattice: Floats) -> Floats:
    """The first three of the shortest lattice vectors that span a cell of the primitive volume."""
    if len(centring) == 1:
        return np.eye(3)
    steps = np.array(list(product((-1, 0, 1), repeat=3)), dtype=float)
    vectors = (steps[:, None] + centring[None]).reshape(-1, 3)
    lengths = np.linalg.norm(vectors @ lattice, axis=1)
    shortest = vectors[np.argsort(np.round(lengths, 6), kind="stable")][1:40]
    for chosen in combinations(shortest, 3):
        if abs(abs(np.linalg.det(chosen)) * len(centring) - 1) < 1e-3:
            return np.array(chosen)
    raise AssertionError("A centred lattice has three short vectors that span its primitive cell.")


def moved(
    symmetry: CrystalSymmetry, cell: PrimitiveCell, operation: int, atoms: Integers, shifts: Integers
) -> tuple[Integers, Integers]:
    """Where an operation of the factor group takes atoms of the crystal.

    atoms (k,) of the primitive cell with lattice translations `shifts` (k, 3) in its basis; the images likewise.
    """
    target, translation = symmetry.images
    turned = (shifts @ cell.basis) @ symmetry.rotations[operation].T + translation[operation, atoms]
    return target[operation, atoms], np.rint(turned @ np.linalg.inv(cell.basis)).astype(np.int64)
