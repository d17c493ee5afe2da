"""Structures that a program already holds: `ase.Atoms` and `pymatgen` structures."""

from __future__ import annotations

from typing import Any

import numpy as np

from sitesym.errors import NotAStructureError, UsageError
from sitesym.reading.checks import by_weight, check_structure
from sitesym.reading.elements import symbols
from sitesym.reading.listing import Listing, identity, numbered
from sitesym.reading.merging import assemble
from sitesym.reading.molecule import Molecule
from sitesym.reading.text import counted, listed, printable
from sitesym.structure import OpenQuestion, Structure

_DEUTERIUM = (1.9, 2.2)
_TRITIUM = (2.9, 3.2)


def read_object(thing: Any) -> Structure:
    """The structure in an `ase.Atoms` or a pymatgen `Structure`; partial occupancies and labels of the latter are kept.

    Raises UsageError for anything else, NotAStructureError for a molecule.
    """
    families = {cls.__module__.partition(".")[0] for cls in type(thing).__mro__}
    if "ase" in families and hasattr(thing, "get_scaled_positions"):
        return structure_of_atoms(thing, "ase.Atoms", "ase.Atoms")
    if "pymatgen" in families:
        return structure_of_pymatgen(thing)
    raise UsageError(
        f"A structure cannot be read from an object of the type {type(thing).__name__}.",
        "Give a path, '-', an ase.Atoms or a pymatgen Structure.",
    )


def structure_of_atoms(atoms: Any, source: str, format: str, questions: tuple[OpenQuestion, ...] = ()) -> Structure:
    """The structure in an `ase.Atoms` that repeats in three directions.

    Raises NotAStructureError when it does not.
    """
    lattice = np.array(atoms.cell[:], dtype=np.float64)
    rank = int(np.linalg.matrix_rank(lattice, tol=1e-6)) if np.isfinite(lattice).all() else 0
    if not atoms.pbc.any() or rank == 0:
        raise no_cell(source)
    if rank < 3:
        raise NotAStructureError(
            f"{source} has {counted(rank, 'lattice vector')} only.",
            "Give a cell with three vectors, empty space along the directions without repetition.",
        )
    if not atoms.pbc.all():
        message = "The structure repeats in some directions only; it was taken as a crystal of such layers or chains."
        questions = (*questions, OpenQuestion("not_periodic_everywhere", message))
    dummies = atoms.numbers == 0
    if dummies.any():
        message = f"{counted(int(dummies.sum()), 'site')} that hold no atoms left out."
        questions = (*questions, OpenQuestion("dummy_atoms", message))
        atoms = atoms[~dummies]
    elements = _elements_of_atoms(atoms, source)
    scaled = np.array(atoms.positions, dtype=np.float64) @ np.linalg.inv(lattice)
    listing = Listing(
        lattice, scaled, numbered(elements), elements, elements, np.ones(len(elements)), ("",) * len(elements)
    )
    return _finished(listing, printable(str(atoms.info.get("name", ""))), source, format, questions)


def molecule_of_atoms(atoms: Any, source: str) -> Molecule:
    """The molecule in an `ase.Atoms` without repetition.

    Raises NotAStructureError when it repeats, UsageError when it is no such object.
    """
    if not hasattr(atoms, "pbc") or not hasattr(atoms, "positions"):
        raise UsageError(f"A molecule cannot be read from {type(atoms).__name__}.", "Give a path or an ase.Atoms.")
    if atoms.pbc.any():
        raise no_molecule(source)
    name = printable(str(atoms.info.get("name", "")))
    return Molecule(_elements_of_atoms(atoms, source), np.array(atoms.positions), name, source)


def structure_of_pymatgen(thing: Any) -> Structure:
    """The structure in a pymatgen object with a lattice and sites; places of dummies are left out."""
    if not hasattr(thing, "lattice") or not hasattr(thing, "frac_coords"):
        raise NotAStructureError(
            f"A pymatgen {type(thing).__name__} has no unit cell.", "Give a pymatgen Structure, which has one."
        )
    rows = [
        (printable(str(getattr(site, "label", "") or site.species_string), 60), site.frac_coords, _symbol(kind), share)
        for site in thing
        for kind, share in site.species.items()
    ]
    dummies = [label for label, _, element, _ in rows if element not in symbols()]
    rows = [row for row in rows if row[2] in symbols()]
    if not rows:
        raise NotAStructureError("The pymatgen structure has no atoms.", "Add sites to it.")
    labels = tuple(label for label, *_ in rows)
    elements = tuple(element for *_, element, _ in rows)
    listing = Listing(
        np.array(thing.lattice.matrix, dtype=np.float64),
        np.array([position for _, position, _, _ in rows], dtype=np.float64),
        labels if len(set(labels)) > len(set(elements)) else numbered(elements),
        elements,
        elements,
        np.array([min(float(share), 1.0) for *_, share in rows]),
        ("",) * len(rows),
    )
    questions: tuple[OpenQuestion, ...] = ()
    if dummies:
        message = f"{counted(len(dummies), 'site')} that hold no atoms left out: {listed(dummies)}."
        questions = (OpenQuestion("dummy_atoms", message),)
    return _finished(listing, "", "pymatgen Structure", "pymatgen Structure", questions)


def no_cell(source: str) -> NotAStructureError:
    """The error for a molecule where a crystal is needed."""
    return NotAStructureError(
        f"{source} is a molecule without a unit cell.", "Give a crystal structure, such as a CIF or a POSCAR."
    )


def no_molecule(source: str) -> NotAStructureError:
    """The error for a crystal where a molecule is needed."""
    return NotAStructureError(
        f"{source} describes a crystal, not one molecule.", "Read it as a structure, or give a file without a cell."
    )


def _finished(listing: Listing, name: str, source: str, format: str, questions: tuple[OpenQuestion, ...]) -> Structure:
    """Merge, check and build, once the atoms of the whole cell are listed."""
    content = assemble(listing, identity())
    found = check_structure(listing.lattice, content.fractional, content.sites)
    return Structure(
        listing.lattice,
        content.fractional,
        content.sites,
        questions=by_weight((*found, *content.questions, *questions)),
        name=name,
        source=source,
        format=format,
    )


def _elements_of_atoms(atoms: Any, source: str) -> tuple[str, ...]:
    """Chemical symbols; hydrogen with the mass of a heavier isotope becomes D or T."""
    if len(atoms) == 0:
        raise NotAStructureError(f"{source} has no atoms.", "Give a structure with one atom at least.")
    return tuple(map(_isotope, atoms.get_chemical_symbols(), atoms.get_masses()))


def _isotope(symbol: str, mass: float) -> str:
    if symbol == "H" and _DEUTERIUM[0] < mass < _DEUTERIUM[1]:
        return "D"
    return "T" if symbol == "H" and _TRITIUM[0] < mass < _TRITIUM[1] else symbol


def _symbol(kind: Any) -> str:
    """The bare symbol of a pymatgen element, ion or dummy; isotopes of hydrogen go by name there, not by symbol."""
    element = getattr(kind, "element", None) or kind
    return str(getattr(element, "name", None) or getattr(kind, "symbol", kind))
