"""Zone-centre vibrations of crystals: species, activity and polarization from a structure file.

import sitesym
structure = sitesym.read("calcite.cif")
analysis = sitesym.analyse(structure)
explanation = sitesym.explain(analysis, sitesym.read_bands("raman.csv", "raman"))
sheet = sitesym.plan(analysis, faces=["001"], lasers=[532])
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from sitesym.version import __version__

if TYPE_CHECKING:
    from sitesym.analysis import Analysis, analyse
    from sitesym.bands.explanation import Explanation, explain
    from sitesym.bands.measurement import Band
    from sitesym.bands.reading import read_bands
    from sitesym.bonding import BondRules
    from sitesym.comparison import Comparison, compare
    from sitesym.errors import InconsistencyError, NotAStructureError, ReadError, SitesymError, UsageError
    from sitesym.experiment.run_sheet import RunSheet, plan
    from sitesym.molecule_analysis import MoleculeAnalysis, analyse_molecule, compare_molecules
    from sitesym.reading import read, read_molecule
    from sitesym.structure import Structure

_HOMES = {
    "Analysis": "sitesym.analysis",
    "analyse": "sitesym.analysis",
    "Band": "sitesym.bands.measurement",
    "Explanation": "sitesym.bands.explanation",
    "explain": "sitesym.bands.explanation",
    "read_bands": "sitesym.bands.reading",
    "BondRules": "sitesym.bonding",
    "Comparison": "sitesym.comparison",
    "compare": "sitesym.comparison",
    "InconsistencyError": "sitesym.errors",
    "NotAStructureError": "sitesym.errors",
    "ReadError": "sitesym.errors",
    "RunSheet": "sitesym.experiment.run_sheet",
    "SitesymError": "sitesym.errors",
    "UsageError": "sitesym.errors",
    "MoleculeAnalysis": "sitesym.molecule_analysis",
    "analyse_molecule": "sitesym.molecule_analysis",
    "compare_molecules": "sitesym.molecule_analysis",
    "plan": "sitesym.experiment.run_sheet",
    "read": "sitesym.reading",
    "read_molecule": "sitesym.reading",
    "Structure": "sitesym.structure",
}

__all__ = [
    "Analysis",
    "Band",
    "BondRules",
    "Comparison",
    "Explanation",
    "InconsistencyError",
    "MoleculeAnalysis",
    "NotAStructureError",
    "ReadError",
    "RunSheet",
    "SitesymError",
    "Structure",
    "UsageError",
    "__version__",
    "analyse",
    "analyse_molecule",
    "compare",
    "compare_molecules",
    "explain",
    "plan",
    "read",
    "read_bands",
    "read_molecule",
]


def __getattr__(name: str) -> Any:
    """Import a public name when it is first used, so that `import sitesym` costs nothing."""
    if name not in _HOMES:
        raise AttributeError(f"module 'sitesym' has no attribute '{name}'")
    from importlib import import_module

    return getattr(import_module(_HOMES[name]), name)


def __dir__() -> list[str]:
    return __all__
