"""The Cartesian axes of the report in words, and what the labels become in other settings."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import permutations

import numpy as np

from sitesym.groups.operation import Floats, Integers
from sitesym.groups.point_group import PointGroup
from sitesym.symmetry.cell import match_setting
from sitesym.symmetry.crystal import CrystalSymmetry
from sitesym.symmetry.library import settings_of

_DIRECT = ("a", "b", "c")
_PARALLEL = 1 - 1e-8
_COMPLETING = "completing a right-handed set"


def axis_words(lattice: Floats) -> tuple[str, str, str]:
    """What x, y and z are parallel to: `a`, `b*`, or that the axis completes the right-handed set."""
    direct, reciprocal = _unit(lattice), _unit(np.asarray(np.linalg.inv(lattice).T, dtype=float))
    x, y, z = (_word(direct[:, k], reciprocal[:, k], k) for k in range(3))
    return x, y, z


def _unit(vectors: Floats) -> Floats:
    return np.asarray(vectors / np.linalg.norm(vectors, axis=1)[:, None])


def _word(direct: Floats, reciprocal: Floats, axis: int) -> str:
    order = (axis, *(other for other in (2, 1, 0) if other != axis))
    for index in order:
        if direct[index] > _PARALLEL:
            return _DIRECT[index]
    for index in order:
        if reciprocal[index] > _PARALLEL:
            return f"{_DIRECT[index]}*"
    return _COMPLETING


def describe_axes(symmetry: CrystalSymmetry) -> str:
    """One sentence on the axes to which every label and tensor of the report refers."""
    cell = {
        "input": "the cell of the input",
        "standard": "the standardised conventional cell, not the cell of the input",
        "setting": f"the setting {symmetry.setting.full}, as asked for",
    }[symmetry.cell.choice]
    words = axis_words(symmetry.lattice)
    parts = [
        f"{letter} completes the right-handed set" if word == _COMPLETING else f"{letter} ∥ {word}"
        for letter, word in zip("xyz", words, strict=True)
    ]
    return f"{', '.join(parts)} of {cell}"


@dataclass(frozen=True, slots=True)
class SettingLabels:
    """Labels of one other orthorhombic setting.

    symbol   Hermann-Mauguin symbol of the setting.
    axes     its a, b, c in terms of the report's axes, e.g. `b c a`.
    labels   report's label -> label there, for species whose label changes or may change (the B species).
    standard whether this is the standard setting of International Tables.
    """

    symbol: str
    axes: str
    labels: dict[str, str]
    standard: bool


def orthorhombic_labels(symmetry: CrystalSymmetry) -> tuple[SettingLabels, ...]:
    """The B labels in each of the six orthorhombic settings, the report's own first; empty for other systems."""
    if not 16 <= symmetry.number <= 74:
        return ()
    return tuple(_labels_in(symmetry, np.array(order)) for order in permutations(range(3)))


def _labels_in(symmetry: CrystalSymmetry, order: Integers) -> SettingLabels:
    change = np.zeros((3, 3), dtype=np.int64)
    change[order, range(3)] = 1
    change[:, 2] *= round(np.linalg.det(change))
    cell = symmetry.cell.rebased(change, symmetry.setting)
    found = match_setting(cell.rotations, cell.translations, symmetry.number) or symmetry.setting
    return SettingLabels(
        found.full,
        " ".join(_DIRECT[index] for index in order),
        _renamed(symmetry.factor_group, change.T.astype(float)),
        found == settings_of(symmetry.number)[0],
    )


def _renamed(group: PointGroup, preferred: Floats) -> dict[str, str]:
    other = PointGroup.of(group.matrices, preferred)
    return {
        one.label: next(two.label for two in other.species if np.allclose(one.characters, two.characters))
        for one in group.species
        if one.label.startswith("B")
    }
