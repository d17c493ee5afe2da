"""Scattering geometries against the literature: allowed or forbidden, LO or TO, and the intensity in tensor letters.

tests/reference/geometries.toml holds what the papers report, crystal by crystal, with its sources and conventions.
Letters of the tensors are compared through the tensors themselves: values are drawn for the published letters, the
letters of this project are solved for, and the intensities must be equal.
"""

from __future__ import annotations

from functools import lru_cache
from typing import Any

import numpy as np
import pytest
from literature import expanded, of_entry, reference

from sitesym.analysis import Analysis, analyse
from sitesym.experiment.shown import GeometryResult, what_it_shows
from sitesym.geometry.intensity import intensity
from sitesym.geometry.notation import parse_geometry

BOOK = reference("geometries.toml")
CRYSTALS = {entry["name"]: entry for entry in BOOK["crystal"]}
CASES = [(name, k) for name, entry in CRYSTALS.items() for k in range(len(entry["geometry"]))]
LETTERS = "abcdefghijklmnopqrstuvwxyz"


def case_name(case: tuple[str, int]) -> str:
    return f"{case[0]} {CRYSTALS[case[0]]['geometry'][case[1]]['notation']}"


@lru_cache(maxsize=64)
def analysis_of(name: str) -> Analysis:
    return analyse(of_entry(CRYSTALS[name]), scan=False, molecules=False)


@lru_cache(maxsize=512)
def shown(name: str, notation: str) -> GeometryResult:
    analysis = analysis_of(name)
    return what_it_shows(analysis, parse_geometry(notation, analysis.symmetry.lattice))


def evaluated(expression: str, values: dict[str, float]) -> float:
    """`1/2*(a+b)^2` of the reference file for given letters."""
    return float(
        eval(
            expression.replace("^", "**"), {"__builtins__": {}, "sqrt2": np.sqrt(2), "sqrt3": np.sqrt(3)}, dict(values)
        )
    )


def published_tensors(species: dict[str, Any], values: dict[str, float]) -> np.ndarray:
    """(components, 3, 3) numbers of one species."""
    return np.array([
        [[evaluated(cell, values) if cell else 0.0 for cell in row] for row in component["tensor"]]
        for component in species["components"]
    ])  # fmt: skip


def own_letters(name: str, species: dict[str, Any], values: dict[str, float]) -> np.ndarray:
    """Values of this project's letters for which its tensors are the published ones, up to a turn of the components.

    Solves Σ_i O_ji R_i = Σ_k letter_k B_jk for the matrix O and the letters together.
    """
    tensor = analysis_of(name).species_row(species["label"]).tensor
    theirs = published_tensors(species, values)
    count = len(theirs)
    assert len(tensor.components) == count
    columns = []
    for j in range(count):
        for i in range(count):
            block = np.zeros((count, 3, 3))
            block[j] = theirs[i]
            columns.append(block.ravel())
    for k in range(len(tensor.letters)):
        columns.append(-np.array([component.basis[k] for component in tensor.components]).ravel())
    *_, singular, rows = np.linalg.svd(np.array(columns).T)
    solution = rows[-1]
    smallest = singular[-1] if len(singular) == len(rows) else 0.0
    assert smallest < 1e-8, f"{name}: the published tensor of {species['label']} has another shape"
    turn, letters = solution[: count**2].reshape(count, count), solution[count**2 :]
    size = np.sqrt(np.trace(turn @ turn.T) / count)
    assert np.allclose(turn @ turn.T, size**2 * np.eye(count), atol=1e-8)
    return np.asarray(letters / size)


def draw(seed: int = 5) -> dict[str, float]:
    return dict(zip(LETTERS, np.random.default_rng(seed).uniform(0.4, 2.0, len(LETTERS)), strict=True))


def test_reference_is_as_large_as_it_should_be() -> None:
    assert len(CRYSTALS) >= 20
    assert len(CASES) >= 250


@pytest.mark.parametrize("case", CASES, ids=case_name)
def test_allowed_and_forbidden_are_as_reported(case: tuple[str, int]) -> None:
    entry = CRYSTALS[case[0]]["geometry"][case[1]]
    result = shown(case[0], entry["notation"])
    seen = {one.label for one in result.allowed}
    found = {one.label: "allowed" if one.label in seen else "forbidden" for one in result.shown}
    assert found == entry["expected"]


@pytest.mark.parametrize("case", CASES, ids=case_name)
def test_longitudinal_and_transverse_are_as_reported(case: tuple[str, int]) -> None:
    """Every allowed species: its kinds of phonons where the reference names them, none where it is not polar."""
    entry = CRYSTALS[case[0]]["geometry"][case[1]]
    found: dict[str, set[str]] = {}
    for one in shown(case[0], entry["notation"]).allowed:
        found.setdefault(one.label, set()).update({one.phonon} if one.phonon else ())
    expected = {label: set(kinds.split("+")) for label, kinds in entry.get("phonon", {}).items()}
    assert {label: kinds for label, kinds in found.items() if kinds} == expected


