"""A free molecule, and two side by side, as JSON and as comma-separated values.

Labels are plain ASCII, lengths in Å, positions and axes those of the molecule (see `MoleculeAnalysis.free`).
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from sitesym.structure import OpenQuestion
from sitesym.version import __version__
from sitesym.views.labels import characters
from sitesym.views.molecule_json import ascii_words, length

if TYPE_CHECKING:
    from sitesym.molecule_analysis import (
        BandCounts,
        ComparedBands,
        MoleculeAnalysis,
        MoleculeComparison,
        MoleculeSpecies,
    )

SCHEMA = 1
Document = dict[str, Any]
Row = tuple[str | int | float, ...]


def molecule_document(result: MoleculeAnalysis) -> Document:
    """The JSON document of one molecule."""
    return {"schema": SCHEMA, "version": __version__, **_molecule(result)}


def comparison_document(result: MoleculeComparison) -> Document:
    """The JSON document of two molecules; `differs` marks what tells them apart."""
    return {
        "schema": SCHEMA,
        "version": __version__,
        "first": _molecule(result.first),
        "second": _molecule(result.second),
        "bands": [_compared(one) for one in (*result.bands, *result.stretches)],
        "warnings": [{"code": one.code, "message": one.message} for one in result.cautions],
    }


def _molecule(result: MoleculeAnalysis) -> Document:
    free, molecule = result.free, result.molecule
    higher = free.symmetry.next_higher
    return {
        "input": {
            "path": characters(molecule.source),
            "name": characters(molecule.name),
            "formula": result.formula,
            "atoms": len(molecule),
            "warnings": [{"code": one.code, "message": characters(one.message)} for one in result.cautions],
        },
        "name": result.known.name if result.known else None,
        "parts": list(result.parts),
        "point_group": ascii_words(result.point_group),
        "deviation": length(free.symmetry.deviation),
        "needed_tolerance": length(free.symmetry.needed_tolerance),
        "next_higher": higher
        and {
            "point_group": ascii_words(free.higher_group),
            "deviation": length(higher.deviation),
            "needed_tolerance": length(higher.needed_tolerance),
        },
        "exclusion": result.has_exclusion,
        "species": [_species(one) for one in result.species],
        "vibrations": _vibrations(result),
        "stretches": [{"bond": one.pair, "count": one.count, "species": dict(one.species)} for one in result.stretches],
        "totals": _counts(result.counts),
        "atoms": _atoms(result),
        "reason": result.reason,
        "source": result.source or None,
    }


def _species(one: MoleculeSpecies) -> Document:
    from sitesym.views.free_molecule import raman_words

    return {
        "label": one.label,
        "dimension": one.dimension,
        "internal": one.internal,
        "translations": one.translations,
        "rotations": one.rotations,
        "infrared": one.activity.infrared,
        "raman": one.activity.raman,
        "hyper_raman": one.activity.hyper_raman,
        "silent": one.activity.silent,
        "polar": list(one.activity.polar),
        "raman_elements": raman_words(one).replace("−", "-"),
        "polarized": one.polarized,
    }


def _vibrations(result: MoleculeAnalysis) -> list[Document]:
    return [
        {
            "species": one.species,
            "dimension": one.dimension,
            "count": one.count,
            "kind": one.kind,
            "infrared": one.activity.infrared,
            "raman": one.activity.raman,
            "names": [ascii_words(item.name) for item in known],
            "wavenumbers": [item.wavenumber for item in known],
            "wavenumbers_given": [item.given for item in known],
        }
        for one, known in zip(result.vibrations, result.names, strict=True)
    ]


def _counts(found: BandCounts) -> Document:
    return {
        "frequencies": found.total,
        "infrared": found.infrared,
        "raman": found.raman,
        "infrared_and_raman": found.both,
        "silent": found.silent,
        "polarized": found.polarized,
    }


def _atoms(result: MoleculeAnalysis) -> list[Document]:
    free = result.free
    off = ((free.measured - free.positions) ** 2).sum(axis=1) ** 0.5
    return [
        {"label": label, "element": element, "position": [length(value) for value in place], "deviation": length(gap)}
        for label, element, place, gap in zip(free.labels, free.elements, free.measured, off, strict=True)
    ]


def _compared(one: ComparedBands) -> Document:
    return {
        "what": one.what, "first": _counts(one.first), "second": _counts(one.second), "differs": one.differs,
    }  # fmt: skip


VIBRATION_COLUMNS = ("species", "dimension", "number", "kind", "infrared", "raman", "names", "wavenumbers")
COUNT_COLUMNS = ("frequencies", "infrared", "raman", "infrared_and_raman", "silent", "polarized")
COMPARISON_COLUMNS = (
    "bands", *(f"{side}_{name}" for side in ("first", "second") for name in COUNT_COLUMNS), "differs",
)  # fmt: skip


def vibration_rows(result: MoleculeAnalysis) -> list[Row]:
    """One row for each species and kind of vibration."""
    return [
        (
            one.species, one.dimension, one.count, one.kind, yes(one.activity.infrared), yes(one.activity.raman),
            " ".join(ascii_words(item.name) for item in known if item.name),
            " ".join(f"{item.wavenumber:g}" for item in known if item.wavenumber is not None),
        )
        for one, known in zip(result.vibrations, result.names, strict=True)
    ]  # fmt: skip


def comparison_rows(result: MoleculeComparison) -> list[Row]:
    """One row for all vibrations, each kind, and the stretches of each kind of bond."""
    return [
        (one.what, *_counts(one.first).values(), *_counts(one.second).values(), yes(one.differs))
        for one in (*result.bands, *result.stretches)
    ]


def comparison_cautions(result: MoleculeComparison) -> tuple[OpenQuestion, ...]:
    """Those on the two together, then those on each, which begin with A or B."""
    sides = (("A", result.first), ("B", result.second))
    own = [OpenQuestion(one.code, f"{name}: {one.message}") for name, side in sides for one in side.cautions]
    return (*result.cautions, *own)


def yes(answer: bool) -> str:
    """`yes` or `no`."""
    return "yes" if answer else "no"
