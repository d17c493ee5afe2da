"""What to know before a fit of angle-resolved curves is believed, in plain sentences."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from sitesym.experiment.fitted import FittedValue
from sitesym.groups.operation import Floats

_OFFSET_DOUBT, _PHASE_DOUBT, _RATIO_DOUBT = 15.0, 40.0, 0.5
_REAL = 20.0
_TOGETHER = 0.98
_RARE = 1e-3


def spoken(name: str) -> str:
    """`the offset`, `b/a`."""
    return f"the {name}" if name in ("scale", "offset", "background") or name.startswith("phase") else name


def undecided_sentence(name: str, partners: Sequence[str], value: FittedValue) -> str:
    """The data leave something open; `partners` are those that make up for it."""
    held = f"{spoken(name)} was held at {value.value:.4g}{value.unit}."
    if not partners:
        return f"The data say nothing about {spoken(name)}: these curves do not depend on it; {held}"
    names = [spoken(one) for one in (name, *partners)]
    return (
        f"The data cannot decide between {', '.join(names[:-1])} and {names[-1]}: a change of one is made up for by "
        f"the others; {held}"
    )


def doubts(
    values: Sequence[FittedValue], correlations: Floats, probability: float | None, *, phases: bool
) -> tuple[str, ...]:
    """Values that are hardly decided, pairs that are decided only together, and a fit that is too bad or too good.

    correlations  (p, p) of those values that were not held, in their order.
    """
    fitted = [value for value in values if not value.held]
    said = [_loose(value) for value in fitted]
    said += _pairs([value.name for value in fitted], correlations)
    said.append(_quality(probability))
    background = next((value for value in fitted if value.name == "background"), None)
    if background is not None and background.error is not None and background.value < -3 * background.error:
        said.append("The background is negative, which a measured band cannot have: check what was subtracted before.")
    if phases:
        said.append("All phases may be reversed together: intensities do not tell.")
    return tuple(sentence for sentence in said if sentence)


def _loose(value: FittedValue) -> str:
    error = value.error if value.error is not None else 0.0
    limit = _RATIO_DOUBT if "/" in value.name else np.inf
    if value.name == "offset":
        limit = _OFFSET_DOUBT
    if value.name.startswith("phase"):
        limit = _PHASE_DOUBT
    if error < limit:
        return ""
    if value.name.startswith("phase") and abs(np.sin(np.radians(value.value))) < np.sin(np.radians(_REAL)):
        figure = f"{round(value.value, 1) + 0.0:g}°"
        return f"The phase comes out as {figure}, where intensities hardly change with it: real letters do."
    how = "not at all at this point" if not np.isfinite(error) else f"only to within {error:.2g}{value.unit}"
    return f"The data decide {spoken(value.name)} {how}; its standard error is no more than a hint."


def _pairs(names: Sequence[str], correlations: Floats) -> list[str]:
    return [
        f"{spoken(first).replace('the ', 'The ', 1)} and {spoken(second)} are decided together, hardly "
        f"each alone (correlation {correlations[i, j]:.3f})."
        for i, first in enumerate(names)
        for j, second in enumerate(names)
        if i < j and abs(correlations[i, j]) > _TOGETHER
    ]


def _quality(probability: float | None) -> str:
    if probability is None:
        return ""
    if probability < _RARE:
        return (
            "The curves lie further from the fit than the stated errors allow: the assignment, the assumption that "
            "light keeps its polarization, or the errors are wrong."
        )
    if probability > 1 - _RARE:
        return "The curves lie closer to the fit than the stated errors make likely: the errors may be too large."
    return ""