@pytest.mark.parametrize("case", CASES, ids=case_name)
def test_intensities_are_as_reported(case: tuple[str, int]) -> None:
    name, k = case
    entry = CRYSTALS[name]["geometry"][k]
    values = draw()
    allowed = [label for label, verdict in entry["expected"].items() if verdict == "allowed"]
    assert set(entry.get("expression", {})) == set(allowed)
    for species in CRYSTALS[name]["species"]:
        letters = own_letters(name, species, values)
        rows = [one for one in shown(name, entry["notation"]).shown if one.label == species["label"]]
        total = sum(intensity(one.form, letters) for one in rows)
        published = entry.get("expression", {}).get(species["label"], "0")
        digits = 1e-6 if "." in published else 1e-9  # direction cosines are rounded to six decimals there
        assert total == pytest.approx(evaluated(published, values), rel=digits, abs=digits), species["label"]


@pytest.mark.parametrize(
    "case", [one for one in CASES if "shares" in CRYSTALS[one[0]]["geometry"][one[1]]], ids=case_name
)
def test_shares_of_longitudinal_and_transverse_are_as_reported(case: tuple[str, int]) -> None:
    name, k = case
    entry = CRYSTALS[name]["geometry"][k]
    values = draw()
    for species in CRYSTALS[name]["species"]:
        if species["label"] not in entry["shares"]:
            continue
        letters = own_letters(name, species, values)
        rows = [one for one in shown(name, entry["notation"]).allowed if one.label == species["label"]]
        found = {one.phonon: intensity(one.form, letters) for one in rows}
        published = entry["shares"][species["label"]]
        assert found == pytest.approx({kind: evaluated(words, values) for kind, words in published.items()})


def trigonal(symbol: str) -> Analysis:
    """Two kinds of atoms in general positions of a trigonal space group: every species has modes."""
    sites = [
        {"label": "Si", "element": "Si", "xyz": [0.12, 0.31, 0.17]},
        {"label": "O", "element": "O", "xyz": [0.43, 0.09, 0.38]},
    ]
    return analyse(expanded(symbol, [5, 5, 7, 90, 90, 120], sites), scan=False, molecules=False)


@pytest.mark.parametrize(
    "choice", BOOK["trigonal_choice"], ids=lambda one: f"{one['example']} {one['x']}".replace(" ", "")
)
def test_trigonal_tensors_for_both_choices_of_x(choice: dict[str, Any]) -> None:
    """The two settings of each trigonal class put x along or across its twofold axis or mirror."""
    analysis = trigonal(choice["example"])
    (label,) = {key for one in choice["geometry"] for key in one} - {"notation", "expression"}
    for entry in choice["geometry"]:
        result = what_it_shows(analysis, parse_geometry(entry["notation"], analysis.symmetry.lattice))
        seen = [one for one in result.allowed if one.label == label]
        kinds = "+".join(one.phonon or "allowed" for one in seen)
        assert kinds == entry[label], entry["notation"]
        first = analysis.species_row(label).tensor.letters
        letters = {"c^2": f"{first[0]}²", "d^2": f"{first[1]}²", "": ""}[entry["expression"]]
        assert "".join(one.expression for one in seen) == letters, entry["notation"]


@pytest.mark.parametrize("entry", BOOK["circular"], ids=lambda one: one["crystal"])
def test_circular_light_in_backscattering(entry: dict[str, Any]) -> None:
    """R and L are seen against the beam, so light that keeps its sense of turning goes from R to L."""
    name, values = entry["crystal"], draw()
    for words, notation in (("same", "z(RL)-z"), ("opposite", "z(RR)-z")):
        result = shown(name, notation)
        for species in CRYSTALS[name]["species"]:
            letters = own_letters(name, species, values)
            total = sum(intensity(one.form, letters) for one in result.shown if one.label == species["label"])
            published = entry[words].get(species["label"], "0")
            assert total == pytest.approx(evaluated(published, values), abs=1e-9), (words, species["label"])


def test_angle_in_a_notation_turns_about_the_beam() -> None:
    """x′ along [110] is x turned by 45° about z; y is x turned by 90°: the same rules in every writing (geometry)."""
    for written, turned in (
        ("[001]([110][110])[00-1]", "z(x+45° x+45°)-z"),
        ("[001]([110][1-10])[00-1]", "z(x+45° x-45)-z"),
        ("z(xy)-z", "z(x+0° x+90°)-z"),
    ):
        for name in ("silicon", "spinel", "rutile"):
            first, second = (shown(name, notation) for notation in (written, turned))
            assert [one.expression for one in first.shown] == [one.expression for one in second.shown]
