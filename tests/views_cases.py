"""Crystals for the tests of the views, and readers of printed text that share no code with the views."""

from __future__ import annotations

import re
import tomllib
import unicodedata
from dataclasses import replace
from functools import lru_cache
from pathlib import Path
from typing import Any

import gemmi
import numpy as np

from sitesym.analysis import Analysis, analyse
from sitesym.structure import DeclaredSymmetry, Occupant, OpenQuestion, Site, Structure

_REFERENCE = Path(__file__).parent / "reference" / "decompositions.toml"
ENTRIES = {entry["name"]: entry for entry in tomllib.loads(_REFERENCE.read_text(encoding="utf-8"))["compound"]}
HOSTILE = "<script>alert(1)</script>"
FORMULA = "=cmd|'/C calc'!A0"
ESCAPES = "\x1b[2J\x1b]0;owned\x07\u202etxt.exe\r\nnext"
SPECIALS = "100% #1 a_b^c & {x} $1 \\input{/etc/passwd} ~ [z] ∥ 中 é"


def of_entry(entry: dict[str, Any]) -> Structure:
    """The whole cell of one compound, expanded by gemmi's operations."""
    lattice = np.array(gemmi.UnitCell(*entry["lattice"]).orth.mat.tolist()).T
    operations = list(gemmi.SpaceGroup(entry["hermann_mauguin"]).operations())
    positions: list[np.ndarray] = []
    sites: list[Site] = []
    for site in entry["sites"]:
        images: list[np.ndarray] = []
        for operation in operations:
            image = np.mod(operation.apply_to_xyz(site["xyz"]), 1)
            if all(np.abs((image - other + 0.5) % 1 - 0.5).max() > 1e-3 for other in images):
                images.append(image)
        positions += images
        sites += [Site(site["label"], (Occupant(site["element"]),))] * len(images)
    return Structure(lattice, np.array(positions), tuple(sites))


@lru_cache(maxsize=64)
def case(name: str) -> Analysis:
    """The analysis of one compound of the reference file, with the scan of tolerances."""
    return analyse(of_entry(ENTRIES[name]))


def renamed(analysis: Analysis, name: str, label: str | None = None) -> Analysis:
    """The same crystal under another name, all its sites under another label."""
    structure = analysis.structure
    sites = tuple(replace(site, label=label if label is not None else site.label) for site in structure.sites)
    return analyse(replace(structure, name=name, sites=sites, source=name))


def with_questions(analysis: Analysis, *codes: str) -> Analysis:
    """The same crystal with one long open question for each code."""
    asked = tuple(OpenQuestion(code, f"Question {n} ({code}): " + "word " * 25) for n, code in enumerate(codes))
    return analyse(replace(analysis.structure, questions=asked))


def triclinic() -> Structure:
    """Three atoms in general positions of P1, in no special cell."""
    lattice = np.array([[5.1, 0, 0], [0.7, 6.2, 0], [0.9, 1.1, 7.3]])
    positions = np.array([[0.1, 0.2, 0.3], [0.52, 0.13, 0.71], [0.83, 0.64, 0.05]])
    return Structure(lattice, positions, tuple(Site(one, (Occupant(one),)) for one in ("H", "C", "N")))


def disordered() -> Structure:
    """Calcite with a tenth of the calcium replaced."""
    calcite = of_entry(ENTRIES["calcite"])
    mixed = (Occupant("Ca", 0.9), Occupant("Mg", 0.1))
    sites = tuple(replace(site, occupants=mixed) if site.element == "Ca" else site for site in calcite.sites)
    return replace(calcite, sites=sites, declared=DeclaredSymmetry(167, "R -3 c:H"))


def ascii_labels(printed: str) -> str:
    """Unicode subscripts and primes back to the plain labels that the literature's are written in here."""
    return unicodedata.normalize("NFKC", printed.replace("″", "''").replace("′", "'"))


def sum_of(printed: str) -> dict[str, int]:
    """`A1g + 3A2g` -> {"A1g": 1, "A2g": 3}."""
    terms = re.findall(r"(\d*)([A-Z][0-9]?[gu]?'{0,2})(?: \+ |\s|$)", ascii_labels(printed))
    return {label: int(count or 1) for count, label in terms}
