"""The bonded units of a crystal: molecules, complex ions, single atoms, and chains, layers and nets.

A unit is a connected part of the graph of bonds. Its dimension is the number of independent lattice translations along
closed paths of bonds: 0 for a molecule or complex ion, 1 for a chain, 2 for a layer, 3 for a three-dimensional net.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from sitesym.bonding import BondRules, Bonds, Verdict, find_bonds
from sitesym.bonding.chemistry import formula_rank
from sitesym.bonding.graph import Parts, connected_parts
from sitesym.structure import FULL, Floats, Integers, Structure
from sitesym.unit_reasons import reasons

_HYDROGENS = ("H", "D", "T")
_FORMULA = re.compile(r"([A-Z][a-z]?)([0-9.]*)")


@dataclass(frozen=True, eq=False, slots=True)
class Unit:
    """One bonded unit.

    atoms      (k,) indices of its atoms in the cell: all of a molecule, one repeat of a chain, layer or net.
    shifts     (k, 3) lattice translations: `fractional[atoms] + shifts` puts the unit together along its bonds.
    dimension  0 finite, 1 chain, 2 layer, 3 three-dimensional net.
    formula    content in Hill order, not divided (C6H6, CO3); a chain, layer or net per repeat. Occupancies are counted
               relative to `occupancy`, so that a half-occupied benzene molecule still reads C6H6.
    occupancy  the share of the cells in which the unit is there: 1 for an ordered one.
    disordered whether an atom is partly occupied or mixed, so that the atoms are those of an average.
    reason     which contacts were taken as bonds and which were not, and why: plain sentences.
    labels     k names of its atoms in the file, by which the user may ask for the unit; empty where none were given.
    """

    atoms: Integers
    shifts: Integers
    dimension: int
    formula: str
    occupancy: float
    disordered: bool
    reason: str
    labels: tuple[str, ...] = ()

    @property
    def name(self) -> str:
        """The formula as chemists write it: SO4, NH4, PtCl6, H2O; in Hill order for organic molecules."""
        return customary({element: float(count or 1) for element, count in _FORMULA.findall(self.formula)})

    @property
    def is_molecule(self) -> bool:
        """Finite, and more than one atom: a molecule or complex ion."""
        return self.dimension == 0 and len(self.atoms) > 1

    @property
    def is_net(self) -> bool:
        """A chain, layer or three-dimensional net, to be treated by atomic sites."""
        return self.dimension > 0

    @property
    def kind(self) -> str:
        """In words: molecule or complex ion, single atom, chain, layer, three-dimensional net."""
        finite = "molecule or complex ion" if len(self.atoms) > 1 else "single atom"
        return (finite, "chain", "layer", "three-dimensional net")[self.dimension]


def units_of(structure: Structure, rules: BondRules | None = None) -> tuple[Unit, ...]:
    """The units of a structure; disorder groups, occupancies and labels are heeded.

    Atoms of different disorder groups are never bonded; each unit holds all its alternatives and says so
    (`disordered`). Raises UsageError where `rules` name atoms or units that are not there.
    """
    bonds = bonds_of(structure, rules)
    labels = [site.label for site in structure.sites]
    return find_units(bonds, len(structure), structure.elements, labels, contents=_contents(structure))


def _contents(structure: Structure) -> list[dict[str, float]]:
    """Element -> occupancy of each site."""
    return [{occupant.element: occupant.occupancy for occupant in site.occupants} for site in structure.sites]


def bonds_of(structure: Structure, rules: BondRules | None = None) -> Bonds:
    """The bonds of a structure; disorder groups, occupancies and labels are heeded."""
    return find_bonds(
        structure.lattice,
        structure.fractional,
        structure.elements,
        rules=rules,
        labels=[site.label for site in structure.sites],
        groups=[site.disorder_group for site in structure.sites],
        contents=_contents(structure),
    )


def find_units(
    bonds: Bonds,
    n: int,
    elements: Sequence[str],
    labels: Sequence[str] = (),
    *,
    contents: Sequence[Mapping[str, float]] = (),
) -> tuple[Unit, ...]:
    """The connected parts of the graph of bonds between n atoms, in the order of their first atoms.

    `elements` are the n names; `contents` the n occupants with their occupancies, left out for an ordered structure.
    `labels` are handed on to the units.
    """
    parts = connected_parts(n, bonds.first, bonds.second, bonds.shift)
    words = reasons(bonds, parts, elements)
    filled = contents or [dict.fromkeys(element.split("/"), 1.0 / (element.count("/") + 1)) for element in elements]
    wholes = _wholes(bonds, parts, np.array([sum(content.values()) for content in filled]))
    return tuple(
        _unit(atoms, parts, filled, labels, float(wholes[number]), words[number])
        for number, atoms in enumerate(_members(parts))
    )


def _wholes(bonds: Bonds, parts: Parts, share: Floats) -> Floats:
    """(parts,) share of the cells in which each unit is there.

    It is the occupancy of the unit's fullest atom, times the number of atoms that take its place by turns when
    alternatives lie in one unit (a molecule disordered about a symmetry element).
    """
    fullest = np.zeros(len(parts.dimension))
    np.maximum.at(fullest, parts.part, share)
    i, j = bonds.refused.first, bonds.refused.second
    top = share > 0.98 * fullest[parts.part]
    turns = (bonds.refusal == Verdict.ALTERNATIVE) & top[i] & top[j] & (parts.part[i] == parts.part[j])
    number = 1 + np.bincount(np.concatenate([i[turns], j[turns]]), minlength=len(share))
    whole = np.zeros_like(fullest)
    np.maximum.at(whole, parts.part, np.where(top, share * number, 0.0))
    return np.minimum(whole, 1.0)


def _members(parts: Parts) -> list[Integers]:
    """Atoms of each part, ascending."""
    order = np.argsort(parts.part, kind="stable")
    ends = np.cumsum(np.bincount(parts.part))[:-1]
    return [np.asarray(atoms) for atoms in np.split(order, ends)]


def _unit(
    atoms: Integers,
    parts: Parts,
    contents: Sequence[Mapping[str, float]],
    labels: Sequence[str],
    whole: float,
    reason: str,
) -> Unit:
    inside = [contents[atom] for atom in atoms.tolist()]
    amounts: dict[str, float] = {}
    for content in inside:
        for element, share in content.items():
            amounts[element] = amounts.get(element, 0.0) + share / whole
    return Unit(
        atoms=atoms,
        shifts=parts.shift[atoms],
        dimension=int(parts.dimension[parts.part[atoms[0]]]),
        formula=hill(amounts),
        occupancy=whole,
        disordered=any(len(content) > 1 or min(content.values()) < FULL for content in inside),
        reason=reason,
        labels=tuple(labels[atom] for atom in atoms.tolist()) if labels else (),
    )


def hill(amounts: Mapping[str, float]) -> str:
    """Formula in Hill order (Hill 1900, J. Am. Chem. Soc. 22, 478), counts not divided, to two decimals."""
    names = sorted(amounts)
    if "C" in names:
        first = [name for name in ("C", *_HYDROGENS) if name in amounts]
        names = first + [name for name in names if name not in first]
    return _written(names, amounts)


def customary(amounts: Mapping[str, float]) -> str:
    """Formula as chemists write it: the more electropositive element first (SO4, NH4, PtCl6, ClO4, H2PO4, OH).

    The order is that of the IUPAC recommendations of 1990 (Nomenclature of Inorganic Chemistry, table IV); hydrogen
    stands first in the acid forms of oxoanions. Anything with carbon and hydrogen is in Hill order.
    """
    hydrogens = [name for name in _HYDROGENS if name in amounts]
    if "C" in amounts and hydrogens:
        return hill(amounts)
    names = sorted(amounts, key=formula_rank)
    others = set(amounts) - set(hydrogens) - {"O"}
    if hydrogens and "O" in amounts and len(others) == 1:
        names = hydrogens + [name for name in names if name not in hydrogens]
    if hydrogens and "O" in amounts and not others and sum(amounts[name] for name in hydrogens) < 1.5:
        names = ["O", *hydrogens]
    return _written(names, amounts)


def _written(names: Sequence[str], amounts: Mapping[str, float]) -> str:
    return "".join(f"{name}{_count(amounts[name])}" for name in names)


def _count(amount: float) -> str:
    text = f"{amount:.2f}".rstrip("0").rstrip(".")
    return "" if text == "1" else text
