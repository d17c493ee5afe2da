"""The least plan against exhaustive search over all subsets, written here anew, on crystals and invented tables."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import combinations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from literature import of_entry, reference
from views_cases import case

from sitesym.analysis import analyse
from sitesym.errors import UsageError
from sitesym.experiment.candidates import Candidate
from sitesym.experiment.cover import Cover, least_cover
from sitesym.experiment.faces import helpful_faces, sensible_faces
from sitesym.experiment.plan import Plan, make_plan
from sitesym.experiment.shown import GeometryResult, Shown
from sitesym.geometry.directions import face_normal
from sitesym.geometry.notation import parse_geometry

CRYSTALS = [
    "calcite", "rutile", "alpha-quartz", "lithium niobate", "wurtzite (zinc oxide)", "molybdenite 2H", "forsterite",
    "baddeleyite", "spinel", "sodium nitrite", "chalcopyrite", "gypsum",
]  # fmt: skip


def names_seen(result: GeometryResult) -> frozenset[str]:
    """`A1(LO)` for each kind of phonon that is seen, and `A1`."""
    return frozenset(name for one in result.allowed for name in (one.name, one.label))


def achievements(results: Sequence[GeometryResult]) -> list[frozenset[tuple[str, ...]]]:
    """What each measurement achieves: a target seen, or one of two seen without the other.

    Targets of a polar species are its LO and TO phonons where they occur; oblique ones where there is nothing else.
    """
    kinds: dict[str, dict[str, set[str]]] = {}
    for result in results:
        for one in result.allowed:
            kinds.setdefault(one.label, {}).setdefault(one.phonon or "", set()).add(one.name)
    targets = {}
    for label, found in kinds.items():
        pure = found.get("LO", set()) | found.get("TO", set())
        targets[label] = pure or found.get("", set()) or found["oblique"]
    phonons = sorted(name for found in targets.values() for name in found)
    pairs = [*combinations(phonons, 2), *combinations(targets, 2)]
    return [
        frozenset(
            [(name,) for name in phonons if name in seen]
            + [tuple(sorted(pair)) for pair in pairs if len(seen & set(pair)) == 1]
        )
        for seen in map(names_seen, results)
    ]


def exhaustive(candidates: Sequence[Candidate], results: Sequence[GeometryResult]) -> tuple[int, ...]:
    """The best of all subsets: fewest measurements, then fewest faces, then easiest, then first in order."""
    achieved = achievements(results)
    wanted = frozenset().union(*achieved)
    for size in range(len(candidates) + 1):
        covers = [
            chosen
            for chosen in combinations(range(len(candidates)), size)
            if wanted == frozenset().union(*(achieved[k] for k in chosen))
        ]
        if covers:
            return min(covers, key=lambda chosen: (*price(candidates, chosen), chosen))
    raise AssertionError("all candidates together achieve what they achieve")


def price(candidates: Sequence[Candidate], chosen: Sequence[int]) -> tuple[int, int]:
    faces = {face for k in chosen for face in candidates[k].faces}
    return len(faces), sum(candidates[k].ease for k in chosen)


@pytest.mark.parametrize("name", CRYSTALS)
def test_plan_is_the_best_of_all_subsets(name: str) -> None:
    analysis = case(name)
    plan = make_plan(analysis, faces=sensible_faces(analysis))
    assert plan.cover.chosen == exhaustive(plan.candidates, plan.results)


@pytest.mark.parametrize("name", ["lithium niobate", "rutile"])
def test_plan_with_all_mounts_is_the_best_of_all_subsets(name: str) -> None:
    mounts = ("backscattering", "right-angle", "forward")
    plan = make_plan(case(name), faces=("001", "100"), mounts=mounts)
    assert plan.cover.chosen == exhaustive(plan.candidates, plan.results)


NAMES = [("A", None), ("B", "LO"), ("B", "TO"), ("C", "TO"), ("C", "oblique"), ("D", None), ("E", "oblique")]
GEOMETRY = parse_geometry("z(xx)-z", np.eye(3))


def invented(table: Sequence[Sequence[bool]]) -> list[GeometryResult]:
    """Results in which the species of `NAMES` are allowed as the rows of a table say."""
    return [
        GeometryResult(
            GEOMETRY,
            tuple(
                Shown(label, kind, ("a",), np.array([[float(seen)]], dtype=complex), "a²")
                for (label, kind), seen in zip(NAMES, row, strict=True)
            ),
        )
        for row in table
    ]


@settings(max_examples=150, deadline=None)
@given(
    table=st.lists(st.lists(st.booleans(), min_size=7, max_size=7), min_size=1, max_size=9),
    data=st.data(),
)
def test_cover_of_any_table_is_the_best_of_all_subsets(table: list[list[bool]], data: st.DataObject) -> None:
    candidates = [
        Candidate(
            GEOMETRY, tuple(data.draw(st.sets(st.sampled_from("PQR"), max_size=2))), "m", data.draw(st.integers(0, 3))
        )
        for _ in table
    ]
    results = invented(table)
    assert least_cover(candidates, results).chosen == exhaustive(candidates, results)


def test_nothing_shown_is_nothing_chosen() -> None:
    cover = least_cover([Candidate(GEOMETRY, (), "m", 0)], invented([[False] * 7]))
    assert cover.chosen == ()
    assert [demand.first for demand in cover.unmet] == ["A", "B", "C", "D", "E"]


def test_ties_go_to_fewer_faces_then_ease_then_order() -> None:
    """Four measurements alike: the one on one face, easy, and first is taken."""
    results = invented([[True, *[False] * 6]] * 4)
    faces = [("P", "Q"), ("P",), ("Q",), ("R",)]
    for eases, best in (((0, 1, 0, 0), 2), ((0, 1, 2, 1), 1), ((0, 3, 3, 2), 3)):
        candidates = [Candidate(GEOMETRY, *one) for one in zip(faces, ["m"] * 4, eases, strict=True)]
        assert least_cover(candidates, results).chosen == (best,)


def test_plan_is_reproducible() -> None:
    analysis = case("forsterite")
    covers: list[Cover] = [make_plan(analysis, faces=("010", "001", "100")).cover for _ in range(3)]
    assert covers[0] == covers[1] == covers[2]


def plan_of(name: str, *faces: str, **options: object) -> Plan:
    return make_plan(case(name), faces=faces, **options)  # type: ignore[arg-type]


def notations(plan: Plan) -> list[str]:
    return [one.result.geometry.notation for one in plan.measurements]


# Selection rules of rutile, Porto, Fleury and Damen, Phys. Rev. 154, 522 (1967), from memory: A1g in xx, yy, zz; B1g in
# xx, yy; B2g in xy; Eg in xz, yz. Backscattering on (001) has no xz, and cannot tell B1g from A1g by xx alone: it
# takes x′x′, where A1g and B2g are seen.
def test_rutile_on_001_separates_what_it_can_and_names_what_it_cannot_see() -> None:
    plan = plan_of("rutile", "001")
    assert plan.unseen == ("Eg",)
    assert set(plan.separated) == {("A1g", "B1g"), ("A1g", "B2g"), ("B1g", "B2g")}
    assert plan.inseparable == ()
    assert len(plan.measurements) == 2
    assert plan.further is not None
    assert plan.further.face == "100"


# DiDomenico and others, Phys. Rev. 174, 522 (1968), from memory: A1(TO) needs light across c, A1(LO) light along it.
def test_polar_crystal_on_one_face_gets_a_second_face_for_the_other_phonons() -> None:
    plan = plan_of("lithium niobate", "001")
    seen = {one.name for measurement in plan.measurements for one in measurement.result.allowed}
    assert seen == {"A1(LO)", "E(TO)"}
    assert ("A1(LO)", "A1(TO)") not in plan.separated
    assert plan.other_phonons == ("A1(TO)", "E(LO)")
    assert plan.further is not None
    assert "A1(TO)" in {demand.first for demand in plan.further.meets}


def test_longitudinal_and_transverse_are_both_seen_where_the_faces_allow() -> None:
    plan = plan_of("lithium niobate", "001", "010")
    seen = {one.name for measurement in plan.measurements for one in measurement.result.allowed}
    assert seen == {"A1(LO)", "A1(TO)", "E(LO)", "E(TO)"}
    assert set(plan.separated) == {("A1", "E"), ("A1(LO)", "A1(TO)"), ("E(LO)", "E(TO)")}


def test_species_are_told_apart_also_where_longitudinal_and_transverse_coincide() -> None:
    """α-quartz: A1 in xx on two faces, with E(TO) on one and E(LO) on the other, does not separate A1 from E."""
    plan = plan_of("alpha-quartz", "001", "010", "2-10")
    patterns = {
        label: tuple(any(one.label == label for one in m.result.allowed) for m in plan.measurements)
        for label in ("A1", "E")
    }
    assert patterns["A1"] != patterns["E"]


# Without an analyser Raman light of every polarization is seen. Calcite: A1g and Eg both for any polarization along c.
def test_without_analyser_on_001_calcite_stays_inseparable() -> None:
    plan = plan_of("calcite", "001", analyser=False)
    assert plan.inseparable == (("A1g", "Eg"),)
    assert plan.separated == ()


def test_silicon_needs_one_measurement() -> None:
    """One line, T2g, in z(xy)z̄ (common practice)."""
    assert notations(plan_of("diamond", "001")) == ["z(xy)-z"]


def test_polarizations_that_birefringence_would_turn_are_not_offered() -> None:
    """Between c and y of a uniaxial crystal light does not keep its polarization (Nye 1957, from memory)."""
    thick, thin = plan_of("lithium niobate", "2-10"), plan_of("lithium niobate", "2-10", thin=True)
    assert {one.geometry.notation for one in thick.candidates} == {"x(yy)-x", "x(zz)-x", "x(yz)-x"}
    assert len(thin.candidates) == 5


def test_named_geometries_alone_are_the_candidates() -> None:
    plan = make_plan(case("calcite"), geometries=("z(xy)-z", "z(xx)-z", "z(yy)-z"))
    assert notations(plan) == ["z(xy)-z", "z(xx)-z"]
    assert [one.result.geometry.notation for one in plan.asked] == ["z(xy)-z", "z(xx)-z", "z(yy)-z"]


def test_faces_by_system_are_simple_and_not_parallel() -> None:
    """Hexagonal: (010) across y and (2-10) across x for a ∥ x (geometry of the reciprocal lattice)."""
    for name in CRYSTALS:
        analysis = case(name)
        normals = [face_normal(face, analysis.symmetry.lattice).vector for face in sensible_faces(analysis)]
        assert all(abs(one @ other) < 0.99 for one, other in combinations(normals, 2))
    lattice = case("calcite").symmetry.lattice
    assert np.allclose(face_normal("010", lattice).vector, [0, 1, 0])
    assert np.allclose(face_normal("2-10", lattice).vector, [1, 0, 0])
    assert "100" not in helpful_faces(case("rutile"), ("-100",))


@pytest.mark.parametrize(
    ("faces", "mounts", "words"),
    [
        (("001",), ("sideways",), "sideways"),
        (("001",), ("right-angle",), "90°"),
        (("000",), ("backscattering",), "zero"),
        (("face",), ("backscattering",), "face"),
    ],
)
def test_what_cannot_be_is_said(faces: tuple[str, ...], mounts: tuple[str, ...], words: str) -> None:
    with pytest.raises(UsageError, match=words):
        make_plan(case("rutile"), faces=faces, mounts=mounts)


@pytest.mark.parametrize("name", ["calcite", "alpha-quartz", "molybdenite 2H", "forsterite"])
@pytest.mark.parametrize("analyser", [True, False])
def test_the_further_face_keeps_its_promise(name: str, analyser: bool) -> None:
    """A plan with the recommended face added meets the demands that were promised for it, measured the same way."""
    entry = next(one for one in reference("decompositions.toml")["compound"] if one["name"] == name)
    analysis = analyse(of_entry(entry), scan=False, molecules=False)
    plan = make_plan(analysis, faces=["001"], analyser=analyser)
    if plan.further is not None:
        again = make_plan(analysis, faces=["001", plan.further.face], analyser=analyser)
        assert set(plan.further.meets) <= set(again.cover.met)
