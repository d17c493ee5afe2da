"""The search for the symmetry operations of a free molecule from measured, distorted positions.

1. Candidates: permutations of the atoms that nearly keep all distances, each with its best proper or improper matrix.
2. Growth: starting from the operations that the crystal requires, candidates are added one by one, those with the
   smallest misfit first, each time with all their products. A larger group is kept when symmetrising the positions by
   it needs no more than the tolerance (`fit.needed_tolerance`). Growth is repeated from every candidate that was left
   out, and the largest group wins (of equal ones the one that needs the least tolerance). Mostly all likely candidates
   together are a group that passes; that is tried first.
3. The matrices are fitted again to the symmetrised positions until they are an exact group.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence

import numpy as np
from numpy.typing import NDArray

from sitesym.errors import InconsistencyError, UsageError
from sitesym.molecule_symmetry.candidates import Candidates, find_candidates, operation_keys
from sitesym.molecule_symmetry.closure import ProductTable, largest_closure_error
from sitesym.molecule_symmetry.fit import Fit, fit_group, measure
from sitesym.molecule_symmetry.linear import LinearFit, linear_fits
from sitesym.molecule_symmetry.required import RequiredGroup, required_group
from sitesym.molecule_symmetry.result import HigherGroup, MoleculeSymmetry, Vectors

DEFAULT_TOLERANCE = 0.25
"""Å. Five times the scatter (0.05 Å in each coordinate) up to which a group should be recovered.

