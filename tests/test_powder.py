"""Powders: rotational invariants against averages over rotations, depolarization limits, worked examples.

tests/reference/depolarization.toml holds formulas, rules and worked examples with their sources (Placzek 1934; Long
2002; McClain 1971; Spiro and Strekas 1972).
"""

from __future__ import annotations

import re
from fractions import Fraction
from functools import lru_cache
from math import inf, isinf
from typing import Any

import gemmi
import numpy as np
import pytest
from formula_reader import evaluated
from literature import of_entry, reference
from scipy.spatial.transform import Rotation

from sitesym.analysis import Analysis, analyse
from sitesym.experiment.powder import (
    antisymmetric_only,
    powder_rows,
    powder_words,
    rotational_invariants,
)

BOOK = reference("depolarization.toml")
STRUCTURES = {entry["name"]: entry for entry in reference("decompositions.toml")["compound"]}
# Products of four elements of a rotation have no part of rank above 4; the first invariant of the icosahedral group
# that is not constant has rank 6, so the mean over its 60 rotations is the mean over all.
ROTATIONS = Rotation.create_group("I").as_matrix()


@lru_cache(maxsize=128)
def crystal(name: str) -> Analysis:
    return analyse(of_entry(STRUCTURES[name]), scan=False, molecules=False)


def averages(tensors: np.ndarray, rotations: np.ndarray = ROTATIONS) -> tuple[float, float]:
    """Mean parallel and crossed intensity of (m, 3, 3) tensors, by turning them."""
    turned = np.einsum("rab,mbc,rdc->rmad", rotations, tensors, rotations)
    return (
        float(np.mean(np.sum(np.abs(turned[:, :, 2, 2]) ** 2, axis=1))),
        float(np.mean(np.sum(np.abs(turned[:, :, 0, 2]) ** 2, axis=1))),
    )


def random_tensor(seed: int) -> np.ndarray:
    rng = np.random.default_rng(seed)
    return rng.normal(size=(3, 3)) + 1j * rng.normal(size=(3, 3))


@pytest.mark.parametrize("seed", range(40))
def test_invariants_are_the_average_over_a_uniform_set_of_rotations(seed: int) -> None:
    """Random complex tensors with an antisymmetric part, exactly."""
    tensor = random_tensor(seed)
    found = rotational_invariants(tensor)
    assert np.allclose([found.parallel, found.crossed], averages(tensor[None]), rtol=1e-12)


def test_invariants_are_the_average_over_random_rotations() -> None:
    """The same without the argument on ranks: 200,000 random rotations, to their statistical accuracy."""
    tensor = random_tensor(99)
    found = rotational_invariants(tensor)
    rotations = Rotation.random(200_000, random_state=7).as_matrix()
    assert np.allclose([found.parallel, found.crossed], averages(tensor[None], rotations), rtol=0.01)


@pytest.mark.parametrize("seed", range(10))
def test_invariants_do_not_change_with_the_axes(seed: int) -> None:
    tensor, turn = random_tensor(seed), Rotation.random(random_state=seed).as_matrix()
    first, second = rotational_invariants(tensor), rotational_invariants(turn @ tensor @ turn.T)
    assert first.isotropic == pytest.approx(second.isotropic)
    assert first.anisotropic == pytest.approx(second.anisotropic)
    assert first.antisymmetric == pytest.approx(second.antisymmetric)


def number(word: str) -> float:
    return inf if word == "inf" else float(Fraction(word))


@pytest.mark.parametrize("example", BOOK["example"], ids=lambda example: example["name"])
def test_worked_examples(example: dict[str, Any]) -> None:
    """Invariants by hand, ratios by turning the tensor itself (see the file)."""
    cells = [[complex(*cell) if isinstance(cell, list) else cell for cell in row] for row in example["tensor"]]
    found = rotational_invariants(np.array(cells, dtype=complex))
    assert found.isotropic == pytest.approx(number(example["a2"]))
    assert found.anisotropic == pytest.approx(number(example["gamma2"]))
    assert found.antisymmetric == pytest.approx(number(example["delta2"]))
    assert found.parallel == pytest.approx(number(example["parallel"]))
    assert found.crossed == pytest.approx(number(example["crossed"]))
    assert found.depolarization == pytest.approx(number(example["rho_linear"]))
    assert found.natural_depolarization == pytest.approx(number(example["rho_natural"]))
    circular = number(example["circular_opposite"]) / number(example["circular_same"])
    assert found.circular_ratio == pytest.approx(circular)


@pytest.mark.parametrize("case", BOOK["uniaxial"]["values"], ids=lambda case: f"a={case['a']:g}, b={case['b']:g}")
def test_uniaxial_values(case: dict[str, Any]) -> None:
    """Totally symmetric species of a uniaxial class: 0 for a sphere, 1/8 for a disc, 1/3 for a rod, 3/4 at no trace."""
    row = next(one for one in powder_rows(crystal("calcite")) if one.label == "A1g")
    parallel, crossed = row.intensities(np.array([case["a"], case["b"]]))
    assert crossed / parallel == pytest.approx(number(case["rho"]), abs=1e-12)


def rule(words: str) -> dict[str, Any]:
    return next(one for one in BOOK["rule"] if one["case"].startswith(words))


