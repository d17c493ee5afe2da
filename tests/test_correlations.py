"""Free molecule -> site group -> factor group in 56 crystals against the literature; sources stand in the data file."""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from typing import Any

import numpy as np
import pytest
from literature import expanded, reference
from straight import straight_correlation

from sitesym.analysis import Analysis, analyse
from sitesym.groups.point_group import PointGroup
from sitesym.groups.subduction import Multiplicities
from sitesym.known_units import composition_of
from sitesym.molecular import MoleculeRow
from sitesym.selection import activity_of

CASES = reference("correlations.toml")["case"]


@cache
def analysed(index: int) -> Analysis:
    case = CASES[index]
    sites = [{"label": site["label"], "element": site["element"], "xyz": site["position"]} for site in case["sites"]]
    return analyse(expanded(case["hermann_mauguin"], case["lattice"], sites), scan=False)


def row_of(index: int) -> MoleculeRow:
    rows = analysed(index).molecular.molecules
    wanted = composition_of(CASES[index]["unit"])
    return next(row for row in rows if composition_of(row.formula) == wanted)


def in_stated_axes(index: int, row: MoleculeRow) -> Callable[[Multiplicities], Multiplicities]:
    """Translate site labels into the axes that the reference states; species are matched by their characters."""
    if "site_axes" not in CASES[index]:
        return dict
    lattice = analysed(index).symmetry.lattice
    x, z = (np.array(CASES[index]["site_axes"][name]) @ lattice for name in "xz")
    z /= np.linalg.norm(z)
    x = x - (x @ z) * z
    x /= np.linalg.norm(x)
    own = row.units.site_group
    stated = PointGroup.of(own.matrices, np.array([x, np.cross(z, x), z]))
    names = {
        one.label: next(two.label for two in stated.species if np.allclose(one.characters, two.characters))
        for one in own.species
    }
    return lambda parts: {names[label]: count for label, count in parts.items()}


def by_species(row: MoleculeRow) -> dict[str, int]:
    found: dict[str, int] = {}
    for one in row.correlation.vibrations:
        found[one.species] = found.get(one.species, 0) + one.count
    return found


def expected_by_species(case: dict[str, Any]) -> dict[str, int]:
    found: dict[str, int] = {}
    for one in case["vibrations"]:
        found[one["species"]] = found.get(one["species"], 0) + one["count"]
    return found


PARAMETERS = pytest.mark.parametrize("index", range(len(CASES)), ids=[case["name"].replace(" ", "-") for case in CASES])


@PARAMETERS
def test_groups_and_counts(index: int) -> None:
    """Free group, site group, factor group, number of units, number of vibrations of each species."""
    case, row = CASES[index], row_of(index)
    assert analysed(index).symmetry.number == case["space_group"]
    assert row.free.group.schoenflies == case["free_group"].replace("inf", "∞")
    assert row.units.site_group.schoenflies == case["site_group"]
    assert analysed(index).factor_group.schoenflies == case["factor_group"]
    assert row.units.count == case["count_primitive"]
    assert by_species(row) == expected_by_species(case)


@PARAMETERS
def test_every_vibration_is_followed(index: int) -> None:
    """Site species, factor group species and activity of each vibration of the free unit."""
    case, row = CASES[index], row_of(index)
    relabel = in_stated_axes(index, row)
    for expected in case["vibrations"]:
        same = [one for one in row.correlation.vibrations if one.species == expected["species"]]
        assert same, expected
        for one in same:
            assert relabel(one.site) == expected["site"], expected["name"]
            assert one.crystal == expected["crystal"], expected["name"]
            assert (one.free.infrared, one.free.raman) == (expected["free_infrared"], expected["free_raman"])


@PARAMETERS
def test_librations_and_translations(index: int) -> None:
    case, row = CASES[index], row_of(index)
    relabel = in_stated_axes(index, row)
    for name, motions in (("librations", row.correlation.librations), ("translations", row.correlation.translations)):
        if name in case:
            assert relabel(motions.site) == case[name]["site"], name
            assert motions.crystal == case[name]["crystal"], name


@PARAMETERS
def test_totals_and_activity_of_the_crystal(index: int) -> None:
    case, result = CASES[index], analysed(index)
    assert {one.label: one.total for one in result.species if one.total} == case["crystal_total"]
    assert {one.label for one in result.species if one.activity.infrared} == set(case["crystal_infrared"])
    assert {one.label for one in result.species if one.activity.raman} == set(case["crystal_raman"])


@PARAMETERS
def test_molecule_to_factor_group_straight_equals_by_way_of_the_site(index: int) -> None:
    """Transitivity: the free species' characters on the site operations, induced without the site's own species."""
    row = row_of(index)
    straight = straight_correlation(row.free.group, row.units.site_group, analysed(index).factor_group)
    for one in row.correlation.vibrations:
        assert one.crystal == straight[one.species]


def test_the_silent_vibration_of_the_hexafluoroarsenate_becomes_infrared_active() -> None:
    """T2u of Oh is silent; on an S6 site it correlates with Au + Eu, both infrared active in R-3 (Fateley 1971)."""
    index = next(k for k, case in enumerate(CASES) if case["free_group"] == "Oh" and case["site_group"] == "S6")
    row = row_of(index)
    silent = next(one for one in row.correlation.vibrations if one.species == "T2u")
    rules = [activity_of(analysed(index).factor_group, label) for label in silent.crystal]
    assert silent.free.silent
    assert all(rule.infrared for rule in rules)


def summed(parts: list[Multiplicities]) -> Multiplicities:
    total: Multiplicities = {}
    for part in parts:
        for label, count in part.items():
            total[label] = total.get(label, 0) + count
    return total


@PARAMETERS
def test_origins_add_up_to_the_optic_modes(index: int) -> None:
    """Translational, librational, internal and framework modes of each species are all its optic modes."""
    result = analysed(index)
    for row in result.species:
        origin = result.molecular.origins[row.label]
        assert origin.translational + origin.librational + origin.internal + origin.framework == row.optic
        assert origin.translational >= 0
