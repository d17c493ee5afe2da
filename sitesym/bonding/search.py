"""From atoms to bonds: find the contacts, judge them, hear the user's word."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence

import numpy as np
import numpy.typing as npt

from sitesym.bonding.chemistry import Elements, Kind, describe, long_bonds
from sitesym.bonding.contacts import Booleans, Contacts, find_contacts
from sitesym.bonding.requests import REQUESTED_FACTOR, REQUESTED_MARGIN, apply_requests, requested_elements
from sitesym.bonding.result import FIRST_REFUSAL, BondRules, Bonds, Verdict
from sitesym.bonding.rule import judge
from sitesym.bonding.scene import Scene, ratios
from sitesym.errors import UsageError
from sitesym.structure import FULL, Floats, Integers

USUAL = 1.15
"""The usual cut-off: the wider ones below are in proportion to it."""

HYDROGEN_REACH = 1.3 / USUAL
"""The reach for hydrogen is wider by this factor: bridges (B-H 1.33 Å, F-H 1.14 Å) are longer than other bonds."""

LATTICE_REACH = 1.35 / USUAL
"""So is that of ionic lattices (PbS 1.18, PbF2 1.27, TlCl 1.34 times the sum of radii)."""

TOO_NEAR = 0.75
"""Partly occupied atoms nearer than this times the sum of radii are alternatives if their occupancies allow it."""

TOO_NEAR_METALS = 1.06
"""The like for two metal atoms."""

TOO_NEAR_ANIONS = 1.06
"""The like for two atoms of oxygen or halogens, whose bonds to each other are long (O-O 1.45 Å, ratio 1.10)."""


def find_bonds(
    lattice: npt.ArrayLike,
    fractional: npt.ArrayLike,
    elements: Sequence[str],
    *,
    rules: BondRules | None = None,
    labels: Sequence[str] = (),
    groups: Sequence[str] = (),
    contents: Sequence[Mapping[str, float]] = (),
) -> Bonds:
    """The bonds of a crystal by the rule of `sitesym.bonding.rule`.

    lattice      (3, 3) rows a, b, c in Å.
    fractional   (n, 3) coordinates, inside the unit cell or not.
    elements     n symbols; a mixed site reads `Ca/Mg`, unnamed elements A, B, C, ... have no bonds.
    rules        cut-off and the user's word.
    labels       n names of the atoms, needed only where `rules` speak of labels.
    groups       n disorder groups, "" for the common part, an assembly's name before the group's number (`A1`, `A2`);
                 empty for an ordered structure.
    contents     n mappings of the elements of a site to their occupancies; empty for an ordered structure.

    Raises UsageError where the arguments do not fit each other or `rules` name atoms or units that are not there.
    """
    rules = rules or BondRules()
    cell, points = _numbers("lattice", lattice, 3), _numbers("coordinates", fractional, len(elements))
    for name, values in (("labels", labels), ("groups", groups), ("contents", contents)):
        _fits(name, values, len(elements))
    table = describe(elements, contents)
    occupancies = [sum(content.values()) for content in contents]
    requested = _requested_reach(table, requested_elements(rules, elements, labels))
    contacts = find_contacts(cell, points, table.index, np.maximum(_reach(table, rules.scale), requested))
    verdict = _judged(table, contacts, rules.scale, groups, occupancies)
    if not (verdict < FIRST_REFUSAL).any():
        contacts, verdict = _lattice_contacts(cell, points, table, rules.scale, groups, occupancies, requested)
    if rules.speaks:
        verdict = apply_requests(contacts, verdict, rules, elements, labels)
    return _bonds(contacts, verdict, rules.scale)


def _numbers(name: str, values: npt.ArrayLike, rows: int) -> Floats:
    array = np.asarray(values, dtype=np.float64)
    if array.shape != (rows, 3) or not np.isfinite(array).all():
        raise UsageError(f"The {name} are no array of {rows} by 3 finite numbers.", "Correct the argument.")
    if name == "lattice" and abs(np.linalg.det(array)) < 1e-6:
        raise UsageError("The cell has no volume.", "Check the lattice vectors.")
    return array


def _fits(name: str, values: Sequence[object], n: int) -> None:
    if len(values) not in (0, n):
        raise UsageError(f"There are {n} elements but {len(values)} {name}.", "Give one for each atom.")


def _reach(table: Elements, scale: float, wide: Booleans | None = None) -> Floats:
    """(k, k) reach of each pair of names in Å; none between ionic metals; the `wide` (k, k) ones reach farther."""
    hydrogen, ionic = table.kind == Kind.HYDROGEN, table.kind == Kind.IONIC
    factor = np.where(hydrogen[:, None] | hydrogen, HYDROGEN_REACH, 1.0)
    for pairs in long_bonds():
        long = np.array([[pairs.joins(one, other) for other in table.names] for one in table.names], dtype=bool)
        factor = np.where(long, pairs.reach / USUAL, factor)
    factor = np.where(ionic[:, None] & ionic, 0.0, factor)
    factor = factor if wide is None else np.where(wide, LATTICE_REACH, factor)
    known = table.radius > 0
    sums = table.radius[:, None] + table.radius
    return np.asarray(np.where(known[:, None] & known, scale * factor * sums, 0.0))


def _requested_reach(table: Elements, pairs: set[tuple[str, str]]) -> Floats:
    """(k, k) reach in Å of the pairs of names that the user adds bonds between, 0 for the others."""
    wanted = [[(one, other) in pairs or (other, one) in pairs for other in table.names] for one in table.names]
    sums = table.radius[:, None] + table.radius
    reach = np.maximum(REQUESTED_FACTOR * sums, sums + REQUESTED_MARGIN)
    known = table.radius > 0
    return np.asarray(np.where(np.array(wanted, dtype=bool) & known[:, None] & known, reach, 0.0))


def _judged(
    table: Elements, contacts: Contacts, scale: float, groups: Sequence[str], occupancies: Sequence[float]
) -> Integers:
    """Verdicts of the rule; contacts that only the user's word may turn into bonds are `BEYOND`."""
    limit = _reach(table, scale)
    near = contacts.distance < limit[table.index[contacts.first], table.index[contacts.second]]
    scene = Scene(table, table.kind[table.index], contacts.where(near))
    verdict = np.full(len(contacts), int(Verdict.BEYOND))
    verdict[near] = judge(scene, _alternatives(table, scene.contacts, groups, occupancies))
    return verdict


