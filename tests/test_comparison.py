"""Pairs of structures against the literature: relation, correlation of species, folding, new activity.

The pairs and their sources stand in phase_pairs.toml; facts that need no source beyond the trade are marked here.
"""

from __future__ import annotations

from fractions import Fraction
from functools import lru_cache
from typing import Any

import numpy as np
import pytest
from literature import of_entry, reference
from phases import carried, cells_of, centrings, direct_characters, label_free, of_phase, operations, whole

from sitesym.analysis import analyse
from sitesym.comparison import Comparison, compare
from sitesym.errors import UsageError
from sitesym.structure import Structure

PAIRS = {entry["name"]: entry for entry in reference("phase_pairs.toml")["pair"]}
COMPOUNDS = {entry["name"]: entry for entry in reference("decompositions.toml")["compound"]}
RELATED = [name for name, entry in PAIRS.items() if entry["relation"] != "none"]
SUBGROUPS = [name for name in RELATED if PAIRS[name]["relation"] == "group-subgroup"]
COUNTED = [name for name in RELATED if PAIRS[name]["counted"]]
UNRELATED = [name for name, entry in PAIRS.items() if entry["relation"] == "none"]


@lru_cache(maxsize=64)
def compared(name: str) -> Comparison:
    """The pair at the default limits; wider only where the two refinements lie farther apart."""
    entry = PAIRS[name]
    strain = 0.06 if entry.get("strain", 0.0) < 0.06 else 0.1
    return compare(of_phase(entry["parent"]), of_phase(entry["child"]), strain)


def embedding(name: str) -> Any:
    found = compared(name).embedding
    assert found is not None
    return found


@pytest.mark.parametrize("name", PAIRS)
def test_relation_and_index(name: str) -> None:
    """Group and subgroup, the same, or none; the index and its two factors."""
    entry, result = PAIRS[name], compared(name)
    assert result.relation == entry["relation"]
    assert (result.parent.symmetry.number, result.child.symmetry.number) == (
        entry["parent"]["space_group"], entry["child"]["space_group"],
    )  # fmt: skip
    if result.embedding is not None:
        found = result.embedding
        factors = (entry["index"], entry["class_index"], entry["lattice_index"])
        assert (found.index, found.translationengleiche, found.klassengleiche) == factors


@pytest.mark.parametrize("name", RELATED)
def test_strain_and_displacements(name: str) -> None:
    """Strain as rounded in the reference (either over the other); atoms lie no farther from the parent than there."""
    entry, found = PAIRS[name], embedding(name)
    stretches = found.lattice.stretches
    assert max(*stretches, *(1 / stretches)) - 1 == pytest.approx(entry["strain"], abs=6e-4)
    assert found.match.largest <= entry["largest_displacement"] + 0.01


@pytest.mark.parametrize("name", RELATED)
def test_sublattice_of_the_child(name: str) -> None:
    """The child's lattice in the parent is that of the reference, up to an operation of the parent."""
    entry, found = PAIRS[name], embedding(name)
    points = centrings(entry["child"]["hermann_mauguin"])
    turns = [turn for turn, _ in operations(entry["parent"]["hermann_mauguin"])]
    mine = found.lattices[1].basis @ found.lattice.axes
    wanted = np.array(entry["transformation"])
    assert any(whole((mine @ turn.T) @ np.linalg.inv(wanted), points).all() for turn in turns)


@pytest.mark.parametrize("name", RELATED)
def test_wavevectors_that_fold(name: str) -> None:
    """As many as the cell is multiplied, of the stars and names of the reference."""
    entry, stars = PAIRS[name], embedding(name).stars
    assert stars[0].is_zone_centre
    assert sum(len(star.arms) for star in stars) == entry["lattice_index"]
    turns = [turn for turn, _ in operations(entry["parent"]["hermann_mauguin"])]
    points = centrings(entry["parent"]["hermann_mauguin"])
    for wanted in entry["wavevectors"]:
        images = [np.array(wanted) @ turn for turn in turns]
        assert any(_same_wave(np.array(star.conventional, dtype=float), images, points) for star in stars[1:])
    if entry["wavevectors"]:
        assert {star.name for star in stars[1:]} == set(entry["point"].split(", "))


def _same_wave(wave: np.ndarray, images: list[np.ndarray], points: np.ndarray) -> bool:
    """Whether one image differs from the wave by a reciprocal lattice vector: whole at all lattice points."""
    basis = np.concatenate([np.eye(3), points])
    return any((np.abs((wave - one) @ basis.T - np.rint((wave - one) @ basis.T)) < 1e-6).all() for one in images)


@pytest.mark.parametrize("name", RELATED)
def test_correlation_of_species(name: str) -> None:
    """Every species of the parent becomes what the reference says."""
    assert {row.label: row.child for row in compared(name).centre} == PAIRS[name]["correlation"]


