"""Direct products, symmetrised powers and subgroups of the 32 classes against a general library and printed facts."""

from __future__ import annotations

from itertools import combinations_with_replacement, permutations

import numpy as np
import pytest
from literature import reference
from shapes import all_groups

from sitesym.errors import UsageError
from sitesym.groups.point_group import PointGroup
from sitesym.groups.products import difference, level, product, symmetrised_power
from sitesym.groups.subgroups import subgroups

CLASSES = (
    "C1", "Ci", "C2", "Cs", "C2h", "D2", "C2v", "D2h", "C4", "S4", "C4h", "D4", "C4v", "D2d", "D4h", "C3", "S6", "D3",
    "C3v", "D3d", "C6", "C3h", "C6h", "D6", "C6v", "D3h", "D6h", "T", "Th", "O", "Td", "Oh",
)  # fmt: skip
GROUPS = {name: PointGroup.of(matrices) for name, matrices in all_groups(6).items()}


def symmetrised(matrices: np.ndarray, order: int) -> np.ndarray:
    """Characters of the symmetrised power by brute force: the trace of D⊗…⊗D on symmetric tensors."""
    d = matrices.shape[1]
    total = np.zeros(len(matrices))
    orders = list(permutations(range(order)))
    for index in np.ndindex(*(d,) * order):
        for chosen in orders:
            total += np.prod([matrices[:, index[k], index[chosen[k]]] for k in range(order)], axis=0)
    return total / len(orders)


def characters_of(group: PointGroup, parts: dict[str, int]) -> np.ndarray:
    table = {one.label: one.characters for one in group.species}
    return sum((count * table[label] for label, count in parts.items()), np.zeros(len(group)))


@pytest.mark.parametrize("name", CLASSES)
def test_symmetrised_powers_are_traces_on_symmetric_tensors(name: str) -> None:
    """Orders 2 to 4 of every species, by a second derivation that knows nothing of Newton's recursion."""
    group = GROUPS[name]
    for one in group.species:
        for order in (2, 3, 4) if one.dimension < 3 else (2, 3):
            found = characters_of(group, symmetrised_power(group, one.label, order))
            assert np.allclose(found, symmetrised(one.matrices, order), atol=1e-9), (one.label, order)


@pytest.mark.parametrize("name", CLASSES)
def test_products_have_the_characters_of_a_general_library(name: str) -> None:
    """Products reduced with the complex irreducible representations of spgrep give the same dimensions by species."""
    from spgrep import get_crystallographic_pointgroup_irreps_from_symmetry

    group = GROUPS[name]
    hexagonal = not group.kind.is_polyhedral and any(digit in name for digit in "36")
    basis = np.array([[1, 0, 0], [-0.5, np.sqrt(0.75), 0], [0, 0, 1]]) if hexagonal else np.eye(3)
    rotations = np.linalg.inv(basis.T) @ group.matrices @ basis.T
    integers = np.rint(rotations).astype(int)
    assert np.allclose(rotations, integers, atol=1e-6)
    library = get_crystallographic_pointgroup_irreps_from_symmetry(integers)
    for one, two in combinations_with_replacement(group.species, 2):
        characters = one.characters * two.characters
        found = characters_of(group, product(group, (one.label, two.label)))
        for irrep in library:
            row = np.trace(irrep, axis1=1, axis2=2)
            assert np.vdot(row, characters) / len(group) == pytest.approx(np.vdot(row, found) / len(group), abs=1e-6)


TABLES = reference("products.toml")


def group_named(name: str) -> PointGroup:
    if name in ("Cinfv", "Dinfh"):
        return PointGroup.linear(np.array([0.0, 0.0, 1.0]), centred=name == "Dinfh")
    return GROUPS[name]


def within_table(name: str, parts: dict[str, int]) -> bool:
    """The finite sample of a linear group tells species apart up to Γ."""
    return name not in ("Cinfv", "Dinfh") or set(parts) <= {one.label for one in group_named(name).species}


def test_products_and_powers_of_published_tables() -> None:
    """172 products and 126 powers; 97 and 90 of them from printed tables (sources in the data file)."""
    compared = 0
    for entry in TABLES["product"]:
        if within_table(entry["group"], entry["species"]):
            assert product(group_named(entry["group"]), entry["factors"]) == entry["species"], entry
            compared += 1
    for entry in TABLES["power"]:
        if within_table(entry["group"], entry["symmetrised"]):
            found = symmetrised_power(group_named(entry["group"]), entry["species"], entry["order"])
            assert found == entry["symmetrised"], entry
            compared += 1
    assert compared >= 280


def test_products_of_printed_tables() -> None:
    """Wilson, Decius and Cross, Molecular Vibrations (1955), appendix X and section 7-3; from memory."""
    assert symmetrised_power(GROUPS["D3h"], "E'", 2) == {"A1'": 1, "E'": 1}
    assert product(GROUPS["D3h"], ("E'", "E'")) == {"A1'": 1, "A2'": 1, "E'": 1}
    assert product(GROUPS["Td"], ("T2", "T2")) == {"A1": 1, "E": 1, "T1": 1, "T2": 1}
    assert symmetrised_power(GROUPS["Td"], "T2", 2) == {"A1": 1, "E": 1, "T2": 1}
    assert symmetrised_power(GROUPS["Td"], "T2", 3) == {"A1": 1, "T1": 1, "T2": 2}
    assert symmetrised_power(GROUPS["C3v"], "E", 3) == {"A1": 1, "A2": 1, "E": 1}
    assert product(GROUPS["D3d"], ("A2u", "A2u")) == {"A1g": 1}


def test_levels_and_differences() -> None:
    """A level of different vibrations is a plain product; a difference has the species of both."""
    group = GROUPS["D3d"]
    assert level(group, (("Eu", 1), ("A2u", 1))) == product(group, ("Eu", "A2u")) == {"Eg": 1}
    assert difference(group, "Eg", "A2u") == {"Eu": 1}


def test_wrong_words_are_refused() -> None:
    with pytest.raises(UsageError, match="has no species"):
        product(GROUPS["Td"], ("T2g",))
    with pytest.raises(UsageError, match="cannot be excited"):
        symmetrised_power(GROUPS["Td"], "T2", 0)


@pytest.mark.parametrize(
    ("name", "groups", "classes"),
    [("Oh", 98, 33), ("D6h", 54, 32), ("Td", 30, 11), ("D4h", 35, 27), ("D3d", 16, 10), ("D2h", 16, 16)],
)
def test_numbers_of_subgroups(name: str, groups: int, classes: int) -> None:
    """Subgroups of m-3m and 6/mmm: International Tables A (2016), section 3.2; Lagrange's theorem. From memory."""
    found = subgroups(GROUPS[name])
    assert len(found) == classes
    assert sum(one.copies for one in found) == groups
    assert all(len(GROUPS[name]) % one.order == 0 for one in found)
    for one in found:
        table = GROUPS[name].products[np.ix_(one.indices, one.indices)]
        assert set(table.ravel().tolist()) == set(one.indices.tolist())