def _alternatives(table: Elements, contacts: Contacts, groups: Sequence[str], occupancies: Sequence[float]) -> Booleans:
    """(m,) contacts between atoms that are never there together."""
    i, j = contacts.first, contacts.second
    result = np.zeros(len(contacts), dtype=bool)
    share = np.asarray(occupancies) if len(occupancies) else np.zeros(len(table.index))
    full = share >= FULL
    if any(groups):
        assembly, group = _assemblies(groups)
        result |= (assembly[i] == assembly[j]) & (group[i] != group[j]) & (group[i] > 0) & (group[j] > 0)
        result &= full[i] == full[j]
    if len(occupancies):
        metal, anion = np.isin(table.kind, (Kind.METAL, Kind.IONIC))[table.index], (table.valence > 0)[table.index]
        limit = np.where(metal[i] & metal[j], TOO_NEAR_METALS, np.where(anion[i] & anion[j], TOO_NEAR_ANIONS, TOO_NEAR))
        partial = ~full[i] & ~full[j] & (share[i] + share[j] < 1.02)
        result |= partial & (ratios(table, contacts) < limit)
    return result


def _assemblies(groups: Sequence[str]) -> tuple[Integers, Integers]:
    """(n,) number of each atom's disorder assembly and of its group within; the group of the common part is 0.

    `A1` and `B2` belong to different assemblies and do not exclude each other.
    """
    parts = [re.fullmatch(r"(-?)(.*?)(\d*)", group) for group in groups]
    assemblies = [part[2] if part and part[3] else "" for part in parts]
    names = {name: number for number, name in enumerate(dict.fromkeys(assemblies))}
    numbers = {name: number for number, name in enumerate(dict.fromkeys(["", *groups]))}
    return np.array([names[name] for name in assemblies]), np.array([numbers[name] for name in groups])


def _lattice_contacts(
    cell: Floats,
    points: Floats,
    table: Elements,
    scale: float,
    groups: Sequence[str],
    occupancies: Sequence[float],
    requested: Floats,
) -> tuple[Contacts, Integers]:
    """Rule 11: the contacts of cations with anions, or of metal atoms where there is no anion."""
    cations = np.isin(table.kind, (Kind.METAL, Kind.IONIC))
    anions = np.isin(table.kind, (Kind.NONMETAL, Kind.METALLOID, Kind.HYDROGEN))
    pairs = (cations[:, None] & anions) | (anions[:, None] & cations)
    if not anions.any():
        pairs = cations[:, None] & cations
    everywhere = np.ones_like(pairs)
    reach = np.where(pairs, _reach(table, scale, everywhere), _reach(table, scale))
    contacts = find_contacts(cell, points, table.index, np.maximum(reach, requested))
    verdict = _judged(table, contacts, scale, groups, occupancies)
    kinds = table.index[contacts.first], table.index[contacts.second]
    joined = pairs[kinds] & (contacts.distance < reach[kinds])
    joined &= ~_alternatives(table, contacts, groups, occupancies)
    verdict[joined] = Verdict.IONIC_LATTICE
    return contacts, verdict


def _bonds(contacts: Contacts, verdict: Integers, scale: float) -> Bonds:
    bonded = verdict < FIRST_REFUSAL
    taken, refused = contacts.where(bonded), contacts.where(~bonded)
    return Bonds(
        taken.first, taken.second, taken.shift, taken.distance, verdict[bonded], refused, verdict[~bonded], scale
    )