@pytest.mark.parametrize("name", COUNTED)
def test_modes_by_origin(name: str) -> None:
    """Optic modes of both, those from folding, and newly active ones with their share from the zone centre."""
    entry, result = PAIRS[name], compared(name)
    assert {row.label: row.optic for row in result.centre if row.optic} == entry["parent_optic"]
    assert {row.label: row.optic for row in result.child.species if row.optic} == entry["child_optic"]
    folded: dict[str, int] = {}
    for row in result.folded or ():
        for label, count in row.child.items():
            folded[label] = folded.get(label, 0) + count
    assert folded == entry["from_folding"]
    assert result.new("raman") == entry["new_raman"]
    assert result.new("infrared") == entry["new_infrared"]
    parts = {one.technique: one.zone_centre for one in result.active}
    assert parts["raman"] == entry["new_raman_from_centre"]
    assert parts["infrared"] == entry["new_infrared_from_centre"]


@pytest.mark.parametrize("name", [name for name in SUBGROUPS if not PAIRS[name]["counted"]])
def test_average_parents_are_not_counted(name: str) -> None:
    """Where half-occupied sites stand for orientations, species are correlated and folded modes are not counted."""
    result = compared(name)
    assert result.folded is None
    assert result.active == ()
    assert "average_parent" in {one.code for one in result.cautions}


@pytest.mark.parametrize("name", UNRELATED)
def test_counts_of_unrelated_structures(name: str) -> None:
    """Without relation both are counted for themselves."""
    entry, result = PAIRS[name], compared(name)
    assert result.embedding is None
    assert result.refusal is not None
    assert not result.reversed
    for one, key in ((result.parent, "parent"), (result.child, "child")):
        present = [row for row in one.species if row.optic]
        assert {row.label: row.optic for row in present if row.activity.raman} == entry[f"{key}_raman"]
        assert {row.label: row.optic for row in present if row.activity.infrared} == entry[f"{key}_infrared"]


# The second route: gemmi's operations, spgrep's representations, atoms counted one by one, no wavevector anywhere


@pytest.mark.parametrize("name", SUBGROUPS)
def test_operations_of_the_child_are_operations_of_the_parent(name: str) -> None:
    """Carried over by the axes and origin found, each tabulated operation is a tabulated one of the parent."""
    entry, found = PAIRS[name], embedding(name)
    own = operations(entry["parent"]["hermann_mauguin"])
    for _, turn, shift in carried(entry["child"]["hermann_mauguin"], found.lattice.axes, found.match.origin):
        assert any(
            np.allclose(turn, other) and np.abs(shift - move - np.rint(shift - move)).max() < 2e-3
            for other, move in own
        )


@pytest.mark.parametrize("name", [name for name in SUBGROUPS if PAIRS[name]["counted"]])
def test_counts_by_a_general_library(name: str) -> None:
    """Zone-centre part and folded part of the displacements of the undistorted parent, by direct count."""
    entry, result, found = PAIRS[name], compared(name), embedding(name)
    centre, total = direct_characters(entry["parent"], entry["child"], found.lattice.axes, found.match.origin)
    turns = carried(entry["child"]["hermann_mauguin"], found.lattice.axes, found.match.origin)
    rotations = np.array([own for own, _, _ in turns])
    lattice = of_phase(entry["child"]).lattice
    rules = {row.label: row for row in result.child.species}

    def counted(parts: dict[str, int]) -> list[tuple[int, int, bool, bool]]:
        return sorted(
            (rules[k].dimension, n, rules[k].activity.infrared, rules[k].activity.raman) for k, n in parts.items() if n
        )

    folded = {row.label: 0 for row in result.child.species}
    for row in result.folded or ():
        for label, count in row.child.items():
            folded[label] += count
    assert label_free(rotations, lattice, total - centre) == counted(folded)
    assert label_free(rotations, lattice, total) == counted({k: row.total for k, row in rules.items()})


def test_direct_counts_see_every_cell() -> None:
    """The check itself: the child's cell of tetragonal strontium titanate holds four cells of the cube."""
    assert len(cells_of(np.zeros((1, 3)), np.array([[1.0, -1, 0], [1, 1, 0], [0, 0, 2]]))) == 4


# Facts of the trade


def compound(name: str) -> Structure:
    return of_entry(COMPOUNDS[name])


def test_chalcopyrite_folds_x_and_w() -> None:
    """Common practice: the chalcopyrite cell is twice zinc blende's; one X and two W points come to its centre."""
    result = compare(compound("zincblende"), compound("chalcopyrite"))
    assert result.embedding is not None
    assert {star.name: (len(star.arms), star.size) for star in result.embedding.stars} == {
        "Γ": (1, 1), "X": (1, 3), "W": (2, 6),
    }  # fmt: skip
    assert result.embedding.substitutions == {"Cu": "Zn", "Fe": "Zn"}
    assert next(row.child for row in result.centre if row.label == "T2") == {"B2": 1, "E": 1}


