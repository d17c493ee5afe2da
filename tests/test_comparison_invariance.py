"""A comparison does not depend on how the structures are written down: cell, origin, order of atoms, orientation."""

from __future__ import annotations

from itertools import product

import numpy as np
import pytest
from literature import of_entry, reference
from phases import of_phase

from sitesym.comparison import Comparison, compare
from sitesym.structure import Structure

PAIRS = {entry["name"]: entry for entry in reference("phase_pairs.toml")["pair"]}
COMPOUNDS = {entry["name"]: entry for entry in reference("decompositions.toml")["compound"]}
SHEARS = ([[1, 1, 0], [0, 1, 0], [0, -1, 1]], [[1, 0, 0], [2, 1, 0], [0, 0, 1]], [[0, 0, 1], [1, 0, 0], [1, 1, 0]])
DOUBLED = ([[2, 0, 0], [0, 1, 0], [0, 0, 1]], [[1, 1, 0], [-1, 1, 0], [0, 0, 1]], [[1, 0, 0], [0, 1, 0], [1, 0, 3]])
NAMES = (
    "rutile", "calcite", "alpha-quartz", "zincblende", "baddeleyite", "kyanite", "calcium titanate", "spinel",
    "potassium niobate, orthorhombic", "sodium chlorate", "cinnabar", "copper tungstate",
)  # fmt: skip


def described(structure: Structure, cell: list[list[int]], seed: int, noise: float = 0.0) -> Structure:
    """The same crystal by another cell of whole vectors, origin, order and orientation; each atom moved at random."""
    random = np.random.default_rng(seed)
    change = np.array(cell)
    size = round(abs(np.linalg.det(change)))
    steps = np.array(list(product(range(-3, 4), repeat=3)))
    inside = np.round(steps @ np.linalg.inv(change), 9)
    first = np.unique(np.round(inside - np.floor(inside + 1e-7), 6), axis=0, return_index=True)[1]
    assert len(first) == size
    fractional = (structure.fractional[None] + steps[first][:, None]).reshape(-1, 3) @ np.linalg.inv(change)
    turned, _ = np.linalg.qr(random.normal(size=(3, 3)))
    lattice = change @ structure.lattice @ (turned * np.linalg.det(turned))
    moved = random.normal(size=fractional.shape) * noise @ np.linalg.inv(lattice)
    order = random.permutation(len(fractional))
    places = (fractional + random.random(3) + moved)[order]
    return Structure(lattice, places, tuple((structure.sites * size)[index] for index in order))


def numbers(result: Comparison) -> tuple[object, ...]:
    """What does not depend on axes and labels."""
    found = result.embedding
    assert found is not None
    stars = [(star.name, len(star.arms), star.size) for star in found.stars]
    active = [
        (one.parent, one.child, one.split, sum(one.kept.values()), sum(one.zone_centre.values()))
        for one in result.active
    ]
    shares = [round(value, 3) for value in found.amplitudes]
    return result.relation, found.index, found.klassengleiche, stars, shares, active, round(found.lattice.strain, 5)


@pytest.mark.parametrize("name", NAMES)
def test_one_structure_in_two_descriptions_is_the_same(name: str) -> None:
    """Sheared cell, other origin, order and orientation, and supercells: always the same, no atom moved."""
    structure = of_entry(COMPOUNDS[name])
    for seed, cell in enumerate((*SHEARS[:2], *DOUBLED[1:])):
        result = compare(structure, described(structure, cell, seed))
        assert result.relation == "same"
        assert result.embedding is not None
        assert result.embedding.match.largest < 1e-3
        assert result.embedding.lattice.strain < 1e-5
        assert not result.embedding.lattice.mirrored


@pytest.mark.parametrize("name", ["rutile", "calcite", "zincblende", "calcium titanate"])
@pytest.mark.parametrize("cell", DOUBLED)
def test_random_displacements_leave_nothing_but_the_lattice(name: str, cell: list[list[int]]) -> None:
    """A supercell whose atoms moved at random has P1: all operations are lost, centring among them."""
    structure = of_entry(COMPOUNDS[name])
    result = compare(structure, described(structure, cell, 7, noise=0.05))
    found = result.embedding
    assert found is not None
    assert result.child.symmetry.number == 1
    points = len(structure) // len(result.parent.symmetry.atoms)
    cells = round(abs(np.linalg.det(cell))) * points
    assert found.index == len(result.parent.factor_group) * cells
    assert sum(len(star.arms) for star in found.stars) == cells
    assert (
        sum(one.child for one in result.active if one.technique == "raman") == 3 * len(result.child.symmetry.atoms) - 3
    )


@pytest.mark.parametrize(
    "name",
    [
        "strontium titanate, cubic and tetragonal",
        "lanthanum aluminate, cubic and rhombohedral",
        "barium titanate, cubic and orthorhombic",
        "quartz, beta and alpha",
        "magnesian calcite and dolomite",
        "potassium dihydrogen phosphate, paraelectric and ferroelectric",
    ],
)
def test_numbers_do_not_depend_on_the_description(name: str) -> None:
    """Parent and child each in other cells."""
    parent, child = (of_phase(PAIRS[name][key]) for key in ("parent", "child"))
    expected = numbers(compare(parent, child))
    assert numbers(compare(parent, described(child, SHEARS[0], 1))) == expected
    assert numbers(compare(described(parent, SHEARS[1], 2), child)) == expected
    assert numbers(compare(described(parent, DOUBLED[1], 3), described(child, SHEARS[2], 4))) == expected


@pytest.mark.parametrize("name", ["strontium titanate, cubic and tetragonal", "quartz, beta and alpha"])
def test_the_way_through_an_intermediate_group(name: str) -> None:
    """Index and strain-free relation multiply: parent to child, and child to a general distortion of it."""
    parent, child = (of_phase(PAIRS[name][key]) for key in ("parent", "child"))
    last = described(child, DOUBLED[0], 5, noise=0.03)
    steps = [compare(one, two).embedding for one, two in ((parent, child), (child, last), (parent, last))]
    assert all(one is not None for one in steps)
    first, second, whole = (one.index for one in steps if one is not None)
    assert first * second == whole
