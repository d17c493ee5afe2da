"""The JSON document of a comparison: a contract, whose keys are added to and never renamed.

`supercell` and `wavevector` refer to the primitive vectors that `primitive_basis` gives for each structure; `axes`,
`origin` and `conventional` to the parent's a, b, c. Wavevectors are in units of the reciprocal of these.
"""

from __future__ import annotations

import json
from typing import TYPE_CHECKING, Any

from sitesym.comparison.result import formula_units
from sitesym.version import __version__
from sitesym.views.compare_words import METHOD, paragraph
from sitesym.views.labels import TEXT, characters
from sitesym.views.layout import NO_BREAK

if TYPE_CHECKING:
    import numpy as np
    import numpy.typing as npt

    from sitesym.analysis import Analysis, SiteRow
    from sitesym.comparison import Comparison
    from sitesym.comparison.relation import Embedding
    from sitesym.comparison.result import ActiveModes, CentreRow, SiteChange
    from sitesym.comparison.wavevectors import Star

    Floats = npt.NDArray[np.float64]

SCHEMA = 1
Document = dict[str, Any]


def render(result: Comparison) -> str:
    """The document as text, ending in a line feed."""
    return json.dumps(document(result), indent=2, allow_nan=False, ensure_ascii=True) + "\n"


def document(result: Comparison) -> Document:
    """The document as plain dictionaries, lists, strings, numbers, booleans and None.

    `supercell` is None without relation. `species` has a row for each species of the parent's factor group: `child` is
    what one mode of it becomes, `count` the number of its optic modes. Then comes a row for each star of wavevectors
    that folds: its `parent` is None, its `child` counts all its modes (None where they cannot be counted).
    """
    embedding = result.embedding
    return {
        "schema": SCHEMA,
        "version": __version__,
        "relation": result.relation,
        "supercell": embedding.lattice.supercell.tolist() if embedding else None,
        "species": [*(_centre(row) for row in result.centre), *_folded(result)],
        "new": {name: result.new(name) for name in ("infrared", "raman")},
        "new_from": {one.technique: _active(one, result) for one in result.active},
        "summary": paragraph(result, TEXT).replace(NO_BREAK, " "),
        "refusal": {"code": result.refusal.code, "reason": result.refusal.reason} if result.refusal else None,
        "reversed": result.reversed,
        "embedding": _embedding(embedding) if embedding else None,
        "sites": [_change(one) for one in result.sites],
        "parent": _crystal(result.parent, embedding.lattices[0].basis if embedding else None),
        "child": _crystal(result.child, embedding.lattices[1].basis if embedding else None),
        "warnings": [{"code": one.code, "message": characters(one.message)} for one in result.cautions],
        "method": METHOD,
    }


def _centre(row: CentreRow) -> Document:
    return {
        "parent": row.label,
        "wavevector": [0, 0, 0],
        "child": dict(row.child),
        "point": "Gamma",
        "count": row.optic,
        "dimension": row.dimension,
        "infrared": row.activity.infrared,
        "raman": row.activity.raman,
    }


def _folded(result: Comparison) -> list[Document]:
    if result.embedding is None:
        return []
    rows = {row.star: row for row in result.folded or ()}
    return [
        {
            "parent": None,
            "wavevector": [float(one) for one in star.arms[0]],
            "child": dict(rows[star].child) if star in rows else None,
            **_star(star),
            "sites": {label: dict(part) for label, part in rows[star].sites} if star in rows else None,
        }
        for star in result.embedding.stars[1:]
    ]


def _star(star: Star) -> Document:
    return {
        "point": star.name or None,
        "conventional": [float(one) for one in star.conventional],
        "arms": [[float(one) for one in arm] for arm in star.arms],
        "star_size": star.size,
    }


def _active(one: ActiveModes, result: Comparison) -> Document:
    """Where the frequencies come from that a technique sees in the child; `split` counts those added by splitting."""
    order = [row.label for row in result.child.species]

    def ordered(part: dict[str, int]) -> dict[str, int]:
        return {label: part[label] for label in order if label in part}

    return {
        "parent_frequencies": one.parent,
        "child_frequencies": one.child,
        "split": one.split,
        "kept": ordered(one.kept),
        "zone_centre": ordered(one.zone_centre),
        "zone_centre_silent": ordered(one.silent),
        "folding": ordered(one.folding),
    }


def _embedding(found: Embedding) -> Document:
    return {
        "index": found.index,
        "translationengleiche": found.translationengleiche,
        "klassengleiche": found.klassengleiche,
        "axes": _rows(found.lattice.axes),
        "origin": _row(found.match.origin),
        "rotation": _rows(found.rotation),
        "stretches": _row(found.lattice.stretches),
        "strain": round(found.lattice.strain, 6),
        "mirrored": found.lattice.mirrored,
        "substitutions": dict(found.substitutions),
        "displacement": {
            "largest": round(found.match.largest, 6),
            "root_mean_square": round(found.match.root_mean_square, 6),
            "by_wavevector": [
                {**_star(star), "amplitude": round(value, 6)}
                for star, value in zip(found.stars, found.amplitudes, strict=True)
            ],
        },
    }


def _row(values: Floats) -> list[float]:
    return [round(float(value), 9) + 0.0 for value in values]


def _rows(values: Floats) -> list[list[float]]:
    return [_row(row) for row in values]


def _change(one: SiteChange) -> Document:
    return {"parent": _site(one.parent), "child": _site(one.child), "displacement": round(one.displacement, 6)}


def _site(row: SiteRow) -> Document:
    return {
        "label": characters(row.label),
        "element": row.element,
        "wyckoff": row.wyckoff,
        "multiplicity": row.multiplicity,
        "count_primitive": row.count,
        "site_group": {"schoenflies": row.group.schoenflies, "hermann_mauguin": row.symbol},
    }


def _crystal(analysis: Analysis, basis: Floats | None) -> Document:
    totals, structure = analysis.totals, analysis.structure
    return {
        "path": characters(structure.source),
        "name": characters(structure.name),
        "formula": structure.formula,
        "space_group": {"number": analysis.symmetry.number, "hermann_mauguin": analysis.space_group},
        "factor_group": {
            "schoenflies": analysis.factor_group.schoenflies, "hermann_mauguin": analysis.factor_group_symbol,
            "order": len(analysis.factor_group), "has_inversion": analysis.factor_group.has_inversion,
            "axes": analysis.axes,
        },
        "totals": {
            "atoms_primitive": totals.atoms_primitive, "branches": totals.branches, "optic": totals.optic,
            "infrared": totals.infrared, "raman": totals.raman, "infrared_and_raman": totals.infrared_and_raman,
            "silent": totals.silent,
        },
        "formula_units_primitive": formula_units(analysis),
        "primitive_basis": None if basis is None else _rows(basis),
        "sites": [_site(row) for row in analysis.sites],
    }  # fmt: skip
