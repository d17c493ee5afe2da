"""The Wyckoff position of any point of a crystal, such as the centre of a molecule where no atom sits."""

from __future__ import annotations

import numpy as np

from sitesym.groups.operation import Floats, Integers
from sitesym.symmetry.crystal import CrystalSymmetry
from sitesym.symmetry.library import Search, search, setting_operations

_GENERAL = np.array([[0.1372, 0.2113, 0.3191], [0.0713, 0.3377, 0.1519]])
"""Two points in general position; their orbits fix the space group, so that a third orbit gets its letter."""

_TOLERANCE = 1e-3


def wyckoff_letter(symmetry: CrystalSymmetry, point: Floats) -> str:
    """Letter for a point in fractional coordinates (3,) of the axes of the report, lying exactly on its site.

    The library names orbits only, so a model crystal is made of the orbit and of two general ones. The library may
    place its origin elsewhere among the equivalent choices; then the model is moved to where the crystal has it.
    """
    matrix, shift = symmetry.cell.to_standard
    place = matrix @ point + shift
    first = _model(symmetry, place)
    if _is_in_place(first):
        return first.wyckoffs[0]
    back = np.linalg.inv(first.transformation)
    return _model(symmetry, back @ (place - first.shift)).wyckoffs[0]


def _is_in_place(found: Search) -> bool:
    away = found.shift - np.rint(found.shift)
    return bool(np.abs(found.transformation - np.eye(3)).max() < 1e-3 and np.abs(away).max() < 1e-3)


def _model(symmetry: CrystalSymmetry, place: Floats) -> Search:
    rotations, translations = setting_operations(symmetry.search.hall_number)
    lattice = symmetry.search.standard_lattice
    orbits = [_orbit(one, rotations, translations, lattice) for one in (place, *_GENERAL)]
    kinds = np.repeat(np.arange(3), [len(orbit) for orbit in orbits])
    return search(lattice, np.vstack(orbits), kinds, _TOLERANCE)


def _orbit(point: Floats, rotations: Integers, translations: Floats, lattice: Floats) -> Floats:
    images = np.mod(rotations @ point + translations, 1)
    away = images[:, None] - images[None]
    same = np.linalg.norm((away - np.rint(away)) @ lattice, axis=2) < 5 * _TOLERANCE
    return np.asarray(images[np.unique(same.argmax(axis=1))])
