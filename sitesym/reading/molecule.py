"""A free molecule: elements and positions, from a file without a unit cell."""

from __future__ import annotations

import os
from dataclasses import dataclass
from typing import IO, Any

import numpy as np

from sitesym.errors import NotAStructureError
from sitesym.reading.elements import symbols
from sitesym.reading.listing import LARGEST
from sitesym.reading.neighbours import near_pairs
from sitesym.reading.text import printable
from sitesym.structure import Floats

COINCIDENT = 0.1
"""Two atoms of a molecule nearer than this (Å) are on one place: half of any bond is longer."""


@dataclass(frozen=True, eq=False)
class Molecule:
    """Atoms of one molecule.

    elements   n chemical symbols, D and T included.
    positions  (n, 3) Cartesian coordinates in Å, in the frame of the file.
    name       what the file calls it, or "".
    source     where it came from.
    """

    elements: tuple[str, ...]
    positions: Floats
    name: str = ""
    source: str = ""

    def __post_init__(self) -> None:
        positions = np.array(self.positions, dtype=np.float64)
        if not self.elements:
            raise NotAStructureError("The molecule has no atoms.", "Check that the file lists atoms.")
        if positions.shape != (len(self.elements), 3) or not np.isfinite(positions).all():
            raise NotAStructureError("The positions are no three finite numbers for each atom.", "Correct the file.")
        unknown = sorted(set(self.elements) - set(symbols()))
        if unknown:
            raise NotAStructureError(f"{printable(unknown[0], 20)!r} is no chemical symbol.", "Correct the file.")
        _refuse_impossible(self.elements, positions)
        positions.setflags(write=False)
        object.__setattr__(self, "positions", positions)

    def __len__(self) -> int:
        return len(self.elements)

    def __repr__(self) -> str:
        name = f", {printable(self.name, 40)!r}" if self.name else ""
        return f"Molecule({len(self)} atoms{name})"


def _refuse_impossible(elements: tuple[str, ...], positions: Floats) -> None:
    """Raise NotAStructureError for atoms beyond all bounds and for two on one place."""
    if np.abs(positions).max() > LARGEST:
        atom = int(np.abs(positions).max(axis=1).argmax())
        raise NotAStructureError(
            f"A coordinate of atom {atom + 1} ({elements[atom]}) exceeds {LARGEST:,.0f} Å.", "Give coordinates in Å."
        )
    corner, box = positions.min(axis=0), np.ptp(positions, axis=0) + 10 * COINCIDENT
    pairs = near_pairs(np.diag(box), (positions - corner) / box, COINCIDENT)
    if len(pairs.first):
        one, two, distance = int(pairs.first[0]), int(pairs.second[0]), float(pairs.distances[0])
        raise NotAStructureError(
            f"Atoms {one + 1} ({elements[one]}) and {two + 1} ({elements[two]}) are only {distance:.3f} Å apart.",
            "Keep one of two alternative positions of a disordered atom.",
        )


def read_molecule(source: str | os.PathLike[str] | Any, *, standard_input: IO[Any] | None = None) -> Molecule:
    """The molecule in a file of any format without a cell that ASE reads (xyz and others), "-", or an ase.Atoms.

    Raises ReadError when the source cannot be read, NotAStructureError when it describes a crystal.
    """
    from sitesym.reading.objects import molecule_of_atoms, no_molecule
    from sitesym.reading.other import atoms_in
    from sitesym.reading.recognise import CIF, POSCAR, XYZ, recognise
    from sitesym.reading.source import error_named, open_source
    from sitesym.reading.xyz import read_xyz

    if not isinstance(source, (str, os.PathLike)):
        return molecule_of_atoms(source, "ase.Atoms")
    given = open_source(source, standard_input)
    with error_named(given.name):
        kind = recognise(given)
        if kind == XYZ:
            return read_xyz(given.text, given.name)
        if kind in (CIF, POSCAR):
            raise no_molecule(given.name)
        atoms, _, _ = atoms_in(given)
        return molecule_of_atoms(atoms, given.name)
