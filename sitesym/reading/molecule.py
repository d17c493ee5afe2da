"""A free molecule: elements and positions, from a file without a unit cell."""

from __future__ import annotations

import os
from dataclasses import dataclass
from typing import IO, Any

import numpy as np

from sitesym.errors import NotAStructureError
from sitesym.reading.elements import symbols
from sitesym.reading.text import printable
from sitesym.structure import Floats


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
        positions.setflags(write=False)
        object.__setattr__(self, "positions", positions)

    def __len__(self) -> int:
        return len(self.elements)


def read_molecule(source: str | os.PathLike[str] | Any, *, standard_input: IO[Any] | None = None) -> Molecule:
    """The molecule in a file of any format without a cell that ASE reads (xyz and others), "-", or an ase.Atoms.

    Raises ReadError when the source cannot be read, NotAStructureError when it describes a crystal.
    """
    from sitesym.reading.objects import molecule_of_atoms
    from sitesym.reading.other import atoms_in
    from sitesym.reading.source import open_source
    from sitesym.reading.xyz import looks_like_xyz, read_xyz

    if not isinstance(source, (str, os.PathLike)):
        return molecule_of_atoms(source, "ase.Atoms")
    given = open_source(source, standard_input)
    if not given.is_binary and looks_like_xyz(given.text):
        return read_xyz(given.text, given.name)
    atoms, _, _ = atoms_in(given)
    return molecule_of_atoms(atoms, given.name)
