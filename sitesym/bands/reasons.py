"""A reason for a band: its cause, the argument of symmetry and arithmetic, and the measurement that would decide."""

from __future__ import annotations

from dataclasses import dataclass

CAUSES = (
    "fundamental", "site_splitting", "correlation_splitting", "site_activation", "overtone", "combination",
    "fermi_resonance", "longitudinal_companion", "leakage", "isotopologue", "disorder", "symmetry_lowering",
    "second_phase", "instrument", "atmosphere", "unexplained",
)  # fmt: skip


@dataclass(frozen=True, slots=True)
class Reason:
    """One reason.

    cause           one of CAUSES.
    score           0 to 1, to rank by: how well the arithmetic fits, times how common the cause is. No probability.
    argument        what allows it, in words that claim no more than the evidence.
    parents         wavenumbers (cm⁻¹) of the bands or fundamentals from which it follows.
    species         species of the factor group that it would have.
    decisive_test   a measurement that would tell.
    """

    cause: str
    score: float
    argument: str
    parents: tuple[float, ...] = ()
    species: tuple[str, ...] = ()
    decisive_test: str = ""


def ranked(reasons: list[Reason]) -> tuple[Reason, ...]:
    """The best first; of several with one cause and the same parents only the best."""
    best: dict[tuple[str, tuple[float, ...], str], Reason] = {}
    for reason in sorted(reasons, key=lambda one: -one.score):
        best.setdefault((reason.cause, reason.parents, reason.argument), reason)
    return tuple(best.values())
