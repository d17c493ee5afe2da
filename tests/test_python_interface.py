"""What the Python interface says to callers who mix something up: plain words, never an AttributeError."""

from __future__ import annotations

import numpy as np
import pytest

import sitesym
from sitesym.structure import Occupant, Site

SALT = sitesym.Structure(
    np.eye(3) * 4.12, [[0, 0, 0], [0.5, 0.5, 0.5]], (Site("Cs", (Occupant("Cs"),)), Site("Cl", (Occupant("Cl"),)))
)


@pytest.mark.parametrize("wrong", ["calcite.cif", None, 3])
def test_analyse_wants_a_structure(wrong: object) -> None:
    with pytest.raises(sitesym.UsageError, match="takes a Structure") as caught:
        sitesym.analyse(wrong)
    assert "sitesym.read" in caught.value.mend


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        ({"axes": "foo"}, "no choice of axes"),
        ({"tolerance": "a"}, "number of Å"),
        ({"tolerance": float("nan")}, "of no use"),
        ({"tolerance": -1.0}, "of no use"),
        ({"setting": 3}, "Hermann-Mauguin symbol"),
        ({"setting": "Pnma"}, "no setting of space group 221"),
    ],
)
def test_arguments_that_make_no_sense_are_refused(arguments: dict[str, object], words: str) -> None:
    with pytest.raises(sitesym.UsageError, match=words):
        sitesym.analyse(SALT, **arguments)


def test_a_small_crystal_reads_as_expected() -> None:
    """Caesium chloride: one infrared mode, T1u, no Raman mode (common practice)."""
    assert repr(sitesym.analyse(SALT)) == "Analysis(CsCl, Pm-3m, Oh: 1 infrared, 0 Raman, 0 silent)"
