"""Real irreducible representations as functions of an operation, labelled after Mulliken.

Source of the symbols: Report on Notation for the Spectra of Polyatomic Molecules, J. Chem. Phys. 23, 1997 (1955).
Pairs of complex-conjugate representations are joined to one real species E.

Every matrix is found from the operation itself: with the parity p (inversion or horizontal mirror split off) the
remaining part acts on the azimuth about the main axis (axial groups), permutes the three axes (cubic groups), or
turns a sphere (icosahedral groups). No table of characters is stored, so a species of a larger group can be
evaluated on the operations of any subgroup, also for linear molecules.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from sitesym.groups import icosahedron
from sitesym.groups.kind import Family, Kind
from sitesym.groups.operation import Booleans, Floats, determinants

_LINEAR_NAMES = ("Sigma", "Pi", "Delta", "Phi", "Gamma")
_D2_NAMES = {"A1": "A", "A2": "B1", "B1": "B3", "B2": "B2"}
_DIHEDRAL = {Family.CNV, Family.DN, Family.DNH, Family.DND, Family.LINEAR, Family.LINEAR_CENTRED}
_CYCLIC = {Family.CN, Family.CNH, Family.S2N}


@dataclass(frozen=True)
class Labelling:
    """What fixes the labels of a group: its kind, the frame (3, 3; rows x', y', z') and the reference azimuth."""

    kind: Kind
    frame: Floats
    azimuth: float


@dataclass(frozen=True, eq=False)
class Representation:
    """One real irreducible representation, evaluated on a list of n operations.

    label     Mulliken symbol in plain ASCII: `A1g`, `E'`, `A2''`, `Sigma_g+`.
    norm      1, or 2 for a joined pair of complex-conjugate representations (its Frobenius norm).
    matrices  (n, d, d) real orthogonal.
    """

    label: str
    norm: int
    matrices: Floats

    @property
    def dimension(self) -> int:
        """1, 2, 3, 4 or 5."""
        return int(self.matrices.shape[1])

    @cached_property
    def characters(self) -> Floats:
        """(n,) traces."""
        return np.asarray(np.trace(self.matrices, axis1=1, axis2=2))


def representations(labelling: Labelling, matrices: Floats) -> tuple[Representation, ...]:
    """All species of the group, in the order of printed tables, on operations (n, 3, 3) in its Cartesian axes.

    The operations may be any subset of the group, such as those of a subgroup. Linear groups, which have infinitely
    many species, are listed up to Γ (four units of angular momentum).
    """
    kind = labelling.kind
    local = labelling.frame @ matrices @ labelling.frame.T
    parity, rest = _split(kind, local)
    base = _base(kind, labelling.azimuth, rest)
    names = _suffixes(kind)
    return tuple(
        Representation(_joined(label, suffix), norm, values * (parity[:, None, None] if odd else 1.0))
        for odd, suffix in enumerate(names)
        for label, norm, values in base
    )


def _split(kind: Kind, local: Floats) -> tuple[Floats, Floats]:
    """Parity (n,) under the inversion or the horizontal mirror, and the part that is left when it is taken off."""
    if kind.family is Family.LINEAR_CENTRED:
        parity = _sign(local[:, 2, 2])
        return parity, local * parity[:, None, None]
    if kind.has_inversion:
        parity = determinants(local).astype(float)
        return parity, local * parity[:, None, None]
    if kind.has_horizontal_mirror_only:
        parity = determinants(local).astype(float)
        mirror = np.where(parity[:, None] < 0, np.array([1.0, 1.0, -1.0]), 1.0)
        return parity, local * mirror[:, None, :]
    return np.ones(len(local)), local


def _suffixes(kind: Kind) -> tuple[str, ...]:
    if kind.has_inversion:
        return ("g", "u")
    return ("'", "''") if kind.has_horizontal_mirror_only else ("",)


def _joined(label: str, suffix: str) -> str:
    if label.startswith("Sigma") and suffix:
        return f"Sigma_{suffix}{label[-1]}"
    if label in _LINEAR_NAMES and suffix:
        return f"{label}_{suffix}"
    return label + suffix


Base = list[tuple[str, int, Floats]]
"""Label without parity, norm, and matrices (n, d, d)."""


def _base(kind: Kind, azimuth: float, rest: Floats) -> Base:
    if kind.is_polyhedral:
        return _icosahedral(rest) if kind.family in (Family.I, Family.IH) else _cubic(kind, rest)
    turn, flipped = _azimuth_action(rest)
    if kind.is_linear:
        return _linear(turn, flipped)
    folds = kind.n if kind.has_inversion or kind.family not in (Family.DND, Family.S2N) else 2 * kind.n
    if kind.family in _CYCLIC:
        return _cyclic(folds, turn)
    base = _dihedral(folds, turn, flipped, azimuth)
    if kind.n == 2 and kind.family in (Family.DN, Family.DNH):
        renamed = [(_D2_NAMES[label], norm, values) for label, norm, values in base]
        return sorted(renamed, key=lambda row: row[0])
    return base


def _azimuth_action(rest: Floats) -> tuple[Floats, Booleans]:
    """How operations that keep the z' line act on the azimuth: φ -> turn + φ, or φ -> turn - φ where `flipped`."""
    plane = rest[:, :2, :2]
    flipped = plane[:, 0, 0] * plane[:, 1, 1] - plane[:, 0, 1] * plane[:, 1, 0] < 0
    return np.arctan2(plane[:, 1, 0], plane[:, 0, 0]), flipped


def _sign(values: Floats) -> Floats:
    return np.where(values < 0, -1.0, 1.0)


def _scalar(values: Floats) -> Floats:
    return np.asarray(np.rint(values), dtype=float).reshape(-1, 1, 1)


def _cyclic(folds: int, turn: Floats) -> Base:
    base: Base = [("A", 1, _scalar(np.ones_like(turn)))]
    if folds % 2 == 0:
        base.append(("B", 1, _scalar(np.cos(folds * turn / 2))))
    return base + _degenerate(folds, turn, np.zeros(len(turn), dtype=bool), norm=2)


def _dihedral(folds: int, turn: Floats, flipped: Booleans, azimuth: float) -> Base:
    sign = np.where(flipped, -1.0, 1.0)
    base: Base = [("A1", 1, _scalar(np.ones_like(turn))), ("A2", 1, _scalar(sign))]
    if folds % 2 == 0:
        first = np.cos(folds * np.where(flipped, turn / 2 - azimuth, turn / 2))
        base += [("B1", 1, _scalar(first)), ("B2", 1, _scalar(first * sign))]
    return base + _degenerate(folds, turn, flipped, norm=1)


def _degenerate(folds: int, turn: Floats, flipped: Booleans, norm: int) -> Base:
    count = (folds - 1) // 2
    return [("E" if count == 1 else f"E{m}", norm, _planar(m, turn, flipped)) for m in range(1, count + 1)]


def _planar(m: int, turn: Floats, flipped: Booleans) -> Floats:
    """Action on cos mφ and sin mφ, shape (n, 2, 2)."""
    cosine, sine = np.cos(m * turn), np.sin(m * turn)
    sign = np.where(flipped, -1.0, 1.0)
    return np.stack([np.stack([cosine, -sign * sine], -1), np.stack([sine, sign * cosine], -1)], -2)


def _linear(turn: Floats, flipped: Booleans) -> Base:
    sign = np.where(flipped, -1.0, 1.0)
    base: Base = [("Sigma+", 1, _scalar(np.ones_like(turn))), ("Sigma-", 1, _scalar(sign))]
    return base + [(name, 1, _planar(m, turn, flipped)) for m, name in enumerate(_LINEAR_NAMES) if m]


def _cubic(kind: Kind, rest: Floats) -> Base:
    """T, Td and O by how the operation permutes the three axes (signs aside)."""
    rotations = rest * determinants(rest)[:, None, None]
    permutation = np.abs(rest)
    two = _E_BASIS @ permutation @ _E_BASIS.T
    if kind.family in (Family.T, Family.TH):
        return [("A", 1, _scalar(np.ones(len(rest)))), ("E", 2, two), ("T", 1, rotations)]
    sign = np.linalg.det(permutation)
    return [
        ("A1", 1, _scalar(np.ones(len(rest)))),
        ("A2", 1, _scalar(sign)),
        ("E", 1, two),
        ("T1", 1, rotations),
        ("T2", 1, rotations * sign[:, None, None]),
    ]


_E_BASIS = np.array([[-1, -1, 2], [np.sqrt(3), -np.sqrt(3), 0]]) / np.sqrt(6)
"""Rows: 2z² - x² - y² and √3 (x² - y²), normalised, as combinations of x², y², z²."""


def _icosahedral(rest: Floats) -> Base:
    """I from harmonics of degree 1, 2 and 3: T1, H, and the sum of T2 and G, which `icosahedron` takes apart."""
    second, fourfold = icosahedron.cubic_harmonics()
    cubic = icosahedron.on_cubic(rest)
    return [
        ("A", 1, _scalar(np.ones(len(rest)))),
        ("T1", 1, rest),
        ("T2", 1, second @ cubic @ second.T),
        ("G", 1, fourfold @ cubic @ fourfold.T),
        ("H", 1, icosahedron.on_quadratic(rest)),
    ]
