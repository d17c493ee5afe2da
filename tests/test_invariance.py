"""What must not change: label-free numbers under any description of the same crystal; labels permute with the axes."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from literature import of_entry, reference

from sitesym.analysis import Analysis, analyse
from sitesym.structure import Structure

ENTRIES = {entry["name"]: entry for entry in reference("decompositions.toml")["compound"]}
NAMES = (
    "calcite", "rutile", "alpha-quartz", "forsterite", "wurtzite (zinc oxide)", "zincblende", "baddeleyite",
    "scheelite",
)  # fmt: skip
CASES = {name: of_entry(ENTRIES[name]) for name in NAMES}
RELAXED = settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.too_slow])


def numbers(analysis: Analysis) -> tuple[object, ...]:
    """Everything that does not depend on axes or labels."""
    rows = sorted(
        (row.dimension, row.optic, row.activity.infrared, row.activity.raman, row.activity.hyper_raman)
        for row in analysis.species
    )
    sites = sorted((site.element, site.count, site.group.schoenflies) for site in analysis.sites)
    return analysis.symmetry.number, analysis.totals, rows, sites


EXPECTED = {name: numbers(analyse(structure, scan=False)) for name, structure in CASES.items()}


def described(structure: Structure, lattice: np.ndarray, fractional: np.ndarray, order: np.ndarray) -> Structure:
    sites = tuple(structure.sites[index] for index in order)
    return Structure(lattice, fractional[order], sites)


@RELAXED
@given(st.sampled_from(NAMES), st.lists(st.floats(0, 1), min_size=3, max_size=3), st.randoms(use_true_random=False))
def test_origin_and_order_of_atoms_do_not_matter(name: str, shift: list[float], random: object) -> None:
    structure = CASES[name]
    order = list(range(len(structure)))
    random.shuffle(order)
    other = described(structure, structure.lattice, structure.fractional + shift, np.array(order))
    assert numbers(analyse(other, scan=False)) == EXPECTED[name]


@RELAXED
@given(st.sampled_from(NAMES), st.lists(st.sampled_from([-1, 0, 1]), min_size=3, max_size=3))
def test_the_choice_of_cell_does_not_matter(name: str, steps: list[int]) -> None:
    """A sheared cell of the same volume, and turned in space."""
    structure = CASES[name]
    change = np.array([[1, steps[0], steps[1]], [0, 1, steps[2]], [0, 0, 1]])
    turned = np.linalg.qr(np.arange(9.0).reshape(3, 3) + np.eye(3))[0]
    lattice = change @ structure.lattice @ (turned * np.linalg.det(turned))
    fractional = structure.fractional @ np.linalg.inv(change)
    other = described(structure, lattice, fractional, np.arange(len(structure)))
    assert numbers(analyse(other, scan=False)) == EXPECTED[name]


@RELAXED
@given(st.sampled_from(NAMES), st.sampled_from([(2, 1, 1), (1, 2, 1), (1, 1, 2), (2, 2, 1), (1, 1, 3)]))
def test_supercells_are_reduced(name: str, times: tuple[int, int, int]) -> None:
    structure = CASES[name]
    steps = np.array(np.meshgrid(*[range(n) for n in times])).reshape(3, -1).T
    fractional = ((structure.fractional[None] + steps[:, None]) / times).reshape(-1, 3)
    sites = structure.sites * len(steps)
    other = Structure(structure.lattice * np.array(times)[:, None], fractional, sites)
    assert numbers(analyse(other, scan=False)) == EXPECTED[name]


def test_the_primitive_cell_gives_the_same() -> None:
    structure = CASES["zincblende"]
    change = np.array([[0, 0.5, 0.5], [0.5, 0, 0.5], [0.5, 0.5, 0]])
    fractional = np.mod(structure.fractional @ np.linalg.inv(change), 1)
    _, first = np.unique(np.round(fractional, 6), axis=0, return_index=True)
    other = described(structure, change @ structure.lattice, fractional, first)
    assert len(other) == 2
    assert numbers(analyse(other, scan=False)) == EXPECTED["zincblende"]


def test_a_left_handed_cell_is_the_same_crystal() -> None:
    """Quartz with a and b exchanged in the list, the atoms where they were: all numbers stay."""
    structure = CASES["alpha-quartz"]
    swap = np.array([1, 0, 2])
    other = described(structure, structure.lattice[swap], structure.fractional[:, swap], np.arange(len(structure)))
    assert np.linalg.det(other.lattice) < 0
    assert numbers(analyse(other, scan=False)) == EXPECTED["alpha-quartz"]


ORTHORHOMBIC = ("forsterite", "lithium gallate", "sodium nitrite", "aluminium phosphate, low cristobalite form")


@pytest.mark.parametrize("order", [(0, 1, 2), (1, 2, 0), (2, 0, 1), (1, 0, 2), (0, 2, 1), (2, 1, 0)])
@pytest.mark.parametrize("name", ORTHORHOMBIC)
def test_labels_permute_with_the_axes_as_the_table_says(name: str, order: tuple[int, int, int]) -> None:
    """Crystals of mmm, mm2 and 222 in all six settings: counts by label are those carried through the printed table."""
    structure = of_entry(ENTRIES[name])
    base = analyse(structure, scan=False)
    index = list(order)
    other = Structure(structure.lattice[index], structure.fractional[:, index], structure.sites)
    result = analyse(other, scan=False)
    axes = " ".join("abc"[k] for k in order)
    table = next(row for row in base.settings if row.axes == axes)
    assert table.symbol == result.symmetry.setting.full
    for row in base.species:
        assert result.species_row(table.labels.get(row.label, row.label)).optic == row.optic


@pytest.mark.parametrize(("symbol", "expected"), [("Pnma", (11, 7, 11, 7)), ("P b n m", (11, 11, 7, 7))])
def test_a_setting_asked_for_by_name(symbol: str, expected: tuple[int, ...]) -> None:
    """Olivine in Pnma has 11 Ag + 7 B1g + 11 B2g + 7 B3g (common practice), in Pbnm 11 + 11 + 7 + 7."""
    result = analyse(CASES["forsterite"], scan=False, setting=symbol)
    assert tuple(result.species_row(label).optic for label in ("Ag", "B1g", "B2g", "B3g")) == expected
    assert result.space_group == symbol.replace(" ", "")