def test_berlinite_is_quartz_with_a_doubled_axis() -> None:
    """Common practice: aluminium and phosphorus order along c; A folds, and the screw axis changes its hand."""
    result = compare(compound("alpha-quartz"), compound("berlinite"))
    assert result.embedding is not None
    assert result.embedding.lattice.axes.tolist() == [[1, 0, 0], [0, 1, 0], [0, 0, 2]]
    assert [star.name for star in result.embedding.stars] == ["Γ", "A"]
    assert not result.embedding.lattice.mirrored


def test_zinc_blende_is_diamond_with_order() -> None:
    """Common practice: the one Raman line of diamond, T2g, becomes T2, which the infrared sees too."""
    result = compare(compound("diamond"), compound("zincblende"))
    assert result.relation == "group-subgroup"
    assert result.new("infrared") == {"T2": 1}
    assert result.new("raman") == {}


def test_order_of_the_two_structures_matters_and_is_told() -> None:
    """Given the wrong way round there is no relation, and the result says so."""
    entry = PAIRS["strontium titanate, cubic and tetragonal"]
    result = compare(of_phase(entry["child"]), of_phase(entry["parent"]))
    assert result.relation == "none"
    assert result.reversed


def test_opposite_hands_of_quartz() -> None:
    """P3121 and P3221 are mirror images: the same, and the mirror is reported."""
    left = compound("alpha-quartz")
    right = Structure(left.lattice * [1, 1, -1], left.fractional, left.sites)
    result = compare(left, right)
    assert result.relation == "same"
    assert result.embedding is not None
    assert result.embedding.lattice.mirrored
    assert "mirrored" in {one.code for one in result.cautions}


def test_displacements_of_strontium_titanate_belong_to_r() -> None:
    """The turn of the octahedra by 1.4° moves O2 by a/2 tan(1.4°) = 0.048 Å and has no part at the zone centre."""
    entry = PAIRS["strontium titanate, cubic and tetragonal"]
    child = dict(entry["child"], sites=[dict(one) for one in entry["child"]["sites"]])
    child["sites"][3]["xyz"] = [(1 - np.tan(np.radians(1.4))) / 4, (3 - np.tan(np.radians(1.4))) / 4, 0.0]
    found = compare(of_phase(entry["parent"]), of_phase(child)).embedding
    assert found is not None
    moved = 3.905 / 2 * np.tan(np.radians(1.4))
    assert found.match.largest == pytest.approx(moved, abs=1e-4)
    assert found.amplitudes == pytest.approx((0.0, 2 * moved), abs=1e-3)


def test_an_analysis_serves_as_well() -> None:
    entry = PAIRS["barium titanate, cubic and tetragonal"]
    analyses = [analyse(of_phase(entry[key]), scan=False) for key in ("parent", "child")]
    result = compare(*analyses)
    assert result.parent is analyses[0]
    assert result.new("raman") == {"A1": 3, "B1": 1, "E": 4}


def test_modes_that_become_totally_symmetric() -> None:
    """Common practice: the soft mode of barium titanate is T1u, that of quartz B1."""
    assert compared("barium titanate, cubic and tetragonal").becoming_symmetric == ("T1u",)
    assert compared("quartz, beta and alpha").becoming_symmetric == ("B1",)


@pytest.mark.parametrize(("strain", "displacement"), [(0.0, 1.0), (0.6, 1.0), (float("nan"), 1.0), (0.06, -1.0)])
def test_useless_limits_are_refused(strain: float, displacement: float) -> None:
    entry = PAIRS["barium titanate, cubic and tetragonal"]
    with pytest.raises(UsageError):
        compare(of_phase(entry["parent"]), of_phase(entry["child"]), strain, displacement=displacement)


def test_limits_are_kept() -> None:
    """Below the strain or the displacement of the pair there is no relation, and the reason is the right one."""
    entry = PAIRS["quartz, beta and alpha"]
    pair = of_phase(entry["parent"]), of_phase(entry["child"])
    for limits, code in (({"strain": 0.01}, "lattice"), ({"displacement": 0.3}, "atoms")):
        refusal = compare(*pair, **limits).refusal
        assert refusal is not None
        assert refusal.code == code


def test_wavevectors_are_exact() -> None:
    """Folded wavevectors are fractions of the primitive reciprocal vectors: q·R is whole for every child vector."""
    found = embedding("potassium sulfate, alpha and beta")
    for star in found.stars:
        for arm in star.arms:
            products = [
                sum((Fraction(int(n)) * q for n, q in zip(row, arm, strict=True)), Fraction(0))
                for row in found.lattice.supercell
            ]
            assert all(one.denominator == 1 for one in products)