Measured on the 89 molecules of the tests at random scatters: 1780 of 1780 right at 0.02 Å, 3556 of 3560 at 0.05 Å
(ammonia, 0.29 Å from planar, was once taken for planar; three were told too low), three in ten at 0.1 Å, where a
tolerance of 0.5 Å recovers 97 %. It cannot see everything: one atom out of place by 0.3 Å is noticed in 9 cases of 10
when it is one of six alike or more, but hardly ever as one of two, for symmetrising moves each of them by 0.15 Å, no
more than scatter.
"""

REACH_FACTOR = 1.5
"""The next higher group is looked for up to this many tolerances."""

LIKELY_FACTOR = 1.5
"""A candidate whose misfit exceeds this many tolerances is not used to grow a group (it may belong to a higher one)."""

ALONE_FACTOR = 1.2
"""Nor is one that alone needs this many tolerances; some room is left, for a larger group may need a little less."""

LARGEST_TOLERANCE = 1.0
SMALLEST_DISTANCE = 0.1
CLOSURE_LIMIT = 1e-9
REQUIRED_LIMIT = 1e-6


def find_operations(
    elements: Sequence[str],
    positions: NDArray[np.float64],
    *,
    tolerance: float = DEFAULT_TOLERANCE,
    required: Sequence[NDArray[np.float64]] | None = None,
) -> MoleculeSymmetry:
    """Find the largest point group of a free molecule within a tolerance.

    elements: n names, compared as they are (whether deuterium is hydrogen is for the caller to say).
    positions: (n, 3) Cartesian, Å.
    tolerance: Å, above 0 and at most 1: the furthest that symmetrising may move an atom; atoms of which there are only
        a few alike, and the molecule as a whole, are held to a stricter limit (`fit.needed_tolerance`). It speaks of a
        scatter of a fifth of it in each coordinate, so the default of 0.25 Å recovers groups at 0.05 Å.
    required: orthogonal Cartesian matrices about the mean of the positions, in the frame of the positions, which the
        result must contain (the site group). They are closed to a group, and the frame of the result is aligned to it.

    Raises UsageError for unusable input, InconsistencyError where the molecule does not have a required operation.
    """
    kinds, points = _checked(elements, positions, tolerance)
    centre = points.mean(axis=0)
    group = required_group(required, kinds, points - centre, tolerance)
    shape = group.symmetrised(points - centre)
    if len(kinds) == 1:
        return _atom(centre, group, has_required=required is not None)
    linear = linear_fits(kinds, shape, group, REACH_FACTOR * tolerance)
    chosen = next((option for option in linear if option.fit.needed_tolerance <= tolerance), None)
    if chosen is not None:
        higher = [option for option in linear if option.fit.needed_tolerance > tolerance]
        return _result(chosen.fit, points, group, chosen, _higher(higher, [], tolerance))
    best, above = _nonlinear(kinds, shape, group, tolerance)
    return _result(best, points, group, None, _higher(linear, above, tolerance))


def _checked(
    elements: Sequence[str], positions: NDArray[np.float64], tolerance: float
) -> tuple[NDArray[np.int64], Vectors]:
    """Return the elements as integers (n,) and the positions as floats (n, 3), or raise UsageError."""
    points = np.asarray(positions, dtype=float)
    if len(elements) == 0 or points.shape != (len(elements), 3):
        raise UsageError(
            f"A molecule needs one position of three numbers for each of its {len(elements)} atoms; "
            f"the array has the shape {points.shape}.",
            "Give at least one atom, and positions of shape (n, 3) in Å.",
        )
    if not np.isfinite(points).all():
        atom = int(np.flatnonzero(~np.isfinite(points).all(axis=1))[0])
        raise UsageError(f"The position of atom {atom + 1} ({elements[atom]}) is not finite.", "Leave the atom out.")
    if not 0 < tolerance <= LARGEST_TOLERANCE:
        raise UsageError(
            f"The tolerance for a molecule's symmetry is {tolerance} Å.",
            f"It must be above 0 and at most {LARGEST_TOLERANCE} Å.",
        )
    _refuse_coincident(elements, points)
    return np.unique(np.asarray(elements, dtype=str), return_inverse=True)[1].astype(np.int64), points


def _refuse_coincident(elements: Sequence[str], points: Vectors) -> None:
    """Raise UsageError where two atoms are on one place."""
    gaps = ((points[:, None] - points[None]) ** 2).sum(axis=2)
    close = np.argwhere(np.triu(gaps < SMALLEST_DISTANCE**2, 1))
    if len(close):
        first, second = close[0]
        raise UsageError(
            f"Atoms {first + 1} ({elements[first]}) and {second + 1} ({elements[second]}) of the molecule are only "
            f"{np.sqrt(gaps[first, second]):.3f} Å apart.",
            "Keep one of two alternative positions of a disordered atom.",
        )


def _nonlinear(
    kinds: NDArray[np.int64], shape: Vectors, group: RequiredGroup, tolerance: float
) -> tuple[Fit, list[Fit]]:
    """Return the fit of the largest group within the tolerance, and those of the larger ones within reach."""
    found = find_candidates(kinds, shape, REACH_FACTOR * tolerance)
    search = _Search(shape, *_with_required(found, shape, group))
    members = search.largest(tolerance)
    return search.fit(members), search.above(members)


def _with_required(found: Candidates, shape: Vectors, group: RequiredGroup) -> tuple[Candidates, frozenset[int]]:
    """Put the required operations first among the candidates; return both and the indices of the required ones."""
    required_keys = operation_keys(group.permutations, group.signs, found.base)
    others = ~np.isin(operation_keys(found.permutations, found.signs, found.base), required_keys)
    permutations = np.concatenate([group.permutations, found.permutations[others]])
    signs = np.concatenate([group.signs, found.signs[others]])
    misfit = np.concatenate([np.zeros(len(group.signs)), found.misfit[others]])
    return Candidates(permutations, signs, misfit, found.base), frozenset(range(len(group.signs)))


class _Search:
    """Groups of candidates, each fitted once."""

    def __init__(self, shape: Vectors, candidates: Candidates, required: frozenset[int]) -> None:
        self._shape, self._candidates, self._required = shape, candidates, required
        self._table = ProductTable(candidates)
        self._fits: dict[frozenset[int], Fit] = {}

    def fit(self, members: frozenset[int]) -> Fit:
        """Return the fit of a closed set of candidates."""
        if members not in self._fits:
            chosen = sorted(members)
            signs = self._candidates.signs[chosen]
            self._fits[members] = fit_group(self._shape, self._candidates.permutations[chosen], signs)
        return self._fits[members]

    def largest(self, tolerance: float) -> frozenset[int]:
        """Return the largest group that needs no more than the tolerance."""
        likely = np.flatnonzero(self._candidates.misfit <= LIKELY_FACTOR * tolerance).tolist()
        whole = self._table.group(likely)
        if whole is not None and self.fit(whole).needed_tolerance <= tolerance:
            return whole
        return self._largest_grown(self._promising(likely, tolerance), tolerance)

    def _promising(self, likely: Sequence[int], tolerance: float) -> list[int]:
        """Return the candidates that alone (with the required ones) need little more than the tolerance, best first."""
        needed = {}
        for candidate in likely:
            group = self._table.group([*self._required, candidate])
            if group is not None:
                needed[candidate] = self.fit(group).needed_tolerance
        return sorted((c for c in needed if needed[c] <= ALONE_FACTOR * tolerance), key=needed.__getitem__)

    def _largest_grown(self, promising: Sequence[int], tolerance: float) -> frozenset[int]:
        """Grow a group from every candidate that no group holds yet, and return the largest."""
        best = self._grown(self._required, promising, tolerance)
        tried = set(best)
        for candidate in promising:
            start = None if candidate in tried else self._joined(self._required, candidate, tolerance)
            if start is not None:
                other = self._grown(start, promising, tolerance)
                tried |= other
                best = max(best, other, key=lambda group: (len(group), -self.fit(group).needed_tolerance))
        return best

    def _grown(self, start: frozenset[int], promising: Sequence[int], tolerance: float) -> frozenset[int]:
        """Add candidates to a group, in the order given, until no more can be added."""
        group, settled = start, set(start)
        while True:
            candidate = next((c for c in promising if c not in settled), None)
            if candidate is None:
                return group
            larger = self._joined(group, candidate, tolerance)
            settled = settled | self._table.double_coset(group, candidate) if larger is None else set(larger)
            group = larger or group

    def _joined(self, group: frozenset[int], candidate: int, tolerance: float) -> frozenset[int] | None:
        """Return the group with a candidate and all products, or None if it needs more than the tolerance."""
        larger = self._table.group([*group, candidate])
        if larger is None or self.fit(larger).needed_tolerance > tolerance:
            return None
        return larger

    def above(self, group: frozenset[int]) -> list[Fit]:
        """Return the fits of the groups that one more candidate leads to."""
        settled, larger = set(group), set()
        for candidate in range(len(self._candidates.signs)):
            if candidate not in settled:
                settled |= self._table.double_coset(group, candidate)
                larger.add(self._table.group([*group, candidate]))
        return [self.fit(members) for members in larger if members is not None]


def _higher(linear: Iterable[LinearFit], above: Iterable[Fit], tolerance: float) -> HigherGroup | None:
    """Return the next higher group within reach: the one that needs the least tolerance."""
    options: list[tuple[Fit, str | None]] = [(option.fit, option.name) for option in linear]
    options += [(fit, None) for fit in above]
    near = [option for option in options if option[0].needed_tolerance <= REACH_FACTOR * tolerance]
    if not near:
        return None
    fit, name = min(near, key=lambda option: (option[0].needed_tolerance, len(option[0].matrices)))
    return HigherGroup(len(fit.matrices), fit.deviation, fit.rms, fit.needed_tolerance, fit.matrices, name)


def _result(
    fit: Fit, points: Vectors, group: RequiredGroup, linear: LinearFit | None, higher: HigherGroup | None
) -> MoleculeSymmetry:
    """Check the group, put its operations into a fixed order and go back to the frame of the input."""
    _check_group(fit, group)
    centre = points.mean(axis=0)
    order = _fixed_order(fit)
    distances = np.sqrt(((points - centre - fit.idealised) ** 2).sum(axis=1))
    return MoleculeSymmetry(
        operations=fit.matrices[order],
        permutations=fit.permutations[order],
        centre=centre,
        idealised=fit.idealised + centre,
        deviation=float(distances.max()),
        rms=float(np.sqrt((distances**2).mean())),
        needed_tolerance=fit.needed_tolerance,
        linear=linear.name if linear else None,
        axis=linear.axis if linear else None,
        next_higher=higher,
    )


def _fixed_order(fit: Fit) -> NDArray[np.int64]:
    """Return the order: proper operations first, among them those of small angle first, then by the permutation."""
    traces = np.round(np.trace(fit.matrices, axis1=1, axis2=2), 6)
    proper = np.linalg.det(fit.matrices) > 0
    return np.asarray(np.lexsort((*fit.permutations.T[::-1], -traces, ~proper)), dtype=np.int64)


def _check_group(fit: Fit, group: RequiredGroup) -> None:
    """Raise InconsistencyError unless the matrices close to 1e-9 and contain the required ones to 1e-6."""
    error = largest_closure_error(fit.matrices)
    gaps = np.abs(group.matrices[:, None] - fit.matrices[None]).max(axis=(2, 3)).min(axis=1)
    if error > CLOSURE_LIMIT or gaps.max() > REQUIRED_LIMIT:
        raise InconsistencyError(
            f"The operations found for the molecule are no exact group (closure {error:.1e}) or lack a required one "
            f"(off by {gaps.max():.1e}).",
            "Try a smaller molecule tolerance; check that the required operations are exact.",
        )


def _atom(centre: Vectors, group: RequiredGroup, *, has_required: bool) -> MoleculeSymmetry:
    """Return the symmetry of a single atom: all rotations and the inversion, held as a finite stand-in."""
    matrices = group.matrices if has_required else np.array([np.eye(3), -np.eye(3)])
    permutations = np.zeros((len(matrices), 1), dtype=np.int64)
    fit = measure(np.zeros((1, 3)), matrices, permutations)
    return MoleculeSymmetry(matrices, fit.permutations, centre, centre[None], 0.0, 0.0, 0.0, is_atom=True)
