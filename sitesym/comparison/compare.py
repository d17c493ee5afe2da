"""From two structures to their comparison."""

from __future__ import annotations

import numpy as np

from sitesym.analysis import Analysis, analyse
from sitesym.comparison.folding import folded_species
from sitesym.comparison.relation import Embedding, Refusal, find_relation
from sitesym.comparison.result import (
    TECHNIQUES,
    ActiveModes,
    CentreRow,
    Comparison,
    FoldedRow,
    Relation,
    SiteChange,
    Technique,
    sees,
    summed,
)
from sitesym.errors import InconsistencyError, UsageError
from sitesym.groups.subduction import Multiplicities, reduce_characters
from sitesym.selection import activity_of
from sitesym.structure import OpenQuestion, Structure
from sitesym.symmetry.crystal import DEFAULT_TOLERANCE

DEFAULT_STRAIN = 0.06
"""Largest relative change of a length between parent and child; it allows about 5° of shear."""

DEFAULT_DISPLACEMENT = 1.2
"""Å. Displacive transitions move atoms by less (0.05 Å in SrTiO3, about 0.5 Å in tilted perovskites)."""


def compare(
    parent: Structure | Analysis,
    child: Structure | Analysis,
    strain: float = DEFAULT_STRAIN,
    tolerance: float = DEFAULT_TOLERANCE,
    displacement: float = DEFAULT_DISPLACEMENT,
) -> Comparison:
    """Compare two structures: a phase transition, an ordered superstructure, or a pair of polymorphs.

    strain        largest relative change of any length (0.06 is 6 %) that the lattices may differ by. Where the child
                  has elements that the parent lacks, the change of volume is taken out first.
    tolerance     Å, for finding the space groups; not used for an `Analysis`, which has its own.
    displacement  Å, how far an atom may lie from its place in the parent.

    Raises UsageError for limits that make no sense, InconsistencyError when two routes to a number disagree.
    """
    _check(strain, displacement)
    one, two = analysed(parent, tolerance), analysed(child, tolerance)
    found = find_relation(one.symmetry, two.symmetry, strain, displacement)
    if isinstance(found, Refusal):
        back = find_relation(two.symmetry, one.symmetry, strain, displacement)
        turned = isinstance(back, Embedding)
        return Comparison(one, two, "none", None, found, (), (), (), (), turned, _cautions(one, two, None))
    centre = tuple(_centre_rows(one, two, found))
    folded = None if found.is_average else tuple(_folded_rows(one, two, found))
    if folded is not None:
        _check_sum(two, centre, folded)
    active = () if folded is None else tuple(_active(one, two, centre, folded, name) for name in TECHNIQUES)
    relation: Relation = "same" if found.index == 1 else "group-subgroup"
    sites = _site_changes(one, two, found)
    return Comparison(one, two, relation, found, None, centre, folded, active, sites, False, _cautions(one, two, found))


def _check(strain: float, displacement: float) -> None:
    if not 0 < strain < 0.5:
        raise UsageError(f"A strain of {100 * strain:g} % is of no use.", "Give one above 0 and below 50 %.")
    if not 0 < displacement < 10:
        raise UsageError(f"A displacement of {displacement:g} Å is of no use.", "Give one above 0 and below 10 Å.")


def analysed(given: Structure | Analysis, tolerance: float = DEFAULT_TOLERANCE, setting: str | None = None) -> Analysis:
    """The analysis of one of the two structures; units are not looked for where they would be those of an average."""
    if isinstance(given, Analysis):
        return given
    return analyse(given, tolerance, setting=setting, molecules=given.is_ordered)


def _centre_rows(parent: Analysis, child: Analysis, embedding: Embedding) -> list[CentreRow]:
    """Every species of the parent restricted to the operations that the child keeps."""
    labels = child.factor_group.species
    return [
        CentreRow(
            row.label,
            row.dimension,
            row.optic,
            row.activity,
            reduce_characters(labels, species.characters[embedding.operations]),
        )
        for row, species in zip(parent.species, parent.factor_group.species, strict=True)
    ]


def _folded_rows(parent: Analysis, child: Analysis, embedding: Embedding) -> list[FoldedRow]:
    rows = []
    for star in embedding.stars[1:]:
        parts = folded_species(embedding, star)
        sites = tuple((site.label, summed([part], child)) for site, part in zip(parent.sites, parts, strict=True))
        rows.append(FoldedRow(star, summed(parts, child), sites))
    return rows


def _site_changes(parent: Analysis, child: Analysis, embedding: Embedding) -> tuple[SiteChange, ...]:
    place = {atom: index for index, orbit in enumerate(parent.symmetry.orbits) for atom in orbit.atoms}
    lengths = np.linalg.norm(embedding.match.displacements, axis=1)
    changes = []
    for site, orbit in zip(child.sites, child.symmetry.orbits, strict=True):
        home = parent.sites[place[int(embedding.match.atoms[orbit.atoms[0]])]]
        changes.append(SiteChange(home, site, float(lengths[list(orbit.atoms)].max())))
    return tuple(changes)


def _check_sum(child: Analysis, centre: tuple[CentreRow, ...], folded: tuple[FoldedRow, ...]) -> None:
    """What zone centre and folding give must be what the child's own atoms give: two routes to one number."""
    made = summed([*(row.all_modes for row in centre), *(row.child for row in folded)], child)
    own = {row.label: row.optic for row in child.species if row.optic}
    if made != own:
        raise InconsistencyError(
            f"Modes of the parent give {made} in the child, its own atoms {own}.",
            "Try another --tolerance: sites of one of the two do not fit its operations.",
        )


def _active(
    parent: Analysis, child: Analysis, centre: tuple[CentreRow, ...], folded: tuple[FoldedRow, ...], name: Technique
) -> ActiveModes:
    def seen(parts: list[Multiplicities]) -> Multiplicities:
        whole = summed(parts, child)
        return {k: n for k, n in whole.items() if sees(activity_of(child.factor_group, k), name)}

    kept = [row for row in centre if sees(row.activity, name)]
    unseen = [row for row in centre if not sees(row.activity, name)]
    return ActiveModes(
        name,
        sum(row.optic for row in kept),
        seen([row.all_modes for row in kept]),
        seen([row.all_modes for row in unseen]),
        seen([row.child for row in folded]),
        seen([row.all_modes for row in unseen if row.activity.silent]),
    )


def _cautions(parent: Analysis, child: Analysis, embedding: Embedding | None) -> tuple[OpenQuestion, ...]:
    found = [] if embedding is None else list(_of_embedding(embedding))
    for name, one in (("Parent", parent), ("Child", child)):
        found += [OpenQuestion(question.code, f"{name}: {question.message}") for question in one.cautions]
    return tuple(found)


def _of_embedding(embedding: Embedding) -> list[OpenQuestion]:
    found = []
    if embedding.substitutions:
        pairs = ", ".join(f"{new} for {old}" for new, old in embedding.substitutions.items())
        message = f"The two are different compounds: {pairs}. Wavenumbers shift with the masses and bonds besides."
        found.append(OpenQuestion("substitution", message))
    if embedding.lattice.mirrored:
        message = "The two files hold structures of opposite hand: the child was compared in its mirror image."
        found.append(OpenQuestion("mirrored", message))
    if embedding.is_average:
        message = (
            "Sites of the parent are only partly occupied and some are empty in the child: species are correlated, but "
            "the modes that fold cannot be counted from an average structure."
        )
        found.append(OpenQuestion("average_parent", message))
    return found
