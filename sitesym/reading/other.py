"""Every other format: left to ASE's readers, except where they would take the asymmetric unit for the whole cell."""

from __future__ import annotations

import re
import tempfile
import warnings
from pathlib import Path
from typing import Any

from sitesym.errors import NotAStructureError, ReadError, UsageError
from sitesym.reading.objects import structure_of_atoms
from sitesym.reading.source import Given
from sitesym.reading.text import counted, printable
from sitesym.structure import OpenQuestion, Structure

_ASYMMETRIC = {
    "res": re.compile(r"(?im)^(SYMM\b|LATT\s+(?!-1\b))"),
    "proteindatabank": re.compile(r"(?m)^CRYST1.{49}(?!\s*(P\s*1|1)?\s*(\d+\s*)?$)"),
    "espresso-in": re.compile(r"(?im)^\s*space_group\s*="),
}
"""Where such a line stands, the format lists one asymmetric unit, and ASE reads it without applying the symmetry."""

_NO_NUMBER = re.compile(r"(?:could not convert string to float|invalid literal for \w+\(\)[^:]*): (.+)")
"""How Python says that a word is no number."""

_NEVER = frozenset({"cif", "vasp", "db", "mysql", "postgresql"})
"""Formats that are read here, and those that are no files."""


def read_other(given: Given, format: str | None, frame: str | int | None, whole_cell: bool) -> Structure:
    """The structure in a file that only ASE can read; `frame` (from 1) chooses among several, the last by default.

    Raises ReadError when ASE cannot read it, NotAStructureError when it is a molecule or an asymmetric unit.
    """
    atoms, name, questions = atoms_in(given, format, frame, whole_cell)
    return structure_of_atoms(atoms, given.name, name, questions)


def atoms_in(
    given: Given, format: str | None = None, frame: str | int | None = None, whole_cell: bool = False
) -> tuple[Any, str, tuple[OpenQuestion, ...]]:
    """The `ase.Atoms` in a file, the name of its format, and what is doubtful about the choice.

    Raises NotAStructureError when the file lists an asymmetric unit, unless `whole_cell` vouches for it.
    """
    with tempfile.TemporaryDirectory(prefix="sitesym-") as folder, warnings.catch_warnings():
        warnings.simplefilter("ignore")
        path = _path(given, Path(folder))
        name = format or _recognise(path, given)
        if not whole_cell:
            _refuse_asymmetric_unit(given, name)
        frames = _frames(path, name, given)
    if not frames:
        raise NotAStructureError(f"{given.name}, read as {name}, holds no structure.", "Check what was saved.")
    if frame is not None:
        return frames[_index(frame, len(frames), given)], name, ()
    questions: tuple[OpenQuestion, ...] = ()
    if len(frames) > 1:
        message = f"The file holds {len(frames)} structures, such as steps of a calculation; this is the last."
        questions = (OpenQuestion("several_frames", message),)
    return frames[-1], name, questions


def _refuse_asymmetric_unit(given: Given, name: str) -> None:
    mark = _ASYMMETRIC.get(name)
    if mark is not None and not given.is_binary and mark.search(given.text):
        raise NotAStructureError(
            f"{given.name} lists the asymmetric unit only ({name}), which is not expanded here.",
            "Convert it to CIF; or say with --whole-cell that it lists every atom of the cell.",
        )


def _path(given: Given, folder: Path) -> Path:
    """The file itself, or a copy of what came through standard input or was compressed."""
    if given.path is not None and not given.packed:
        return given.path
    suffixes = {".gz", ".bz2", ".xz"}
    name = given.path.name if given.path is not None else "structure"
    copy = folder / (Path(name).stem if Path(name).suffix in suffixes else name)
    copy.write_bytes(given.data)
    return copy


def _recognise(path: Path, given: Given) -> str:
    from ase.io.formats import UnknownFileTypeError, filetype, ioformats

    try:
        name = str(filetype(str(path)))
    except (UnknownFileTypeError, OSError, ValueError):
        name = ""
    if name not in ioformats or name in _NEVER:
        raise ReadError(
            f"The format of {given.name} is not recognised: it is no CIF, no POSCAR and none that ASE knows.",
            "Give a CIF, POSCAR or XYZ file, or convert it to one of these.",
        )
    return name


def _frames(path: Path, name: str, given: Given) -> list[Any]:
    from ase.io.formats import ioformats, read

    if name not in ioformats or name in _NEVER or not ioformats[name].can_read:
        raise UsageError(
            f"{printable(name, 40)!r} is no format that can be read.", "Use cif, poscar, xyz, or a format name of ASE."
        )
    try:
        found = read(str(path), index=":", format=name)
    except ImportError as error:
        raise ReadError(f"To read {name} files, ASE needs {printable(str(error.name))}.", "Install it.") from None
    except (Exception, SystemExit) as error:
        raise ReadError(
            f"{given.name} cannot be read as {name}: {_cause(error)}.", "Correct it, or use a CIF."
        ) from error
    return list(found)


def _cause(error: BaseException) -> str:
    """What a reader of ASE complains of, without the words of the programming language."""
    if isinstance(error, UnicodeDecodeError):
        return "it holds characters that are no plain text"
    match = _NO_NUMBER.search(str(error))
    return f"{printable(match[1], 40)} stands where a number belongs" if match else "it does not keep to that format"


def _index(frame: str | int, total: int, given: Given) -> int:
    text = str(frame).strip()
    if not text.isdecimal() or not 1 <= int(text) <= total:
        raise UsageError(
            f"{given.name} has no structure {printable(text, 40)!r}.",
            f"It holds {counted(total, 'structure')}: give a number from 1 to {total}.",
        )
    return int(text) - 1
