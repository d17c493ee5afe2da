"""The axes of a free molecule to which the labels of its species refer.

z is the main axis. Planar C2v: x is normal to the plane; planar D2h: x normal to the plane and z through the most atoms
(else across the most bonds), as Mulliken recommends (J. Chem. Phys. 23, 1997, 1955). By the same counsel the plane of
most atoms is yz in other C2v molecules, and the twofold axis through most atoms is z in other D2, D2h ones. Where two
sets of twofold axes or mirrors compete (D4h, D6h, C4v, …), C2′ and σv are those through the most atoms.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from sitesym.groups.kind import Family, Kind
from sitesym.groups.operation import Floats
from sitesym.groups.point_group import PointGroup

_ON = 0.1
"""Å. An atom within this distance of an axis or plane lies on it (the positions are idealised)."""


def molecule_group(operations: Floats, positions: Floats, bonds: Sequence[tuple[int, int]]) -> PointGroup:
    """The point group of a free molecule with its labels on the molecule's own axes.

    operations  (g, 3, 3) about the centre; positions (n, 3) Å from the centre, of exactly that symmetry.
    """
    plain = PointGroup.of(operations)
    if plain.kind.is_polyhedral or not (plain.elements.orders > 1).any():
        return plain
    preferred = _preferred(plain, positions, bonds)
    return PointGroup.of(operations, preferred)


def _preferred(group: PointGroup, positions: Floats, bonds: Sequence[tuple[int, int]]) -> Floats:
    if group.kind in (Kind(Family.DN, 2), Kind(Family.DNH, 2)):
        return _three_axes(group, positions, bonds)
    z = group.frame[2]
    x = _second_axis(group, positions, z)
    return np.array([x, np.cross(z, x), z])


def _three_axes(group: PointGroup, positions: Floats, bonds: Sequence[tuple[int, int]]) -> Floats:
    """D2 and D2h: z through the most atoms, then across the most bonds; x normal to the plane, else the poorest."""
    axes = group.frame
    middles = np.array([(positions[i] + positions[j]) / 2 for i, j in bonds]).reshape(-1, 3)
    wealth = [(_count_on_axis(positions, axis), _count_on_axis(middles, axis)) for axis in axes]
    flat = [int((np.abs(positions @ axis) < _ON).sum()) for axis in axes]
    x = max(range(3), key=lambda k: (flat[k] == len(positions), tuple(-n for n in wealth[k])))
    z = max((k for k in range(3) if k != x), key=lambda k: wealth[k])
    return np.array([axes[x], np.cross(axes[z], axes[x]), axes[z]])


def _second_axis(group: PointGroup, positions: Floats, z: Floats) -> Floats:
    """x: along the twofold axis through the most atoms, or normal to the mirror that holds the most."""
    elements = group.elements
    across = elements.across(z)
    mirrors = group.kind.family is Family.CNV
    candidates = elements.axes[across & (elements.mirrors if mirrors else elements.proper)]
    if not len(candidates):
        return np.asarray(np.linalg.svd(z[None])[2][1])
    measure = _count_in_plane if mirrors else _count_on_axis
    return np.asarray(candidates[int(np.argmax([measure(positions, axis) for axis in candidates]))])


def _count_on_axis(points: Floats, axis: Floats) -> int:
    away = points - (points @ axis)[:, None] * axis
    return int((np.linalg.norm(away, axis=1) < _ON).sum())


def _count_in_plane(points: Floats, normal: Floats) -> int:
    return int((np.abs(points @ normal) < _ON).sum())
