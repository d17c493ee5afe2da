"""Zone-centre vibrations of a crystal by two routes that must agree.

Direct route: characters of the displacements of all atoms of the primitive cell (Bhagavantam and Venkatarayudu, Proc.
Indian Acad. Sci. A 9, 224, 1939). Site route: displacements of one atom on each site, induced from its site group to
the factor group (Halford, J. Chem. Phys. 14, 8, 1946), by Frobenius reciprocity.
"""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from sitesym.errors import InconsistencyError
from sitesym.groups.operation import Floats
from sitesym.groups.subduction import Multiplicities, added, counts, in_order, reduce_characters
from sitesym.symmetry.crystal import CrystalSymmetry, Orbit


def direct_route(symmetry: CrystalSymmetry) -> Multiplicities:
    """Species of all 3N displacements, from the atoms that each operation leaves in place."""
    group = symmetry.factor_group
    characters = symmetry.fixed.sum(axis=1) * _traces(group.matrices)
    return reduce_characters(group.species, characters)


def site_contribution(symmetry: CrystalSymmetry, orbit: Orbit) -> Multiplicities:
    """Species of the displacements of one orbit, induced from its site group."""
    kept = orbit.stabiliser
    vectors = _traces(symmetry.factor_group.matrices[kept])
    species = symmetry.factor_group.species
    table = np.array([one.characters[kept] / one.norm for one in species])
    found = counts(table @ vectors / len(kept))
    return {one.label: int(count) for one, count in zip(species, found, strict=True) if count}


def checked_sum(symmetry: CrystalSymmetry, contributions: Iterable[Multiplicities]) -> Multiplicities:
    """The sum over all sites, checked against the direct route and against 3N.

    Raises InconsistencyError when they differ.
    """
    by_site = in_order(symmetry.factor_group, added(*contributions))
    direct = in_order(symmetry.factor_group, direct_route(symmetry))
    if by_site != direct:
        raise InconsistencyError(
            f"Site route and direct route disagree: {by_site} against {direct}.",
            "Atoms lie too close to symmetry elements for this tolerance; try another --tolerance.",
        )
    size = {one.label: one.dimension for one in symmetry.factor_group.species}
    branches = sum(size[label] * count for label, count in by_site.items())
    if branches != 3 * len(symmetry.atoms):
        raise InconsistencyError(
            f"The species add up to {branches} branches, not {3 * len(symmetry.atoms)}.", "Try another --tolerance."
        )
    return by_site


def _traces(matrices: Floats) -> Floats:
    return np.asarray(np.trace(matrices, axis1=1, axis2=2))
