"""The user's word on bonds: pairs to add or to forbid, and whole units by formula or by labels."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Sequence

import numpy as np

from sitesym.bonding.chemistry import covalent_radii
from sitesym.bonding.contacts import Booleans, Contacts
from sitesym.bonding.graph import connected_parts
from sitesym.bonding.result import FIRST_REFUSAL, BondRules, Pair, Verdict
from sitesym.errors import UsageError
from sitesym.structure import Integers

_NEVER = (Verdict.ALTERNATIVE, Verdict.FAR_SIDE, Verdict.HYDROGEN_BOND, Verdict.METALS, Verdict.BEYOND)
"""Contacts that do not hold a requested unit together."""

REQUESTED_FACTOR, REQUESTED_MARGIN = 1.35, 0.6
"""Pairs that the user adds reach to 1.35 times the sum of covalent radii or 0.6 Å beyond it, whichever is farther: the
former suits ionic lattices, the latter bonds of hydrogen, whose radius is small (O-H up to 1.57 Å)."""


def parse_pair(text: str) -> Pair:
    """`Ca-O` or `Cu1-O3` as a pair; UsageError if it does not read so."""
    parts = [part.strip() for part in text.split("-")]
    if len(parts) != 2 or not all(parts):
        raise UsageError(
            f"'{text}' names no pair of atoms.", "Write two elements or labels with a hyphen: Ca-O, Cu1-O3."
        )
    return parts[0], parts[1]


def requested_elements(rules: BondRules, elements: Sequence[str], labels: Sequence[str]) -> set[Pair]:
    """Pairs of element names between which the user adds bonds."""
    pairs: set[Pair] = set()
    for pair in rules.add:
        one, other = (_atoms(name, elements, labels) for name in pair)
        names = [np.array(elements, dtype=object)[mask] for mask in (one, other)]
        pairs |= {(str(a), str(b)) for a in set(names[0]) for b in set(names[1])}
    return pairs


def apply_requests(
    contacts: Contacts, verdict: Integers, rules: BondRules, elements: Sequence[str], labels: Sequence[str]
) -> Integers:
    """The verdicts after the user's word: units first, then pairs to add, then pairs to forbid."""
    verdict = verdict.copy()
    for text in rules.units:
        _cut_unit(text, contacts, verdict, elements, labels)
    for pair in rules.add:
        found = _pair_mask(pair, contacts, elements, labels) & (verdict != Verdict.ALTERNATIVE)
        if not found.any():
            raise UsageError(
                f"No atoms {pair[0]} and {pair[1]} are near enough to each other to be called bonded.",
                f"Check the pair: such a bond may have {REQUESTED_FACTOR:g} times the sum of the covalent radii, or "
                f"{REQUESTED_MARGIN:g} Å more than the sum.",
            )
        verdict[found & (verdict >= FIRST_REFUSAL)] = Verdict.REQUESTED
    for pair in rules.forbid:
        verdict[_pair_mask(pair, contacts, elements, labels)] = Verdict.FORBIDDEN
    return verdict


def _pair_mask(pair: Pair, contacts: Contacts, elements: Sequence[str], labels: Sequence[str]) -> Booleans:
    one, other = (_atoms(name, elements, labels) for name in pair)
    i, j = contacts.first, contacts.second
    return np.asarray((one[i] & other[j]) | (one[j] & other[i]))


def _atoms(name: str, elements: Sequence[str], labels: Sequence[str]) -> Booleans:
    """(n,) atoms that an element or a label names; an element wins over a label that reads the same."""
    mask = np.array([name in element.split("/") for element in elements], dtype=bool)
    if not mask.any():
        mask = np.array([name == label for label in labels] or [False] * len(elements), dtype=bool)
    if not mask.any():
        raise UsageError(
            f"No atom is called '{name}'.",
            f"The elements are {', '.join(sorted(set(elements)))}{_label_list(labels)}.",
        )
    return mask


def _label_list(labels: Sequence[str]) -> str:
    names = sorted(set(labels))
    return f"; labels {', '.join(names[:12])}{', ...' if len(names) > 12 else ''}" if names else ""


def _cut_unit(text: str, contacts: Contacts, verdict: Integers, elements: Sequence[str], labels: Sequence[str]) -> None:
    """Join the atoms of the requested units among themselves and part them from everything else."""
    formula = _formula(text, elements)
    usable = ~np.isin(verdict, _NEVER)
    inner = usable
    if formula is None:
        owner = _unit_of_labels(text, contacts, usable, elements, labels)
    else:
        owner = _units_of_formula(formula, contacts, usable, elements)
        if not (owner >= 0).any():
            owner, inner = _units_about_centres(text, formula, contacts, usable, elements)
    one, other = owner[contacts.first], owner[contacts.second]
    member = (one >= 0) | (other >= 0)
    inside = (one == other) & member & inner
    verdict[inside & (verdict >= FIRST_REFUSAL)] = Verdict.REQUESTED
    verdict[member & ~inside & (verdict < FIRST_REFUSAL)] = Verdict.APART


