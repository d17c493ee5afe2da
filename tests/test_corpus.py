"""Every real file beside the project: the reference numbers, found by an independent route, and no crash anywhere.

The references were found with characters over the irreducible representations of a general library, at 0.01 Å. One is
wrong (see WRONG_REFERENCE); the proof stands in test_reading_corpus.
"""

from __future__ import annotations

import json
from functools import lru_cache
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from literature import CORPUS
from straight import straight_correlation

import sitesym
from sitesym.errors import SitesymError

WRONG_REFERENCE = "2005206"
"""One listed operation lost a sign; the reference expanded it as it stands. Hall and other symbols give P2_1/n."""

UNREADABLE = {"1001012", "1010800", "6000106", "2103919"}
"""Three list no coordinates, one no symmetry."""

pytestmark = pytest.mark.skipif(not CORPUS.is_dir(), reason=f"no corpus of real files at {CORPUS}")


def load(name: str) -> dict[str, Any]:
    path = CORPUS / name
    return json.loads(path.read_text(encoding="utf-8")) if path.is_file() else {}


CIFS, POSCARS = load("cif_reference.json"), load("poscar_reference.json")


def path_of(kind: str, name: str) -> Path:
    return CORPUS / kind / (f"{name}.cif" if kind == "cif" else name)


@lru_cache(maxsize=8)
def analysed(kind: str, name: str) -> sitesym.Analysis:
    return sitesym.analyse(sitesym.read(path_of(kind, name)), scan=False)


def label_free(analysis: sitesym.Analysis) -> dict[str, Any]:
    totals = analysis.totals
    rows = [
        [row.dimension, row.optic, row.activity.infrared, row.activity.raman] for row in analysis.species if row.optic
    ]
    return {
        "space_group": analysis.symmetry.number,
        "atoms_primitive": totals.atoms_primitive,
        "ir": totals.infrared,
        "raman": totals.raman,
        "ir_and_raman": totals.infrared_and_raman,
        "silent": totals.silent,
        "species": sorted(rows),
    }


def expected(reference: dict[str, Any]) -> dict[str, Any]:
    keys = ("space_group", "atoms_primitive", "ir", "raman", "ir_and_raman", "silent")
    return {key: reference[key] for key in keys} | {"species": sorted(reference["species"])}


REFERENCED = [name for name, entry in CIFS.items() if "reference" in entry and name != WRONG_REFERENCE]
OTHERS = [name for name, entry in CIFS.items() if "reference" not in entry]


@pytest.mark.parametrize("name", REFERENCED)
def test_cif_agrees_with_its_reference(name: str) -> None:
    analysis = analysed("cif", name)
    assert label_free(analysis) == expected(CIFS[name]["reference"])
    check_transitivity(analysis)


@pytest.mark.parametrize("name", POSCARS)
def test_poscar_agrees_with_its_reference(name: str) -> None:
    analysis = analysed("poscar", name)
    assert label_free(analysis) == expected(POSCARS[name])
    check_transitivity(analysis)


def test_the_file_with_a_misprinted_operation_is_read_by_its_symbols() -> None:
    analysis = analysed("cif", WRONG_REFERENCE)
    assert analysis.symmetry.number == 14
    assert any(caution.code == "symmetry_not_closed" for caution in analysis.cautions)


@pytest.mark.parametrize("name", OTHERS)
def test_every_other_file_gives_a_result_or_a_clear_error(name: str) -> None:
    if name in UNREADABLE:
        with pytest.raises(SitesymError) as caught:
            analysed("cif", name)
        assert caught.value.problem
        assert caught.value.mend
        assert len(str(caught.value).splitlines()) <= 2
    else:
        check_transitivity(analysed("cif", name))


def check_transitivity(analysis: sitesym.Analysis) -> None:
    """Molecule to factor group straight equals by way of the site, for every molecule that the corpus offers."""
    for row in analysis.molecular.molecules:
        straight = straight_correlation(row.free.group, row.units.site_group, analysis.factor_group)
        for one in row.correlation.vibrations:
            assert one.crystal == straight[one.species]
        assert np.isfinite(row.free.positions).all()
