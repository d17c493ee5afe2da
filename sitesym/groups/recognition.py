"""From a set of operations to the kind of point group and its main axis.

The decision follows the usual flow chart (Cotton, Chemical Applications of Group Theory, 1990, section 3.14): count
proper axes, then look for inversion and for mirrors across and along the main axis.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.groups.kind import Family, Kind
from sitesym.groups.operation import (
    Booleans,
    Floats,
    Integers,
    angles,
    axis,
    determinants,
    order_of_angle,
    proper_parts,
)

PARALLEL = 1e-4
"""Two unit vectors are parallel, or perpendicular, when the sine, or cosine, between them is below this."""


@dataclass(frozen=True, eq=False)
class Elements:
    """Every operation of a group read as: proper or not, order of its rotation part, and the axis of that part.

    orders  (n,) order of Q in R = ±Q, 1 for the identity and the inversion.
    axes    (n, 3) unit axes of Q, zero where the order is 1.
    proper  (n,) True for det = +1.
    """

    orders: Integers
    axes: Floats
    proper: Booleans

    @classmethod
    def of(cls, matrices: Floats) -> Elements:
        """Read the elements of (n, 3, 3) operations."""
        rotations = proper_parts(matrices)
        orders = np.array([order_of_angle(angle)[0] for angle in angles(rotations)])
        axes = np.array([axis(q) if n > 1 else np.zeros(3) for q, n in zip(rotations, orders, strict=True)])
        return cls(orders, axes, determinants(matrices) > 0)

    @property
    def mirrors(self) -> Booleans:
        """(n,) True for reflections: the rotation part is a half turn about the mirror's normal."""
        return np.asarray(~self.proper & (self.orders == 2))

    def along(self, direction: Floats) -> Booleans:
        """(n,) True where the axis is parallel to the unit vector `direction`."""
        return np.abs(self.axes @ direction) > 1 - PARALLEL

    def across(self, direction: Floats) -> Booleans:
        """(n,) True where the axis is perpendicular to the unit vector `direction`."""
        return (np.abs(self.axes @ direction) < PARALLEL) & (self.orders > 1)


def recognise(elements: Elements) -> tuple[Kind, Floats | None]:
    """The kind of a closed group and its main axis (None where no axis is singled out: C1, Ci, polyhedral groups)."""
    proper_order = int(elements.proper.sum())
    improper = bool((~elements.proper).any())
    inverted = bool((~elements.proper & (elements.orders == 1)).any())
    if _has_several_axes_of_order_above_two(elements):
        return Kind(_polyhedral_family(proper_order, improper, inverted)), None
    if not (elements.orders > 1).any():
        return (Kind(Family.S2N, 1) if inverted else Kind(Family.CN, 1)), None
    main = _main_axis(elements)
    n = int(elements.orders[elements.proper & elements.along(main)].max(initial=1))
    dihedral = proper_order == 2 * n
    return Kind(_axial_family(elements, main, dihedral, improper), n), main


def _has_several_axes_of_order_above_two(elements: Elements) -> bool:
    high = elements.axes[elements.proper & (elements.orders > 2)]
    return bool(len(high)) and bool((np.abs(high @ high[0]) < 1 - PARALLEL).any())


def _polyhedral_family(proper_order: int, improper: bool, inverted: bool) -> Family:
    plain = {12: Family.T, 24: Family.O, 60: Family.I}
    centred = {12: Family.TH, 24: Family.OH, 60: Family.IH}
    if not improper:
        return plain[proper_order]
    return centred[proper_order] if inverted else Family.TD


def _main_axis(elements: Elements) -> Floats:
    """The axis of highest order, an improper one (S4 of D2d) counting by its own order."""
    rank = elements.orders * 2 + elements.proper
    rank = np.where(elements.mirrors, 3, rank)
    crowd = np.array([elements.along(vector).sum() for vector in elements.axes])
    return np.asarray(elements.axes[np.lexsort((crowd, rank))[-1]])


def _axial_family(elements: Elements, main: Floats, dihedral: bool, improper: bool) -> Family:
    if not improper:
        return Family.DN if dihedral else Family.CN
    if (elements.mirrors & elements.along(main)).any():
        return Family.DNH if dihedral else Family.CNH
    if dihedral:
        return Family.DND
    return Family.CNV if (elements.mirrors & elements.across(main)).any() else Family.S2N