def _formula(text: str, elements: Sequence[str]) -> dict[str, int] | None:
    """Element -> count, or None if the text lists labels."""
    words = re.findall(r"([A-Z][a-z]?)(\d*)", text)
    is_formula = re.fullmatch(r"(?:[A-Z][a-z]?\d*)+", text) and all(symbol in covalent_radii() for symbol, _ in words)
    if "," in text or not is_formula:
        return None
    count: Counter[str] = Counter()
    for symbol, number in words:
        count[symbol] += int(number or 1)
    present = {part for element in elements for part in element.split("/")}
    return dict(count) if set(count) <= present else None


def _unit_of_labels(
    text: str, contacts: Contacts, usable: Booleans, elements: Sequence[str], labels: Sequence[str]
) -> Integers:
    """(n,) number of the connected group of labelled atoms, -1 for the others."""
    names = [name.strip() for name in text.split(",")]
    member = np.zeros(len(elements), dtype=bool)
    for name in names:
        found = np.array([name == label for label in labels] or [False] * len(elements), dtype=bool)
        if not found.any():
            raise UsageError(
                f"'{text}' is no unit of this structure: no atom is labelled '{name}'.",
                f"Give a formula such as CO3 of its elements ({', '.join(sorted(set(elements)))}) or a list of labels"
                f"{_label_list(labels)}.",
            )
        member |= found
    part, _ = _parts(member, contacts, usable)
    return np.where(member, part, -1)


def _parts(member: Booleans, contacts: Contacts, usable: Booleans) -> tuple[Integers, Integers]:
    """Part and dimension of each atom in the graph of the usable contacts between members."""
    inner = contacts.where(usable & member[contacts.first] & member[contacts.second])
    parts = connected_parts(len(member), inner.first, inner.second, inner.shift)
    return parts.part, parts.dimension[parts.part]


def _units_of_formula(
    formula: dict[str, int], contacts: Contacts, usable: Booleans, elements: Sequence[str]
) -> Integers:
    """(n,) number of the finite group of exactly this formula that the atom belongs to, -1 if to none."""
    member = np.isin(np.array(elements), list(formula))
    part, dimension = _parts(member, contacts, usable)
    owner = np.full(len(elements), -1)
    for number in np.unique(part[member & (dimension == 0)]):
        atoms = np.flatnonzero((part == number) & member)
        if Counter(elements[atom] for atom in atoms.tolist()) == formula:
            owner[atoms] = number
    return owner


def _units_about_centres(
    text: str, formula: dict[str, int], contacts: Contacts, usable: Booleans, elements: Sequence[str]
) -> tuple[Integers, Booleans]:
    """Units that are a central atom with its nearest neighbours.

    Returns (n,) number of each atom's unit, -1 for none, and (m,) the contacts that hold the units together. Raises
    UsageError where the units share atoms or there is none.
    """
    centre = next((element for element, count in formula.items() if count == 1 and element != "H"), None)
    owner = np.full(len(elements), -1)
    inner = np.zeros(len(contacts), dtype=bool)
    for atom in np.flatnonzero(np.array(elements) == centre):
        chosen = _nearest(int(atom), formula, contacts, usable, elements)
        if chosen is None:
            continue
        neighbours = np.where(contacts.first[chosen] == atom, contacts.second[chosen], contacts.first[chosen])
        if (owner[[atom, *neighbours]] >= 0).any() or len(set(neighbours.tolist())) < len(neighbours):
            raise UsageError(
                f"Units {text} cannot be cut out: neighbouring ones share atoms.",
                "Ask for a larger unit, or leave the net to atomic sites.",
            )
        owner[[atom, *neighbours]] = atom
        inner[chosen] = True
    if not inner.any():
        raise UsageError(
            f"There is no group of atoms {text} in this structure.",
            "Check the formula, or list the labels of the atoms.",
        )
    return owner, inner


def _nearest(
    atom: int, formula: dict[str, int], contacts: Contacts, usable: Booleans, elements: Sequence[str]
) -> list[int] | None:
    """The contacts of a central atom with the neighbours that the formula asks for, None if there are too few."""
    at = np.flatnonzero(usable & ((contacts.first == atom) | (contacts.second == atom)))
    at = at[np.argsort(contacts.distance[at], kind="stable")]
    neighbours = np.where(contacts.first[at] == atom, contacts.second[at], contacts.first[at])
    chosen: list[int] = []
    for element, count in formula.items():
        own = [int(place) for place, other in zip(at, neighbours, strict=True) if elements[int(other)] == element]
        wanted = count - (1 if element == elements[atom] else 0)
        if len(own) < wanted:
            return None
        chosen += own[:wanted]
    return chosen
