"""A point group in an actual orientation: its operations, name, species and classes.

This is the one value that the rest of the package computes with. It is made from matrices, never from a name.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property, lru_cache

import numpy as np

from sitesym.errors import InconsistencyError
from sitesym.groups.frame import choose_frame, reference_azimuth
from sitesym.groups.irreps import Labelling, Representation, representations
from sitesym.groups.kind import Family, Kind
from sitesym.groups.operation import Floats, Integers, index_of
from sitesym.groups.recognition import Elements, recognise

_LINEAR_SAMPLE = 12
"""Order of the axis of the finite group that stands for a linear one: enough for tensors of rank up to five."""


@dataclass(frozen=True, eq=False)
class PointGroup:
    """A closed group of orthogonal matrices with the axes to which its labels refer.

    matrices   (n, 3, 3) in Cartesian axes, identity anywhere.
    labelling  kind, frame and reference azimuth.
    """

    matrices: Floats
    labelling: Labelling

    @classmethod
    def of(cls, matrices: Floats, preferred: Floats | None = None) -> PointGroup:
        """Recognise a group.

        matrices   (n, 3, 3) orthogonal to about 1e-6, closed under multiplication.
        preferred  (3, 3) rows: the axes that the labels should follow (of the crystal, say); Cartesian by default.

        Raises InconsistencyError when the matrices are no group.
        """
        axes = np.eye(3) if preferred is None else np.asarray(preferred, dtype=float)
        stack = np.ascontiguousarray(matrices, dtype=float)
        return _recognised(stack.tobytes(), len(stack), np.ascontiguousarray(axes).tobytes())

    @classmethod
    def linear(cls, axis: Floats, centred: bool, preferred: Floats | None = None) -> PointGroup:
        """C∞v, or D∞h when `centred`, about a direction; its operations are a finite sample (C12v or D12h)."""
        axes = np.eye(3) if preferred is None else np.asarray(preferred, dtype=float)
        frame = choose_frame(Kind(Family.CN, 3), axis / np.linalg.norm(axis), _NO_ELEMENTS, axes)
        kind = Kind(Family.LINEAR_CENTRED if centred else Family.LINEAR)
        return cls(frame.T @ _linear_sample(centred) @ frame, Labelling(kind, frame, 0.0))

    def __len__(self) -> int:
        return len(self.matrices)

    def __repr__(self) -> str:
        return f"PointGroup({self.schoenflies}, order {len(self)})"

    @property
    def kind(self) -> Kind:
        """Family and order of the axis."""
        return self.labelling.kind

    @property
    def schoenflies(self) -> str:
        """`D3d`."""
        return self.kind.schoenflies

    @property
    def hermann_mauguin(self) -> str:
        """Symbol of the class, without orientation."""
        return self.kind.hermann_mauguin

    @property
    def frame(self) -> Floats:
        """(3, 3) rows x', y', z' of the labels."""
        return self.labelling.frame

    @property
    def has_inversion(self) -> bool:
        """Whether infrared and Raman exclude each other."""
        return self.kind.has_inversion

    @cached_property
    def species(self) -> tuple[Representation, ...]:
        """All species in the order of printed tables, evaluated on `matrices`."""
        return representations(self.labelling, self.matrices)

    def species_on(self, matrices: Floats) -> tuple[Representation, ...]:
        """All species evaluated on any operations (m, 3, 3) that belong to the group."""
        return representations(self.labelling, matrices)

    @cached_property
    def elements(self) -> Elements:
        """Orders and axes of the operations."""
        return Elements.of(self.matrices)

    @cached_property
    def products(self) -> Integers:
        """(n, n) multiplication table: the index of matrices[i] @ matrices[j]."""
        return _multiplication(self.matrices)

    @cached_property
    def classes(self) -> tuple[tuple[int, ...], ...]:
        """Conjugacy classes as tuples of indices, each led by its first operation."""
        inverses = np.argmax(self.products == self.identity, axis=1)
        found: dict[tuple[int, ...], None] = {}
        for g in range(len(self)):
            conjugates = self.products[self.products[:, g], inverses]
            found.setdefault(tuple(sorted(set(conjugates.tolist()))))
        return tuple(found)

    @cached_property
    def identity(self) -> int:
        """Index of the identity."""
        return int(index_of(np.eye(3)[None], self.matrices)[0])

    def subgroup(self, indices: Integers, preferred: Floats | None = None) -> PointGroup:
        """The group of the chosen operations, its labels following `preferred` (by default Cartesian) axes."""
        return PointGroup.of(self.matrices[indices], preferred)


_NO_ELEMENTS = Elements(np.zeros(0, dtype=np.int64), np.zeros((0, 3)), np.zeros(0, dtype=bool))


@lru_cache(maxsize=512)
def _recognised(data: bytes, count: int, preferred: bytes) -> PointGroup:
    matrices = np.frombuffer(data).reshape(count, 3, 3)
    axes = np.frombuffer(preferred).reshape(3, 3)
    if (_multiplication(matrices) < 0).any():
        raise InconsistencyError(
            f"{count} point operations do not form a group.", "Try another tolerance, or check the structure."
        )
    elements = Elements.of(matrices)
    kind, main = recognise(elements)
    frame = choose_frame(kind, main, elements, axes)
    return PointGroup(matrices, Labelling(kind, frame, reference_azimuth(kind, elements, frame)))


def _multiplication(matrices: Floats) -> Integers:
    count = len(matrices)
    products = (matrices[:, None] @ matrices[None]).reshape(-1, 3, 3)
    return index_of(products, matrices).reshape(count, count)


@lru_cache(maxsize=2)
def _linear_sample(centred: bool) -> Floats:
    turns = 2 * np.pi * np.arange(_LINEAR_SAMPLE) / _LINEAR_SAMPLE
    rotations = np.zeros((_LINEAR_SAMPLE, 3, 3))
    rotations[:, 0, 0] = rotations[:, 1, 1] = np.cos(turns)
    rotations[:, 1, 0] = np.sin(turns)
    rotations[:, 0, 1] = -np.sin(turns)
    rotations[:, 2, 2] = 1
    mirrored = np.concatenate([rotations, rotations @ np.diag([1.0, -1.0, 1.0])])
    return np.concatenate([mirrored, -mirrored]) if centred else mirrored
