"""Two structures compared: lattice and operation relation, correlation of species, zone folding, new activity."""

from sitesym.comparison.compare import compare
from sitesym.comparison.result import Comparison

__all__ = ["Comparison", "compare"]
