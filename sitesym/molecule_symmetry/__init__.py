"""The point group of a free molecule, found from measured positions (see `search`)."""

from sitesym.molecule_symmetry.result import HigherGroup, MoleculeSymmetry
from sitesym.molecule_symmetry.search import DEFAULT_TOLERANCE, find_operations

__all__ = ["DEFAULT_TOLERANCE", "HigherGroup", "MoleculeSymmetry", "find_operations"]
