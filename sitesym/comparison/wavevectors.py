"""Which wavevectors of the parent fold to the child's zone centre, their stars and customary names."""

from __future__ import annotations

import tomllib
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache
from importlib.resources import files
from itertools import product

import numpy as np

from sitesym.comparison.lattice import PrimitiveLattice, cosets
from sitesym.groups.operation import Floats, Integers
from sitesym.symmetry.crystal import CrystalSymmetry

Wavevector = tuple[Fraction, Fraction, Fraction]
_SHIFTS = np.array(list(product((-2, -1, 0, 1, 2), repeat=3)), dtype=float)
_ZERO = (Fraction(0), Fraction(0), Fraction(0))


@dataclass(frozen=True, slots=True)
class Star:
    """Wavevectors of the parent that its operations carry into each other (q and -q together), as far as they fold.

    arms          those that fold, in units of the reciprocal of the parent's primitive vectors, each 0 <= q < 1.
    size          number of all arms, folded or not.
    conventional  the first arm, as short as it can be, in units of the parent's a*, b*, c*.
    name          of the special point (Γ, X, M, R ...), "" for a general or doubtfully named one.
    """

    arms: tuple[Wavevector, ...]
    size: int
    conventional: Wavevector
    name: str

    @property
    def is_zone_centre(self) -> bool:
        """Whether it is q = 0."""
        return self.arms == (_ZERO,)


def folded_stars(parent: CrystalSymmetry, lattice: PrimitiveLattice, supercell: Integers) -> tuple[Star, ...]:
    """All q with q·R a whole number for every lattice vector R of the child, by stars, the zone centre first."""
    left = dict.fromkeys(_folded(supercell))
    stars = []
    while left:
        whole = _orbit(next(iter(left)), lattice.rotations)
        arms = tuple(arm for arm in left if arm in whole)
        left = {arm: None for arm in left if arm not in whole}
        stars.append(_star(parent, lattice, arms, whole))
    return tuple(stars)


def _folded(supercell: Integers) -> list[Wavevector]:
    inverse = _inverse(supercell)
    found = []
    for whole in cosets(supercell.T).tolist():
        found.append(tuple(sum((a * n for a, n in zip(row, whole, strict=True)), Fraction(0)) % 1 for row in inverse))
    return sorted(found)  # type: ignore[arg-type]  # mypy knows no length of a tuple made from a generator


def _inverse(matrix: Integers) -> list[list[Fraction]]:
    size = round(np.linalg.det(matrix))
    adjugate = np.rint(np.linalg.inv(matrix) * size).astype(int)
    return [[Fraction(value, size) for value in row] for row in adjugate.tolist()]


def _orbit(arm: Wavevector, rotations: Integers) -> dict[Wavevector, None]:
    """All arms of the star, q turned by R being q R⁻¹; -q is in it, since displacements are real."""
    denominator = int(np.lcm.reduce([one.denominator for one in arm]))
    row = np.array([int(one * denominator) for one in arm])
    images = np.concatenate([row @ rotations, -row @ rotations]) % denominator
    return dict.fromkeys(
        (Fraction(x, denominator), Fraction(y, denominator), Fraction(z, denominator)) for x, y, z in images.tolist()
    )


def _star(
    parent: CrystalSymmetry, lattice: PrimitiveLattice, arms: tuple[Wavevector, ...], whole: dict[Wavevector, None]
) -> Star:
    shortest = [_shortest(arm, lattice) for arm in arms]
    first = min(range(len(arms)), key=lambda index: _plainness(shortest[index]))
    ordered = (arms[first], *(arm for index, arm in enumerate(arms) if index != first))
    return Star(ordered, len(whole), shortest[first], _name(parent, lattice, whole))


def _shortest(arm: Wavevector, lattice: PrimitiveLattice) -> Wavevector:
    """The arm moved into the first zone, in a*, b*, c*; of equally short ones the plainest."""
    primitive = np.array([float(one) for one in arm]) + _SHIFTS
    lengths = np.linalg.norm(primitive @ np.linalg.inv(lattice.vectors).T, axis=1)
    conventional = primitive[lengths < lengths.min() + 1e-6] @ np.linalg.inv(lattice.basis).T
    return min(map(_fractions, conventional), key=_plainness)


def _fractions(values: Floats) -> Wavevector:
    x, y, z = (Fraction(value).limit_denominator(200) for value in values.tolist())
    return x, y, z


def _plainness(vector: Wavevector) -> tuple[Fraction, ...]:
    return (sum(map(abs, vector), Fraction(0)), -sum(vector, Fraction(0)), *(-one for one in vector[::-1]))


def _name(parent: CrystalSymmetry, lattice: PrimitiveLattice, whole: dict[Wavevector, None]) -> str:
    if tuple(whole) == (_ZERO,):
        return "Γ"
    for name, point in _points(_kind_of_lattice(parent)).items():
        primitive = _fractions(np.array(point) @ lattice.basis.T)
        if tuple(one % 1 for one in primitive) in whole:
            return name
    return ""


def _kind_of_lattice(parent: CrystalSymmetry) -> str:
    """Crystal family and centring of the axes in use: `cP`, `hR`."""
    limits = ((2, "a"), (15, "m"), (74, "o"), (142, "t"), (194, "h"), (230, "c"))
    family = next(letter for limit, letter in limits if parent.number <= limit)
    return family + parent.setting.full[0]


@lru_cache(maxsize=1)
def _table() -> dict[str, dict[str, list[float]]]:
    with files("sitesym.data").joinpath("special_points.toml").open("rb") as stream:
        return tomllib.load(stream)["points"]  # type: ignore[no-any-return]  # the table's shape is its own


def _points(kind: str) -> dict[str, list[float]]:
    return _table().get(kind, {})
