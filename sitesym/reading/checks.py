"""What a careful reader asks of a structure before believing it, as open questions in order of weight."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from sitesym.reading.contacts import close_contacts
from sitesym.reading.elements import HYDROGENS
from sitesym.reading.expectation import Expectation, pooled
from sitesym.reading.skeleton import open_carbons
from sitesym.reading.text import amount, counted, listed, printable
from sitesym.structure import FULL, Floats, OpenQuestion, Site, Structure

_WEIGHT = (
    "hydrogen_missing",
    "composition_mismatch",
    "atoms_too_close",
    "symmetry_not_closed",
    "symmetry_clash",
    "cell_clash",
    "elements_unnamed",
    "elements_guessed",
    "formula_units",
)
_WATER_LABELS = ("wat", "ow", "oh", "w", "hoh")


def by_weight(questions: Iterable[OpenQuestion]) -> tuple[OpenQuestion, ...]:
    """The gravest first; each only once."""
    order = {code: place for place, code in enumerate(_WEIGHT)}
    return tuple(sorted(dict.fromkeys(questions), key=lambda question: order.get(question.code, len(order))))


def check_structure(
    lattice: Floats, fractional: Floats, sites: tuple[Site, ...], named: bool = True
) -> tuple[OpenQuestion, ...]:
    """Doubts that any structure may raise: distances, occupancies, disorder, isotopes, the sense of its axes.

    `named` is false when the elements are placeholders.
    """
    return (
        *_too_close(lattice, fractional, sites, named),
        *_occupancies(sites),
        *_disorder(sites),
        *(_deuterium(sites) if named else ()),
        *_sense(lattice),
    )


def check_content(structure: Structure, expectation: Expectation) -> tuple[OpenQuestion, ...]:
    """Doubts from comparing the cell's content with the formula of the file."""
    found = pooled(structure.composition)
    expected = expectation.cell(structure.composition)
    if not expected:
        return _bare_skeleton(structure) + _water_without_hydrogen(structure)
    return (
        *_hydrogen(found, expected),
        *_composition(found, expected, expectation),
        *_missing_hydrogen_sites(found, expected, structure),
    )


def _too_close(lattice: Floats, fractional: Floats, sites: tuple[Site, ...], named: bool) -> tuple[OpenQuestion, ...]:
    contacts = close_contacts(lattice, fractional, sites, named)
    if not contacts:
        return ()
    nearest = contacts[0]
    one, two = (printable(sites[index].label, 40) for index in (nearest.first, nearest.second))
    return (
        OpenQuestion(
            "atoms_too_close",
            f"{_are(len(contacts), 'pair of atoms', 'pairs of atoms')} closer than any bond, nearest {one} and {two} "
            f"at {nearest.distance:.2f} Å: a misprint, or disorder that the occupancies do not tell.",
        ),
    )


def _occupancies(sites: tuple[Site, ...]) -> tuple[OpenQuestion, ...]:
    distinct = list(dict.fromkeys(sites))
    partial = [f"{site.label} {site.occupancy:.3g}" for site in distinct if site.occupancy < FULL]
    mixed = [
        f"{site.label} " + " + ".join(f"{occupant.element} {occupant.occupancy:.3g}" for occupant in site.occupants)
        for site in distinct
        if len(site.occupants) > 1
    ]
    questions = []
    if partial:
        questions.append(
            OpenQuestion(
                "partial_occupancy",
                f"{_are(len(partial), 'site')} only partly occupied ({listed(partial)}): the analysis is of the "
                "average structure.",
            )
        )
    if mixed:
        questions.append(
            OpenQuestion(
                "mixed_occupancy",
                f"{_are(len(mixed), 'site')} shared by several elements ({listed(mixed)}): the analysis is of the "
                "average structure.",
            )
        )
    return tuple(questions)


def _are(number: int, noun: str, plural: str = "") -> str:
    return f"{counted(number, noun, plural)} {'is' if number == 1 else 'are'}"


def _disorder(sites: tuple[Site, ...]) -> tuple[OpenQuestion, ...]:
    groups = sorted({site.disorder_group for site in sites} - {""})
    if not groups:
        return ()
    atoms = sum(bool(site.disorder_group) for site in sites)
    return (
        OpenQuestion(
            "disorder",
            f"{_are(atoms, 'atom')} in disorder groups ({listed(groups)}), alternatives that are never there together; "
            "all were kept.",
        ),
    )


