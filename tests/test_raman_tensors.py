"""Raman tensors of the 32 classes against Loudon's table (Adv. Phys. 13, 423, 1964; erratum 14, 621, 1965)."""

from __future__ import annotations

import re
from typing import Any

import numpy as np
import pytest
from literature import reference

from sitesym.groups.operation import closure
from sitesym.groups.point_group import PointGroup
from sitesym.tensors import TensorSpecies, element_expressions, tensor_species

CLASSES = reference("raman_tensors.toml")["class"]
AXES = {"x": (1, 0, 0), "y": (0, 1, 0), "z": (0, 0, 1)}


def turn(order: int, axis: tuple[float, float, float]) -> np.ndarray:
    x, y, z = np.array(axis) / np.linalg.norm(axis)
    cross = np.array([[0, -z, y], [z, 0, -x], [-y, x, 0]])
    angle = 2 * np.pi / order
    return np.eye(3) + np.sin(angle) * cross + (1 - np.cos(angle)) * cross @ cross


def generator(word: str) -> np.ndarray:
    """`3z`, `-4z`, `mx`, `2y`, `3xyz`, `i` as matrices."""
    if word == "i":
        return -np.eye(3)
    sign, order, axis = re.fullmatch(r"(-?)(\d|m)(xyz|[xyz]+)", word).groups()
    direction = AXES.get(axis, (1, 1, 1))
    if order == "m":
        return -turn(2, direction)
    return turn(int(order), direction) * (-1 if sign else 1)


def group_of(entry: dict[str, Any]) -> PointGroup:
    matrices = [generator(word) for word in entry["generators"]]
    return PointGroup.of(closure(np.array(matrices).reshape(-1, 3, 3)))


def published_solutions(species: dict[str, Any]) -> np.ndarray:
    """(letters, components, 3, 3) from the printed letters, by setting one letter to 1 and the others to 0."""
    cells = [np.array(one["tensor"], dtype=object) for one in species["components"]]
    letters = sorted({letter for cell in cells for word in cell.ravel() for letter in re.findall(r"\b[a-z]\b", word)})
    return np.array([[[[value(word, letter) for word in row] for row in cell] for cell in cells] for letter in letters])


def value(word: str, letter: str) -> float:
    if not word:
        return 0.0
    names = set(re.findall(r"\b[a-z]\b", word))
    values = {name: float(name == letter) for name in names} | {"sqrt3": np.sqrt(3.0)}
    return float(eval(word, {"__builtins__": {}}, values))


def same_span(first: np.ndarray, second: np.ndarray) -> bool:
    one, two = first.reshape(len(first), -1), second.reshape(len(second), -1)
    ranks = [np.linalg.matrix_rank(rows, tol=1e-6) for rows in (one, two, np.vstack([one, two]))]
    return ranks[0] == ranks[1] == ranks[2]


def our_solutions(species: TensorSpecies) -> np.ndarray:
    return np.array([component.basis for component in species.components]).transpose(1, 0, 2, 3)


@pytest.mark.parametrize("entry", CLASSES, ids=lambda entry: entry["schoenflies"])
def test_raman_tensors_have_the_published_shapes(entry: dict[str, Any]) -> None:
    """The same species, the same space of tensors, the same number of letters, zeros in the same places."""
    group = group_of(entry)
    assert (group.schoenflies, len(group)) == (entry["schoenflies"], entry["order"])
    ours = {one.label: one for one in tensor_species(group) if one.letters}
    assert set(ours) == {one["label"] for one in entry["species"]}
    for species in entry["species"]:
        published, found = published_solutions(species), our_solutions(ours[species["label"]])
        assert len(ours[species["label"]].letters) == species["maps"]
        assert same_span(published.reshape(-1, 9), found.reshape(-1, 9)), species["label"]
        if species["maps"] == species["independent"]:
            assert zeros(published) == zeros(found), species["label"]


def zeros(solutions: np.ndarray) -> list[list[bool]]:
    """Which elements vanish, component by component in any order."""
    return sorted(np.any(np.abs(solutions) > 1e-9, axis=0).reshape(solutions.shape[1], -1).tolist())


@pytest.mark.parametrize("entry", CLASSES, ids=lambda entry: entry["schoenflies"])
def test_polar_directions_go_with_their_tensors(entry: dict[str, Any]) -> None:
    """Loudon's brackets: the object Σ polar ⊗ tensor over the components is the same space, signs included."""
    ours = {one.label: one for one in tensor_species(group_of(entry)) if one.letters}
    for species in entry["species"]:
        found, directions = ours[species["label"]], [one["polar"] for one in species["components"]]
        if not directions[0]:
            assert all(component.polar is None for component in found.components)
        elif "," in directions[0]:
            assert len(found.polar_space) == len(directions[0].split(","))
        else:
            polar = np.array([direction(word) for word in directions])
            expected = np.einsum("ki,lkab->liab", polar, published_solutions(species))
            own = np.array([component.polar for component in found.components])
            assert same_span(expected, np.einsum("ki,lkab->liab", own, our_solutions(found))), species["label"]


def direction(word: str) -> np.ndarray:
    return np.array(AXES[word.lstrip("-")]) * (-1.0 if word.startswith("-") else 1.0)


def test_totally_symmetric_letters_count_nye_constants() -> None:
    """Nye, Physical Properties of Crystals (1957): constants of a symmetric second-rank tensor."""
    for entry in CLASSES:
        first = tensor_species(group_of(entry))[0]
        assert len(first.letters) == entry["symmetric_tensor"], entry["schoenflies"]


def test_d3_prints_as_in_the_table() -> None:
    """E of 32 in Loudon's table: E(x) with c, -c on the diagonal and d in yz; E(y) with -c in xy and -d in xz."""
    entry = next(one for one in CLASSES if one["schoenflies"] == "D3")
    species = next(one for one in tensor_species(group_of(entry)) if one.label == "E")
    first, second = (element_expressions(component, species.letters) for component in species.components)
    assert first == (("c", "", ""), ("", "-c", "d"), ("", "d", ""))
    assert second == (("", "-c", "-d"), ("-c", "", ""), ("-d", "", ""))
