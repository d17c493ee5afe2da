"""CIF (Hall, Allen and Brown 1991, Acta Cryst. A47, 655): text -> Structure.

The tokens are read by the library gemmi; values, symmetry, expansion and merging are done here, because real files
need more care than general readers take.
"""

from __future__ import annotations

import numpy as np

from sitesym.reading.checks import by_weight, check_content, check_structure
from sitesym.reading.cif_cell import read_cell
from sitesym.reading.cif_document import Block, choose, parse
from sitesym.reading.cif_sites import read_sites
from sitesym.reading.cif_symmetry import find_symmetry
from sitesym.reading.expectation import read_expectation
from sitesym.reading.formula import unknown_symbols
from sitesym.reading.occupancies import assemble_checked
from sitesym.reading.text import listed, printable
from sitesym.structure import OpenQuestion, Structure

_NAMES = (
    "_chemical_name_mineral",
    "_chemical_name_common",
    "_chemical_name_systematic",
    "_chemical_name_structure_type",
    "_chemical_name",
)


def read_cif(text: str, source: str, block: str | int | None = None, whole_cell: bool = False) -> Structure:
    """The structure in a CIF text.

    `source` names it in messages; `block` chooses among several structures; `whole_cell` vouches that a file without
    symmetry lists every atom. Raises ReadError and NotAStructureError with the cause.
    """
    blocks = parse(text, source)
    chosen = choose(blocks, block, source)
    lattice, cell_questions = read_cell(chosen)
    expectation = read_expectation(chosen, abs(float(np.linalg.det(lattice))))
    listing, site_questions = read_sites(chosen, lattice, expectation.elements)
    symmetry = find_symmetry(chosen, listing, expectation, whole_cell)
    content, occupancy_questions = assemble_checked(listing, symmetry.operations, expectation)
    bare = Structure(lattice, content.fractional, content.sites)
    questions = (
        *check_content(bare, expectation),
        *check_structure(lattice, content.fractional, content.sites),
        *_formula_question(chosen),
        *symmetry.questions,
        *content.questions,
        *occupancy_questions,
        *site_questions,
        *cell_questions,
        *_block_questions(chosen, blocks),
    )
    name = printable(chosen.value(*_NAMES) or "")
    return Structure(
        lattice, content.fractional, content.sites, symmetry.declared, by_weight(questions), name, source, "CIF"
    )


def _formula_question(block: Block) -> tuple[OpenQuestion, ...]:
    """The formula counts atoms of no known element, and the sites of that name were left out."""
    types = {word.strip().rstrip("0123456789+-") for word in block.column("_atom_site_type_symbol")}
    unknown = sorted(unknown_symbols(block.value("_chemical_formula_sum")) & types)
    if not unknown:
        return ()
    message = (
        f"The formula of the file holds {listed(unknown)}, which is no element: sites of that name were left out, and "
        "every count below lacks their vibrations."
    )
    return (OpenQuestion("composition_mismatch", message),)


def _block_questions(chosen: Block, blocks: tuple[Block, ...]) -> tuple[OpenQuestion, ...]:
    """Other structures in the file, modulation and magnetic order."""
    questions = []
    holding = sum(block.has_atoms for block in blocks)
    if holding > 1:
        message = f"The file holds {holding} structures; this is {printable(chosen.name, 60)!r}."
        questions.append(OpenQuestion("several_blocks", message))
    dimension = chosen.value("_cell_modulation_dimension")
    if dimension not in (None, "0"):
        questions.append(OpenQuestion("modulated", "The structure is modulated; this is its average."))
    if any("magn" in tag for tag in chosen.columns):
        message = "The file describes magnetic order; the operations were taken without time reversal."
        questions.append(OpenQuestion("magnetic", message))
    return tuple(questions)
