"""What is known of a free molecule's symmetry: its operations, its idealised shape and its deviation from that."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Vectors = NDArray[np.float64]
Matrices = NDArray[np.float64]
Permutations = NDArray[np.int64]


@dataclass(frozen=True, eq=False)
class HigherGroup:
    """The next larger group, which a little more tolerance would give.

    order: number of operations (of the finite stand-in when `linear` is set).
    deviation: largest distance of an atom from its idealised place, Å.  rms: root mean square of these distances, Å.
    needed_tolerance: the least `tolerance` at which this group is accepted, Å.
    operations: (order, 3, 3) orthogonal Cartesian matrices about the centre, in the frame of the input.
    linear: "C∞v" or "D∞h" when the larger group is that of a linear molecule, else None.
    """

    order: int
    deviation: float
    rms: float
    needed_tolerance: float
    operations: Matrices
    linear: str | None = None


@dataclass(frozen=True, eq=False)
class MoleculeSymmetry:
    """The symmetry of a free molecule, found from measured positions.

    operations: (m, 3, 3) orthogonal Cartesian matrices about `centre`, a closed group to 1e-9, the identity first.
        The group of a linear molecule or of a single atom is infinite; then a finite stand-in is held. Linear: C6v for
        C∞v and D6h for D∞h (they keep Σ, Π and Δ apart), with more operations where the required ones ask for them.
        Single atom (all rotations and the inversion, K_h): the required operations, or the identity and inversion.
    permutations: (m, n); permutations[k, i] is the index of the atom that operation k takes atom i to.
    centre: (3,) Å, the mean of the measured positions; every operation keeps it.
    idealised: (n, 3) Å, the positions averaged over the group, in the frame of the input (not shifted to the centre).
    deviation: largest distance of an atom from its idealised place, Å.  rms: root mean square of these, Å.
    needed_tolerance: the least `tolerance` at which this group is accepted, Å (see `fit.needed_tolerance`).
    linear: "C∞v" or "D∞h", else None.  axis: (3,) unit vector along a linear molecule, else None.
    next_higher: the next larger group within reach, or None.
    """

    operations: Matrices
    permutations: Permutations
    centre: Vectors
    idealised: Vectors
    deviation: float
    rms: float
    needed_tolerance: float
    linear: str | None = None
    axis: Vectors | None = None
    is_atom: bool = False
    next_higher: HigherGroup | None = None

    @property
    def is_linear(self) -> bool:
        """True for a molecule whose atoms lie on one line (two atoms at least)."""
        return self.linear is not None

    @property
    def order(self) -> int:
        """Number of operations held."""
        return len(self.operations)
