"""Run sheets for the tests of their views."""

from __future__ import annotations

from functools import lru_cache
from typing import Any

import numpy as np
from views_cases import case

from sitesym.experiment.angle_data import AngleData
from sitesym.experiment.run_sheet import RunSheet, plan

CRYSTALS = ("calcite", "alpha-quartz", "lithium niobate", "baddeleyite", "molybdenite 2H", "wurtzite (zinc oxide)")


@lru_cache(maxsize=64)
def sheet(name: str, **options: Any) -> RunSheet:
    """A run sheet of a crystal of the reference file; lists are given as tuples."""
    return plan(case(name), **options)


def measured(species: str, ratio: float = 0.3) -> AngleData:
    """Curves of a tensor diag(1, ratio) on a face, with a little noise of fixed seed, in counts."""
    degrees = np.arange(0.0, 360.0, 10.0)
    angle = np.radians(degrees)
    noise = np.random.default_rng(3).normal(0, 5, (2, len(degrees)))
    parallel = 1000 * (np.cos(angle) ** 2 + ratio * np.sin(angle) ** 2) ** 2 + noise[0]
    crossed = 1000 * ((1 - ratio) / 2 * np.sin(2 * angle)) ** 2 + noise[1]
    errors = np.full(len(degrees), 5.0)
    return AngleData(species, degrees, parallel, crossed, errors, errors)
