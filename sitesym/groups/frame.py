"""The axes to which the labels of species refer.

A frame is three orthonormal rows x', y', z' in the group's Cartesian axes, z' along the main axis. Which of the
equivalent choices is taken follows the preferred axes handed in (of a crystal: x, y, z; of a molecule: its own), by
the rules of the design: cyclic x', y' about a polar axis; x' along a preferred axis where it can be.
"""

from __future__ import annotations

from itertools import permutations

import numpy as np

from sitesym.groups.kind import Family, Kind
from sitesym.groups.operation import Floats, upward
from sitesym.groups.recognition import PARALLEL, Elements

_TRIAXIAL = {Family.T, Family.TH, Family.TD, Family.O, Family.OH}


def choose_frame(kind: Kind, main: Floats | None, elements: Elements, preferred: Floats) -> Floats:
    """Frame (3, 3) for a group of this kind; `preferred` (3, 3) has the axes to follow as rows."""
    if kind.family in _TRIAXIAL:
        return _match(_cubic_axes(kind, elements), preferred)
    if kind.is_polyhedral:
        return _icosahedral_frame(elements, preferred)
    if main is None:
        return preferred
    if kind.n == 2 and kind.family in (Family.DN, Family.DNH):
        return _match(_unique(elements.axes[elements.orders == 2]), preferred)
    third = _nearest(preferred, main)
    z = main * np.sign(main @ preferred[third] or 1.0)
    wanted = preferred[(third + 1) % 3]
    x = _polar_x(elements, z, wanted) if kind == Kind(Family.CNV, 2) else _projected(wanted, z)
    return np.array([x, np.cross(z, x), z])


def reference_azimuth(kind: Kind, elements: Elements, frame: Floats) -> float:
    """Azimuth in radians, from x', of the line φ -> 2μ - φ of those two-fold elements under which B1 is symmetric.

    For C2v that is the mirror containing x' (Mulliken). Else it is the twofold axis, or the mirror's *normal*, nearest
    to x': the element in the second place of the Hermann-Mauguin symbol; the line of a mirror is across its normal.
    """
    if kind == Kind(Family.CNV, 2):
        return 0.0
    across = elements.across(frame[2])
    chosen = across & (elements.mirrors if kind.family is Family.CNV else elements.proper)
    if kind.is_polyhedral or not chosen.any():
        return 0.0
    directions = elements.axes[chosen]
    best = directions[np.argmax(np.round(np.abs(directions @ frame[0]), 6))]
    normal = float(np.arctan2(best @ frame[1], best @ frame[0]))
    return normal + np.pi / 2 if kind.family is Family.CNV else normal


def _cubic_axes(kind: Kind, elements: Elements) -> Floats:
    order = 4 if kind.family in (Family.O, Family.OH, Family.TD) else 2
    return _unique(elements.axes[elements.orders == order])


def _icosahedral_frame(elements: Elements, preferred: Floats) -> Floats:
    """Three perpendicular twofold axes, turned so that a fivefold axis lies at (0, 1, golden ratio)."""
    twofold = _unique(elements.axes[elements.orders == 2])
    z = twofold[np.argmax(np.round(np.abs(twofold @ preferred[2]), 6))]
    x = next(vector for vector in twofold if abs(vector @ z) < PARALLEL)
    frame = np.array([x, np.cross(z, x), z])
    local = np.abs(elements.axes[elements.orders == 5] @ frame.T)
    in_place = (local[:, 0] < PARALLEL) & (local[:, 2] > local[:, 1])
    return frame if in_place.any() else np.array([frame[1], -frame[0], frame[2]])


def _unique(vectors: Floats) -> Floats:
    kept: list[Floats] = []
    for vector in vectors:
        if all(abs(vector @ other) < 1 - PARALLEL for other in kept):
            kept.append(vector)
    return np.array(kept)


def _match(axes: Floats, preferred: Floats) -> Floats:
    """Three mutually perpendicular axes put into the order and sense that suits the preferred ones best."""
    orders = list(permutations(range(3)))
    fits = [sum(abs(axes[order[k]] @ preferred[k]) for k in range(3)) for order in orders]
    chosen = axes[list(orders[int(np.argmax(np.round(fits, 6)))])]
    x, z = (chosen[k] * np.sign(chosen[k] @ preferred[k] or 1.0) for k in (0, 2))
    return np.array([x, np.cross(z, x), z])


def _nearest(preferred: Floats, vector: Floats) -> int:
    """Index of the preferred axis nearest to a line; of equals z before x before y."""
    closeness = np.round(np.abs(preferred @ vector), 6)
    return max((2, 0, 1), key=lambda index: closeness[index])


def _projected(wanted: Floats, z: Floats) -> Floats:
    flat = wanted - (wanted @ z) * z
    return np.asarray(flat / np.linalg.norm(flat))


def _polar_x(elements: Elements, z: Floats, wanted: Floats) -> Floats:
    normals = elements.axes[elements.mirrors & elements.across(z)]
    closeness = np.round(np.abs(normals @ wanted), 6)
    best = max(range(len(normals)), key=lambda k: (closeness[k], round(float(normals[k].sum()), 6)))
    chosen = normals[best]
    return np.asarray(chosen * np.sign(chosen @ wanted)) if closeness[best] else upward(chosen)