def _deuterium(sites: tuple[Site, ...]) -> tuple[OpenQuestion, ...]:
    counts = {isotope: _number_of(isotope, sites) for isotope in ("D", "T")}
    shown = " and ".join(f"{amount(count)} {isotope}" for isotope, count in counts.items() if count)
    if not shown:
        return ()
    message = f"The cell holds {shown}: counted apart from H, with the same symmetry and another mass."
    return (OpenQuestion("deuterium", message),)


def _number_of(element: str, sites: tuple[Site, ...]) -> float:
    return sum(occupant.occupancy for site in sites for occupant in site.occupants if occupant.element == element)


def _sense(lattice: Floats) -> tuple[OpenQuestion, ...]:
    if np.linalg.det(lattice) > 0:
        return ()
    return (OpenQuestion("left_handed", "The axes a, b, c form a left-handed set; they were kept as they are."),)


def _hydrogen(found: dict[str, float], expected: dict[str, float]) -> tuple[OpenQuestion, ...]:
    wanted, there = expected.get("H", 0.0), found.get("H", 0.0)
    if wanted - there <= max(0.25, 0.02 * wanted):
        return ()
    return (
        OpenQuestion(
            "hydrogen_missing",
            f"Hydrogen atoms are missing: the formula asks for {amount(wanted)} in the cell, the sites give "
            f"{amount(there)}. Every count below lacks the vibrations of {amount(wanted - there)} atoms.",
        ),
    )


def _missing_hydrogen_sites(
    found: dict[str, float], expected: dict[str, float], structure: Structure
) -> tuple[OpenQuestion, ...]:
    """The formula itself forgets hydrogen, which the names of the sites betray."""
    if "H" in expected or "H" in found:
        return ()
    return _bare_skeleton(structure) + _water_without_hydrogen(structure)


def _water_without_hydrogen(structure: Structure) -> tuple[OpenQuestion, ...]:
    if HYDROGENS & set(structure.composition):
        return ()
    oxygens = {site.label for site in structure.sites if any(item.element == "O" for item in site.occupants)}
    water = sorted(label for label in oxygens if label.lower().rstrip("0123456789'abc") in _WATER_LABELS)
    if not water:
        return ()
    return (
        OpenQuestion(
            "hydrogen_missing",
            f"Sites named as water or hydroxyl ({listed(water)}) come without hydrogen atoms: every count below lacks "
            "their vibrations.",
        ),
    )


def _bare_skeleton(structure: Structure) -> tuple[OpenQuestion, ...]:
    """Carbon atoms with one or two neighbours, in a file without any hydrogen."""
    carbons = open_carbons(structure)
    if not carbons:
        return ()
    message = (
        f"Hydrogen atoms seem to be missing: the file lists none, yet {carbons} carbon atoms of the cell have no more "
        "than two neighbours, at single or aromatic distances. If hydrogen is there, every count below lacks its "
        "vibrations."
    )
    return (OpenQuestion("hydrogen_missing", message),)


def _composition(
    found: dict[str, float], expected: dict[str, float], expectation: Expectation
) -> tuple[OpenQuestion, ...]:
    """Elements other than hydrogen that are too few or too many, and hydrogen in excess."""
    names = sorted({*found, *expected})
    off = [name for name in names if _differs(name, found.get(name, 0.0), expected.get(name, 0.0), expectation)]
    if not off:
        return ()
    ratio = _common_ratio(found, expected) if off != ["H"] else None
    units = expectation.units
    if ratio is not None and units is not None:
        source = "says" if expectation.stated else "implies by its density"
        return (
            OpenQuestion(
                "formula_units",
                f"The cell holds {amount(ratio * units)} formula units, the file {source} {amount(units)}.",
            ),
        )
    shown = listed([f"{name} {amount(found.get(name, 0.0))} for {amount(expected.get(name, 0.0))}" for name in off], 8)
    return (
        OpenQuestion("composition_mismatch", f"The content of the cell is not that of the formula: {shown} expected."),
    )


def _differs(name: str, found: float, expected: float, expectation: Expectation) -> bool:
    slack = max(0.04 * expected, 0.02 * (expectation.units or 1.0), 0.1)
    return found - expected > slack if name == "H" else abs(found - expected) > slack


def _common_ratio(found: dict[str, float], expected: dict[str, float]) -> float | None:
    """Found over expected when it is the same for all elements but hydrogen."""
    heavy = [name for name in {*found, *expected} if name != "H"]
    if not heavy or any(expected.get(name, 0.0) == 0 for name in heavy):
        return None
    ratios = [found.get(name, 0.0) / expected[name] for name in heavy]
    return float(np.mean(ratios)) if max(ratios) - min(ratios) < 0.03 * max(ratios) else None
