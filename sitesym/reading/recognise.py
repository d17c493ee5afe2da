"""The format of a file, by its content first and its name second."""

from __future__ import annotations

import re
from pathlib import PurePath

from sitesym.errors import ReadError
from sitesym.reading.poscar import looks_like_poscar
from sitesym.reading.source import Given
from sitesym.reading.xyz import looks_like_xyz

CIF, POSCAR, XYZ, OTHER = "cif", "poscar", "xyz", "other"

NAMES = {"cif": CIF, "mcif": CIF, "mmcif": CIF, "poscar": POSCAR, "contcar": POSCAR, "vasp": POSCAR, "xyz": XYZ}
"""What a user may call the formats that are read here; any other name is one of ASE's."""

_FOREIGN = {
    b"%PDF": "a PDF document",
    b"PK\x03\x04": "a ZIP archive or office document",
    b"\x89PNG": "a picture",
    b"\xff\xd8\xff": "a picture",
    b"GIF8": "a picture",
    b"\xd0\xcf\x11\xe0": "an old office document",
    b"{\\rtf": "a word-processor document",
    b"\x7fELF": "a program",
}
_WEB_PAGE = re.compile(r"\s*(<!doctype html|<html|<head)", re.IGNORECASE)
_CIF_BLOCK = re.compile(r"(?im)^[ \t]*data_")
_CIF_ITEM = re.compile(r"(?im)^[ \t]*(loop_|_[a-z])")


def recognise(given: Given) -> str:
    """One of CIF, POSCAR, XYZ and OTHER (to be left to ASE).

    Raises ReadError for content that is certainly no structure.
    """
    for magic, what in _FOREIGN.items():
        if given.data.lstrip()[: len(magic)] == magic:
            raise ReadError(f"{given.name} is {what}, not a structure file.", "Give the CIF or POSCAR itself.")
    if given.is_binary:
        return OTHER
    text = given.text
    if _WEB_PAGE.match(text):
        raise ReadError(f"{given.name} is a web page, not a structure file.", "Download the file itself and try again.")
    if _CIF_ITEM.search(text) and (_CIF_BLOCK.search(text) or _named_cif(given)):
        return CIF
    if looks_like_poscar(text):
        return POSCAR
    if looks_like_xyz(text):
        return XYZ
    if _named_cif(given):
        raise ReadError(f"{given.name} holds no CIF: it has no data items.", "Check what was saved under this name.")
    return POSCAR if _named_poscar(given) else OTHER


def _named_poscar(given: Given) -> bool:
    name = given.path.name.lower() if given.path is not None else ""
    return "poscar" in name or "contcar" in name or name.endswith(".vasp")


def _named_cif(given: Given) -> bool:
    return given.path is not None and PurePath(given.path.name.lower()).suffix in (".cif", ".mcif")
