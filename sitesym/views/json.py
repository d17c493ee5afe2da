"""The JSON document of an analysis, for other programs: a contract, whose keys are added to and never renamed.

`SCHEMA` counts up when that is broken. Labels are plain ASCII (`A1g`, `E'`, `A2''`), lengths in Å, and the document is
strict JSON: no NaN, no infinity, no character outside ASCII.
"""

from __future__ import annotations

import json
from typing import TYPE_CHECKING, Any

from sitesym.version import __version__
from sitesym.views.labels import characters
from sitesym.views.molecule_json import bands, molecules, units

if TYPE_CHECKING:
    import numpy as np
    import numpy.typing as npt

    from sitesym.analysis import Analysis, SiteRow, SpeciesRow
    from sitesym.molecule_analysis import MoleculeAnalysis, MoleculeComparison
    from sitesym.structure import OpenQuestion

    Floats = npt.NDArray[np.float64]

SCHEMA = 1
Document = dict[str, Any]


def render(analysis: Analysis) -> str:
    """The document as text, ending in a line feed."""
    return json.dumps(document(analysis), indent=2, allow_nan=False, ensure_ascii=True) + "\n"


def render_molecule(result: MoleculeAnalysis) -> str:
    """The document of a free molecule as text."""
    from sitesym.views.free_molecule_data import molecule_document

    return json.dumps(molecule_document(result), indent=2, allow_nan=False, ensure_ascii=True) + "\n"


def render_comparison(result: MoleculeComparison) -> str:
    """The document of two free molecules side by side as text."""
    from sitesym.views.free_molecule_data import comparison_document

    return json.dumps(comparison_document(result), indent=2, allow_nan=False, ensure_ascii=True) + "\n"


def document(analysis: Analysis) -> Document:
    """The document as plain dictionaries, lists, strings, numbers, booleans and None.

    Where molecules were not looked for, `molecules` and `units` are empty, and the species' `translational`,
    `librational`, `internal` and `framework` are None, which means not counted and not zero.
    """
    return {
        "schema": SCHEMA,
        "version": __version__,
        "input": _input(analysis),
        "space_group": _space_group(analysis),
        "factor_group": _factor_group(analysis),
        "sites": [_site(row) for row in analysis.sites],
        "species": [_species(analysis, row) for row in analysis.species],
        "totals": _totals(analysis),
        "settings": _settings(analysis),
        "molecules": molecules(analysis),
        "units": units(analysis),
        "expected_bands": bands(analysis),
    }


def _input(analysis: Analysis) -> Document:
    structure = analysis.structure
    return {
        "path": characters(structure.source),
        "format": structure.format,
        "name": characters(structure.name),
        "formula": structure.formula,
        "atoms_in_cell": len(structure),
        "ordered": analysis.is_ordered,
        "warnings": [_warning(question) for question in analysis.cautions],
    }


def _warning(question: OpenQuestion) -> Document:
    return {"code": question.code, "message": characters(question.message)}


def _space_group(analysis: Analysis) -> Document:
    symmetry, declared, scan = analysis.symmetry, analysis.structure.declared, analysis.scan
    stated = {
        "number": declared.number,
        "hermann_mauguin": declared.hermann_mauguin and characters(declared.hermann_mauguin),
        "hall": declared.hall and characters(declared.hall),
    }
    return {
        "number": symmetry.number,
        "hermann_mauguin": analysis.space_group,
        "hall": symmetry.setting.hall,
        "choice": symmetry.setting.choice,
        "tolerance": float(symmetry.tolerance),
        "declared": stated if any(value is not None for value in stated.values()) else None,
        "scan": [
            {"tolerance": float(point.tolerance), "number": point.number, "hermann_mauguin": point.symbol}
            for point in (scan.points if scan else ())
        ],
        "plateau": [float(end) for end in scan.plateau] if scan else None,
        "supergroup": _supergroup(analysis),
    }


def _supergroup(analysis: Analysis) -> Document | None:
    near = analysis.scan.supergroup if analysis.scan else None
    if near is None:
        return None
    return {
        "number": near.number,
        "hermann_mauguin": near.symbol,
        "tolerance": float(near.tolerance),
        "displacement": float(near.displacement),
        "strain": float(near.strain),
    }


def _factor_group(analysis: Analysis) -> Document:
    group = analysis.factor_group
    return {
        "schoenflies": group.schoenflies,
        "hermann_mauguin": analysis.factor_group_symbol,
        "order": len(group),
        "has_inversion": group.has_inversion,
        "axes": analysis.axes,
    }


def _site(row: SiteRow) -> Document:
    return {
        "label": characters(row.label),
        "element": row.element,
        "occupancy": float(row.occupancy),
        "wyckoff": row.wyckoff,
        "multiplicity": row.multiplicity,
        "count_primitive": row.count,
        "position": [float(value) for value in row.position],
        "site_group": {"schoenflies": row.group.schoenflies, "hermann_mauguin": row.symbol},
        "site_species": dict(row.site_species),
        "contribution": dict(row.contribution),
    }


def _species(analysis: Analysis, row: SpeciesRow) -> Document:
    origin = analysis.molecular.origins[row.label] if analysis.molecular else None
    return {
        "label": row.label,
        "dimension": row.dimension,
        "total": row.total,
        "acoustic": row.acoustic,
        "optic": row.optic,
        "infrared": row.activity.infrared,
        "raman": row.activity.raman,
        "hyper_raman": row.activity.hyper_raman,
        "silent": row.activity.silent,
        "polar": list(row.activity.polar),
        "polar_space": [_vector(direction) for direction in row.tensor.polar_space],
        "rotations": list(row.activity.rotations),
        "raman_tensor": _tensor(row),
        "resonance": list(row.tensor.antisymmetric),
        "translational": origin.translational if origin else None,
        "librational": origin.librational if origin else None,
        "internal": origin.internal if origin else None,
        "framework": origin.framework if origin else None,
    }


def _tensor(row: SpeciesRow) -> Document:
    """Letters and components. `polar` is None also where symmetry leaves the direction open: see `polar_space`."""
    from sitesym.tensors import element_expressions
    from sitesym.views.sentences import is_direction_open

    fixed = not is_direction_open(row)
    return {
        "letters": list(row.tensor.letters),
        "components": [
            {
                "tensor": [list(line) for line in element_expressions(component, row.tensor.letters)],
                "polar": _vector(component.polar) if fixed and component.polar is not None else None,
            }
            for component in row.tensor.components
        ],
    }


def _vector(direction: Floats) -> list[float]:
    """Components to ten decimals, without negative zeros."""
    return [round(float(value), 10) + 0.0 for value in direction]


def _totals(analysis: Analysis) -> Document:
    totals = analysis.totals
    return {
        "atoms_primitive": totals.atoms_primitive,
        "branches": totals.branches,
        "optic": totals.optic,
        "infrared": totals.infrared,
        "raman": totals.raman,
        "infrared_and_raman": totals.infrared_and_raman,
        "silent": totals.silent,
        "hyper_raman": totals.hyper_raman,
    }


def _settings(analysis: Analysis) -> list[Document]:
    """Labels of the B species in the six orthorhombic settings, the report's own first; empty for other crystals."""
    return [
        {"hermann_mauguin": one.symbol, "axes": one.axes, "standard": one.standard, "labels": dict(one.labels)}
        for one in analysis.settings
    ]