def limits_by_rule(name: str, label: str) -> list[float]:
    """What the rules say of a species without resonance, from the crystal system alone."""
    system = gemmi.SpaceGroup(STRUCTURES[name]["hermann_mauguin"]).crystal_system_str()
    totally = label in ("A", "Ag", "A'", "A1", "A1g", "A1'")
    cubic = "totally symmetric species of a cubic" if totally else "every other Raman-active species of a cubic"
    other = "totally symmetric species of every" if totally else "every other Raman-active species of every"
    return rule(cubic if system == "cubic" else other)["linear"]


@pytest.mark.parametrize("name", sorted(STRUCTURES))
def test_limits_are_those_of_the_rules(name: str) -> None:
    """0 where the tensor is a sphere, 3/4 where it has no trace, all between for other totally symmetric species."""
    for row in powder_rows(crystal(name)):
        assert list(row.depolarization) == limits_by_rule(name, row.label), row.label


def has_axial_part(name: str, label: str) -> bool:
    """Whether the rules list the species among those with a symmetric and an antisymmetric tensor: `Eg of -3, -3m`."""
    symbol = gemmi.SpaceGroup(STRUCTURES[name]["hermann_mauguin"]).point_group_hm()
    symbol = {"-4m2": "-42m", "-62m": "-6m2", "312": "32", "321": "32", "31m": "3m", "3m1": "3m"}.get(symbol, symbol)
    for one in BOOK["rule"]:
        if one["tensor"] == "symmetric and antisymmetric":
            for words in one["labels"]:
                species, classes = words.split(" of ")
                if label in re.split(r",\s*", species) and symbol in re.split(r",\s*", classes):
                    return True
    return False


@pytest.mark.parametrize("name", sorted(STRUCTURES))
def test_resonance_lifts_the_limit_where_the_species_holds_an_axial_vector(name: str) -> None:
    """Spiro and Strekas (1972), Placzek (1934): the class's species as listed in the rules."""
    for row in powder_rows(crystal(name)):
        assert (row.resonance is not None) == has_axial_part(name, row.label), row.label
        if row.resonance:
            assert row.resonance[0] == row.depolarization[0]
            assert isinf(row.resonance[1])


def test_rules_on_resonance_were_applied_to_many_species() -> None:
    found = [has_axial_part(name, row.label) for name in STRUCTURES for row in powder_rows(crystal(name))]
    assert 50 < sum(found) < len(found) - 50


def test_limits_are_reached_and_not_passed() -> None:
    """For random letters the ratio lies within the limits of the species, and is spread where they differ."""
    rng = np.random.default_rng(11)
    for name in ("calcite", "gypsum", "scheelite", "kyanite", "spinel", "alpha-quartz"):
        for row in powder_rows(crystal(name)):
            tensor = crystal(name).species_row(row.label).tensor
            found = []
            for _ in range(300):
                values = rng.normal(size=len(row.letters)) + 1j * rng.normal(size=len(row.letters))
                tensors = np.array([component.tensor(values) for component in tensor.components])
                parallel, crossed = averages(tensors)
                found.append(crossed / parallel)
            low, high = row.depolarization
            assert low - 1e-9 <= min(found)
            assert max(found) <= high + 1e-9
            if high - low > 0.1:
                assert max(found) - min(found) > 0.2


@pytest.mark.parametrize("name", ["calcite", "gypsum", "scheelite", "kyanite", "spinel", "alpha-quartz", "pyrite"])
def test_printed_mean_intensities_are_the_average_over_rotations(name: str) -> None:
    """The formulas in letters, at random values, against turning the tensors of all components."""
    rng = np.random.default_rng(5)
    for row in powder_rows(crystal(name)):
        values = rng.uniform(-2, 2, len(row.letters))
        letters = dict(zip(row.letters, values.tolist(), strict=True))
        tensor = crystal(name).species_row(row.label).tensor
        expected = averages(np.array([component.tensor(values) for component in tensor.components]))
        assert np.allclose([evaluated(row.parallel, letters), evaluated(row.crossed, letters)], expected)
        assert np.allclose(row.intensities(values), expected)


def test_cubic_formulas_as_printed() -> None:
    """By hand from 45 a² + 4 γ² and 3 γ², γ² being 3 c² for each of three components of T2g, 9 b² for the two of Eg."""
    rows = {row.label: (row.parallel, row.crossed) for row in powder_rows(crystal("spinel"))}
    assert rows == {"A1g": ("a²", "0"), "Eg": ("8 b²/5", "6 b²/5"), "T2g": ("4 c²/5", "3 c²/5")}


def test_species_of_resonance_alone() -> None:
    """Placzek: A2g of -3m and T1g of m-3m hold an axial vector and no symmetric tensor (inverse polarization)."""
    assert antisymmetric_only(crystal("calcite")) == ("A2g",)
    assert antisymmetric_only(crystal("spinel")) == ("T1g",)
    assert antisymmetric_only(crystal("gypsum")) == ()


def test_words_say_what_a_powder_can_tell() -> None:
    words = powder_words(crystal("calcite"))
    assert words[0] == (
        "Bands weaker in the crossed spectrum than 3/4 of the parallel one belong to A1g; Eg always has the ratio 3/4 "
        "and cannot be told apart by it."
    )
    assert any("inverse polarization" in one for one in words)
    assert any("towards 1" in one for one in words)
    assert powder_words(crystal("spinel"))[0].startswith("Bands that vanish in the crossed spectrum belong to A1g; Eg")
    assert powder_words(crystal("rock salt")) == ()
    assert any("from the TO to the LO" in one for one in powder_words(crystal("alpha-quartz")))
    row = next(one for one in powder_rows(crystal("calcite")) if one.label == "Eg")
    assert "without limit" in row.words
