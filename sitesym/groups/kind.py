"""The name of a point group: a family and an order n, with its Schoenflies and Hermann-Mauguin symbols.

`CnV` with n = 3 is C3v, `CnH` with n = 1 is Cs, `S2n` with n = 1 is Ci. Linear groups have n = 0.
Hermann-Mauguin symbols of non-crystallographic classes follow International Tables for Crystallography A (2016),
section 3.2.1.4.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum


class Family(Enum):
    """Families of point groups in three dimensions."""

    CN = "Cn"
    CNV = "Cnv"
    CNH = "Cnh"
    DN = "Dn"
    DNH = "Dnh"
    DND = "Dnd"
    S2N = "S2n"
    T = "T"
    TH = "Th"
    TD = "Td"
    O = "O"  # noqa: E741 - the group's name
    OH = "Oh"
    I = "I"  # noqa: E741 - the group's name
    IH = "Ih"
    LINEAR = "C∞v"
    LINEAR_CENTRED = "D∞h"


_POLYHEDRAL = {
    Family.T: "23", Family.TH: "m-3", Family.TD: "-43m", Family.O: "432", Family.OH: "m-3m",
    Family.I: "235", Family.IH: "-5-3m",
}  # fmt: skip
_LINEAR = {Family.LINEAR: "∞m", Family.LINEAR_CENTRED: "∞/mm"}
_SMALL = {
    (Family.CNV, 2): "mm2", (Family.CNH, 1): "m", (Family.CNH, 2): "2/m", (Family.DN, 2): "222",
    (Family.DNH, 2): "mmm", (Family.DND, 2): "-42m",
}  # fmt: skip
_SPECIAL = {(Family.CNH, 1): "Cs", (Family.S2N, 1): "Ci"}


@dataclass(frozen=True, slots=True)
class Kind:
    """Family and order of a point group."""

    family: Family
    n: int = 0

    @property
    def schoenflies(self) -> str:
        """`D3d`, `Oh`, `Cs`, `C∞v`."""
        special = _SPECIAL.get((self.family, self.n))
        if special:
            return special
        if self.family is Family.S2N:
            return f"S{2 * self.n}"
        name = str(self.family.value)
        return name.replace("n", str(self.n)) if self.n else name

    @property
    def hermann_mauguin(self) -> str:
        """Symbol of the class without orientation: `-3m`, `mm2`, `-10m2`."""
        if self.family in _POLYHEDRAL:
            return _POLYHEDRAL[self.family]
        if self.family in _LINEAR:
            return _LINEAR[self.family]
        return _SMALL.get((self.family, self.n)) or self._axial_symbol()

    def _axial_symbol(self) -> str:
        n, even = self.n, self.n % 2 == 0
        symbols = {
            Family.CN: f"{n}",
            Family.CNV: f"{n}mm" if even else f"{n}m",
            Family.CNH: f"{n}/m" if even else f"-{2 * n}",
            Family.DN: f"{n}22" if even else f"{n}2",
            Family.DNH: f"{n}/mmm" if even else f"-{2 * n}m2",
            Family.DND: f"-{2 * n}2m" if even else f"-{n}m",
            Family.S2N: f"-{2 * n}" if even else f"-{n}",
        }
        return symbols[self.family]

    @property
    def has_inversion(self) -> bool:
        """Whether the group contains the inversion."""
        if self.family in (Family.CNH, Family.DNH):
            return self.n % 2 == 0
        if self.family in (Family.DND, Family.S2N):
            return self.n % 2 == 1
        return self.family in (Family.TH, Family.OH, Family.IH, Family.LINEAR_CENTRED)

    @property
    def has_horizontal_mirror_only(self) -> bool:
        """Whether species are told apart by primes: a horizontal mirror but no inversion (Cs, C3h, D3h, D5h, …)."""
        return self.family in (Family.CNH, Family.DNH) and self.n % 2 == 1

    @property
    def is_linear(self) -> bool:
        """C∞v or D∞h."""
        return self.family in (Family.LINEAR, Family.LINEAR_CENTRED)

    @property
    def is_polyhedral(self) -> bool:
        """Cubic or icosahedral: more than one axis of order above two."""
        return self.family in _POLYHEDRAL
