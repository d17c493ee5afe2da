"""Reading structures: the only place where structure files are opened.

    read(source)           -> Structure   a crystal
    read_molecule(source)  -> Molecule    a file without a unit cell
    read_any(source)       -> whichever of the two it holds

A source is a path, "-" for standard input, an `ase.Atoms` or a pymatgen `Structure`. Libraries are imported when the
format at hand needs them.
"""

from __future__ import annotations

import os
from collections.abc import Sequence
from typing import IO, TYPE_CHECKING, Any

from sitesym.errors import UsageError
from sitesym.reading.molecule import Molecule, read_molecule
from sitesym.structure import Structure

if TYPE_CHECKING:
    from sitesym.reading.source import Given

__all__ = ["Molecule", "read", "read_any", "read_molecule"]


def read(
    source: str | os.PathLike[str] | Any,
    *,
    format: str | None = None,
    block: str | int | None = None,
    whole_cell: bool = False,
    elements: Sequence[str] | None = None,
    standard_input: IO[Any] | None = None,
) -> Structure:
    """The crystal structure in a file or an object, with open questions about everything doubtful in it.

    format          cif, poscar or the name of one of ASE's formats; by default it is recognised by the content.
    block           name or number (from 1) of the data block, or number of the step, where there are several.
    whole_cell      vouches that a file without symmetry lists every atom of the cell.
    elements        chemical symbols for a POSCAR that names none, one for each number of atoms.
    standard_input  stream to read instead of the process's own when the source is "-".

    Raises ReadError when the source cannot be read, NotAStructureError when it describes no crystal, UsageError when
    an argument does not suit it.
    """
    if not isinstance(source, (str, os.PathLike)):
        from sitesym.reading.objects import read_object

        _refuse("an object in memory", format=format, block=block, elements=elements)
        return read_object(source)
    from sitesym.reading.source import error_named, open_source

    given = open_source(source, standard_input)
    with error_named(given.name):
        return _crystal(given, format, block, whole_cell, elements)


def read_any(
    source: str | os.PathLike[str] | Any,
    *,
    block: str | int | None = None,
    whole_cell: bool = False,
    elements: Sequence[str] | None = None,
    standard_input: IO[Any] | None = None,
) -> Structure | Molecule:
    """The crystal structure in a file, or the molecule where the file has no unit cell; arguments as for `read`.

    Raises ReadError when the source cannot be read, NotAStructureError when it describes neither, UsageError when an
    argument does not suit it.
    """
    from sitesym.reading.recognise import OTHER, XYZ, recognise
    from sitesym.reading.source import error_named, open_source

    given = open_source(source, standard_input)
    with error_named(given.name):
        kind = recognise(given)
        if kind == XYZ:
            from sitesym.reading.xyz import read_xyz

            _refuse("a molecule", block=block, elements=elements)
            return read_xyz(given.text, given.name)
        if kind == OTHER:
            return _crystal_or_molecule(given, block, whole_cell, elements)
        return _crystal(given, None, block, whole_cell, elements)


def _crystal_or_molecule(
    given: Given, block: str | int | None, whole_cell: bool, elements: Sequence[str] | None
) -> Structure | Molecule:
    """What is in a file that only ASE can read."""
    from sitesym.reading.objects import molecule_of_atoms, structure_of_atoms
    from sitesym.reading.other import atoms_in

    _refuse("any file but a POSCAR", elements=elements)
    atoms, name, questions = atoms_in(given, None, block, whole_cell)
    if not atoms.pbc.any():
        return molecule_of_atoms(atoms, given.name)
    return structure_of_atoms(atoms, given.name, name, questions)


def _crystal(
    given: Given, format: str | None, block: str | int | None, whole_cell: bool, elements: Sequence[str] | None
) -> Structure:
    from sitesym.reading.recognise import CIF, NAMES, OTHER, POSCAR, XYZ, recognise

    kind = NAMES.get(format.lower(), OTHER) if format else recognise(given)
    if kind != POSCAR:
        _refuse("any file but a POSCAR", elements=elements)
    if kind == CIF:
        from sitesym.reading.cif import read_cif

        return read_cif(given.text, given.name, block, whole_cell)
    if kind == POSCAR:
        from sitesym.reading.poscar import read_poscar

        _refuse("a POSCAR", block=block)
        return read_poscar(given.text, given.name, elements)
    if kind == XYZ and format is None:
        from sitesym.reading.objects import no_cell

        raise no_cell(given.name)
    from sitesym.reading.other import read_other

    return read_other(given, format.lower() if format else None, block, whole_cell)


def _refuse(what: str, **arguments: object) -> None:
    """An argument that means nothing here is an error, not ignored."""
    for name, value in arguments.items():
        if value is not None:
            raise UsageError(f"The option '{name}' does not apply to {what}.", "Leave it out.")
