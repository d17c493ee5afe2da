"""Point groups: recognition, axioms, characters against a general library, names against the tables."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
import spglib
from hypothesis import given, settings
from hypothesis import strategies as st
from shapes import all_groups, turn

from sitesym.errors import InconsistencyError
from sitesym.groups.operation import closure
from sitesym.groups.point_group import PointGroup
from sitesym.groups.subduction import induce, reduce_characters, subduce, total
from sitesym.selection import activities

GROUPS = all_groups()
CRYSTALLOGRAPHIC = {
    "C1": "1", "Ci": "-1", "C2": "2", "Cs": "m", "C2h": "2/m", "D2": "222", "C2v": "mm2", "D2h": "mmm", "C4": "4",
    "S4": "-4", "C4h": "4/m", "D4": "422", "C4v": "4mm", "D2d": "-42m", "D4h": "4/mmm", "C3": "3", "S6": "-3",
    "D3": "32", "C3v": "3m", "D3d": "-3m", "C6": "6", "C3h": "-6", "C6h": "6/m", "D6": "622", "C6v": "6mm",
    "D3h": "-6m2", "D6h": "6/mmm", "T": "23", "Th": "m-3", "O": "432", "Td": "-43m", "Oh": "m-3m",
}  # fmt: skip
"""Symbols of the 32 classes: International Tables A (2016), table 3.2.1.4; from memory."""


def oriented(matrices: np.ndarray, seed: int) -> np.ndarray:
    """The same group turned at random."""
    rng = np.random.default_rng(seed)
    rotation = turn(tuple(rng.normal(size=3)), rng.uniform(0, np.pi))
    return rotation @ matrices @ rotation.T


@pytest.mark.parametrize("name", GROUPS)
def test_group_is_recognised_in_any_orientation(name: str) -> None:
    """Families Cn, Cnv, Cnh, Dn, Dnh, Dnd, S2n up to n = 12, and the polyhedral groups."""
    for seed in range(3):
        assert PointGroup.of(oriented(GROUPS[name], seed)).schoenflies == name


@pytest.mark.parametrize("name", GROUPS)
def test_species_are_representations_and_orthogonal(name: str) -> None:
    """Homomorphism, Frobenius norm, orthogonality of rows, Σ d²/norm = order (great orthogonality theorem)."""
    group = PointGroup.of(oriented(GROUPS[name], 7))
    for one in group.species:
        products = one.matrices[:, None] @ one.matrices[None]
        assert np.abs(products - one.matrices[group.products]).max() < 1e-6
        assert (one.characters**2).mean() == pytest.approx(one.norm)
    for one, two in itertools.combinations(group.species, 2):
        assert (one.characters * two.characters).mean() == pytest.approx(0, abs=1e-9)
    assert sum(one.dimension**2 / one.norm for one in group.species) == len(group)
    assert sum(one.norm for one in group.species) == len(group.classes)


@pytest.mark.parametrize("name", GROUPS)
def test_group_axioms(name: str) -> None:
    """Every row and column of the multiplication table is a permutation; the identity is neutral."""
    table = PointGroup.of(GROUPS[name]).products
    everything = np.arange(len(table))
    assert (np.sort(table, axis=0) == everything[:, None]).all()
    assert (np.sort(table, axis=1) == everything).all()


def test_the_32_classes_have_their_international_symbols() -> None:
    for schoenflies, international in CRYSTALLOGRAPHIC.items():
        assert PointGroup.of(GROUPS[schoenflies]).hermann_mauguin == international


def real_characters(rotations: np.ndarray) -> list[np.ndarray]:
    """Characters of the real irreducible representations from the general library spgrep."""
    from spgrep import get_crystallographic_pointgroup_irreps_from_symmetry

    complex_ones = get_crystallographic_pointgroup_irreps_from_symmetry(rotations)
    characters = [np.trace(irrep, axis1=1, axis2=2) for irrep in complex_ones]
    return [c.real if np.abs(c.imag).max() < 1e-8 else 2 * c.real for c in characters]


@pytest.mark.parametrize("first", range(1, 531, 53))
def test_characters_agree_with_a_general_library_in_every_setting(first: int) -> None:
    """All 530 settings of the space groups: the same set of characters, operation by operation, as spgrep finds."""
    seen: set[bytes] = set()
    for hall in range(first, min(first + 53, 531)):
        rotations = spglib.get_symmetry_from_database(hall)["rotations"]
        rotations = np.unique(rotations, axis=0)
        if rotations.tobytes() in seen:
            continue
        seen.add(rotations.tobytes())
        metric = np.einsum("gji,gjk->ik", rotations, rotations) / len(rotations)
        basis = np.linalg.cholesky(metric).T
        group = PointGroup.of(basis @ rotations @ np.linalg.inv(basis))
        expected = {tuple(np.round(c, 6) + 0.0) for c in real_characters(rotations)}
        assert {tuple(np.round(one.characters, 6) + 0.0) for one in group.species} == expected, hall


def test_characters_of_printed_tables() -> None:
    """Wilson, Decius and Cross, Molecular Vibrations (1955), appendix X: D3d, Td, D6h, Ih and D4d; from memory."""
    golden = (1 + np.sqrt(5)) / 2
    expected = {
        ("D4d", "E1"): {8: np.sqrt(2)}, ("D4d", "E3"): {8: -np.sqrt(2)}, ("D4d", "B2"): {8: -1.0},
        ("Ih", "T1u"): {5: golden}, ("Ih", "T2u"): {5: 1 - golden}, ("Ih", "Gg"): {3: 1.0}, ("Ih", "Hg"): {3: -1.0},
    }  # fmt: skip
    for (name, label), values in expected.items():
        group = PointGroup.of(GROUPS[name])
        one = next(species for species in group.species if species.label == label)
        for order, value in values.items():
            axis = (0, 0, 1) if name == "D4d" else {5: (0, 1, golden), 3: (1, 1, 1)}[order]
            operation = turn(axis, 2 * np.pi / order)
            if name == "D4d":
                operation = operation @ np.diag([1.0, 1.0, -1.0])
            found = next(s for s in group.species_on(operation[None]) if s.label == label)
            assert found.characters[0] == pytest.approx(value), (name, label)
            assert one.dimension in (1, 2, 3, 4, 5)


def test_polar_and_raman_species_of_molecular_groups() -> None:
    """Species as every table prints them (Wilson, Decius and Cross 1955, appendix X; from memory)."""
    expected = {
        "D5h": ({"A2''", "E1'"}, {"A1'", "E1''", "E2'"}),
        "D4d": ({"B2", "E1"}, {"A1", "E2", "E3"}),
        "D5d": ({"A2u", "E1u"}, {"A1g", "E1g", "E2g"}),
        "Ih": ({"T1u"}, {"Ag", "Hg"}),
        "S8": ({"B", "E1"}, {"A", "E2", "E3"}),
        "D6d": ({"B2", "E1"}, {"A1", "E2", "E5"}),
        "Td": ({"T2"}, {"A1", "E", "T2"}),
        "C5v": ({"A1", "E1"}, {"A1", "E1", "E2"}),
        "D3h": ({"A2''", "E'"}, {"A1'", "E'", "E''"}),
    }
    for name, (infrared, raman) in expected.items():
        rules = activities(PointGroup.of(GROUPS[name]))
        assert {rule.label for rule in rules if rule.infrared} == infrared, name
        assert {rule.label for rule in rules if rule.raman} == raman, name


def test_linear_groups() -> None:
    """C∞v: Σ+ and Π in infrared, Σ+, Π, Δ in Raman; D∞h: Σu+, Πu and Σg+, Πg, Δg. Common practice."""
    polar, centred = (PointGroup.linear(np.array([1.0, 2.0, 3.0]), flag) for flag in (False, True))
    assert {rule.label for rule in activities(polar) if rule.infrared} == {"Sigma+", "Pi"}
    assert {rule.label for rule in activities(polar) if rule.raman} == {"Sigma+", "Pi", "Delta"}
    assert {rule.label for rule in activities(centred) if rule.infrared} == {"Sigma_u+", "Pi_u"}
    assert {rule.label for rule in activities(centred) if rule.raman} == {"Sigma_g+", "Pi_g", "Delta_g"}


@settings(max_examples=60, deadline=None)
@given(st.sampled_from(sorted(GROUPS)), st.lists(st.integers(0, 119), min_size=1, max_size=2), st.integers(0, 5))
def test_restriction_and_induction(name: str, chosen: list[int], seed: int) -> None:
    """Dimensions are conserved, and Frobenius reciprocity holds, for any subgroup that random operations generate."""
    group = PointGroup.of(oriented(GROUPS[name], seed))
    generators = group.matrices[[index % len(group) for index in chosen]]
    subgroup = PointGroup.of(closure(generators))
    down, up = subduce(group, subgroup), induce(group, subgroup)
    sizes = {one.label: one.dimension for one in subgroup.species}
    for one in group.species:
        assert sum(sizes[label] * count for label, count in down[one.label].items()) == one.dimension
    whole = {one.label: one.dimension for one in group.species}
    index = len(group) // len(subgroup)
    for one in subgroup.species:
        assert sum(whole[label] * count for label, count in up[one.label].items()) == index * one.dimension


def test_restriction_is_transitive() -> None:
    """Oh to D2 straight equals Oh to D4h to D2."""
    big, middle, small = (PointGroup.of(GROUPS[name]) for name in ("Oh", "D4h", "D2"))
    straight, first, second = subduce(big, small), subduce(big, middle), subduce(middle, small)
    for label, parts in first.items():
        assert total(parts, second) == straight[label]


def test_operations_that_form_no_group_are_refused() -> None:
    with pytest.raises(InconsistencyError, match="do not form a group"):
        PointGroup.of(np.array([np.eye(3), turn((0, 0, 1), 0.7)]))


def test_a_fractional_multiplicity_is_refused() -> None:
    group = PointGroup.of(GROUPS["C3v"])
    with pytest.raises(InconsistencyError, match="no count"):
        reduce_characters(group.species, np.arange(6.0))


def test_axes_on_a_rounding_boundary_are_one_axis() -> None:
    """Operations orthogonal to 1e-6 only, about an axis whose components end in a five at the fourth decimal."""
    axis = np.array([0.3205, 0.5125, 0.7965])
    for n in (3, 5, 6, 8):
        matrices = np.array([turn(tuple(axis), 2 * np.pi * k / n) for k in range(n)])
        noise = np.random.default_rng(n).normal(0, 1e-8, matrices.shape)
        assert PointGroup.of(matrices + noise).schoenflies == f"C{n}"
