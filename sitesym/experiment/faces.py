"""Faces worth having, by crystal system: those to assume where none is named, and those that may help besides."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from sitesym.analysis import Analysis
from sitesym.geometry.directions import face_normal
from sitesym.groups.operation import Floats

_CUBIC = ("001", "110", "111")
_HEXAGONAL = ("001", "010", "2-10")
_TETRAGONAL = ("001", "100", "110")
_OTHER = ("001", "100", "010")
_BESIDES = ("110", "1-10", "101", "011", "111", "120", "210")
_PARALLEL = 1 - 1e-6


def sensible_faces(analysis: Analysis) -> tuple[str, ...]:
    """Three simple faces that together show most: pinacoid and prisms, those across a Cartesian axis first.

    In hexagonal axes (010) is across y and (2-10) across x.
    """
    number = analysis.symmetry.number
    if number >= 195:
        return _CUBIC
    if number >= 143:
        return _HEXAGONAL
    if number >= 75:
        return _TETRAGONAL
    return tuple(sorted(_OTHER, key=lambda face: not _is_across_an_axis(face, analysis.symmetry.lattice)))


def helpful_faces(analysis: Analysis, faces: Sequence[str]) -> tuple[str, ...]:
    """Simple faces that are not parallel to any of those at hand, the simplest first."""
    lattice = analysis.symmetry.lattice
    known = [face_normal(face, lattice).vector for face in faces]
    offered = dict.fromkeys((*sensible_faces(analysis), *_BESIDES))
    return tuple(face for face in offered if not _is_among(face_normal(face, lattice).vector, known))


def _is_among(normal: Floats, known: Sequence[Floats]) -> bool:
    return any(abs(normal @ other) > _PARALLEL for other in known)


def _is_across_an_axis(face: str, lattice: Floats) -> bool:
    return bool(np.abs(face_normal(face, lattice).vector).max() > _PARALLEL)
