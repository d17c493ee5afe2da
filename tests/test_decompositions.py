"""Zone-centre decompositions of 99 compounds against the literature; the sources stand in the data file."""

from __future__ import annotations

from typing import Any

import pytest
from literature import of_entry, reference

from sitesym.analysis import analyse

COMPOUNDS = reference("decompositions.toml")["compound"]


def identifier(entry: dict[str, Any]) -> str:
    return f"{entry['name']}-{entry['hermann_mauguin']}".replace(" ", "")


@pytest.mark.parametrize("entry", COMPOUNDS, ids=identifier)
def test_decomposition_agrees_with_the_literature(entry: dict[str, Any]) -> None:
    """Total, acoustic and optic species, activity and contribution of every site, with labels."""
    result = analyse(of_entry(entry), scan=False)
    rows = result.species
    assert result.symmetry.number == entry["space_group"]
    assert result.factor_group.schoenflies == entry["factor_group"]
    assert result.totals.atoms_primitive == entry["atoms_primitive"]
    assert {row.label: row.total for row in rows if row.total} == entry["total"]
    assert {row.label: row.acoustic for row in rows if row.acoustic} == entry["acoustic"]
    assert {row.label: row.optic for row in rows if row.optic} == entry["optic"]
    present = [row for row in rows if row.optic]
    assert {row.label for row in present if row.activity.infrared} == set(entry["infrared"])
    assert {row.label for row in present if row.activity.raman} == set(entry["raman"])
    assert {row.label for row in present if row.activity.silent} == set(entry["silent"])
    assert {site.label: site.contribution for site in result.sites} == entry["contributions"]


def test_the_published_cases_cover_every_crystal_system() -> None:
    """At least 25 compounds with a published decomposition, in all seven systems."""
    published = [entry for entry in COMPOUNDS if entry["status"] in ("published", "common result")]
    limits = (2, 15, 74, 142, 167, 194, 230)
    systems = {next(k for k, limit in enumerate(limits) if entry["space_group"] <= limit) for entry in COMPOUNDS}
    assert len(published) >= 25
    assert systems == set(range(7))


def test_calcite_counts_eight_infrared_five_raman_five_silent() -> None:
    """Porto, Giordmaine and Damen, Phys. Rev. 147, 608 (1966): A1g + 4Eg; 3A2u + 5Eu; 3A2g + 2A1u. From memory."""
    entry = next(one for one in COMPOUNDS if one["name"] == "calcite")
    totals = analyse(of_entry(entry), scan=False).totals
    assert (totals.infrared, totals.raman, totals.infrared_and_raman, totals.silent) == (8, 5, 0, 5)
