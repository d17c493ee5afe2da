"""The part of the JSON document that speaks of molecules and other units."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from sitesym.views.labels import characters

if TYPE_CHECKING:
    from sitesym.analysis import Analysis
    from sitesym.expected_bands import ExpectedBand
    from sitesym.fate import Components, Counts, Fate
    from sitesym.molecular import AxisRelation, MoleculeRow
    from sitesym.molecules import UnitSet

Document = dict[str, Any]
_PLAIN = str.maketrans({"∞": "inf", "ν": "nu"})


def molecules(analysis: Analysis) -> list[Document]:
    """One entry for each kind of molecule or complex ion; empty where molecules were not looked for."""
    return [_molecule(row) for row in (analysis.molecular.molecules if analysis.molecular else ())]


def units(analysis: Analysis) -> list[Document]:
    """All units: molecules, chains, layers and nets, single atoms, and those that could not be followed."""
    found = analysis.molecular
    if found is None:
        return []
    single = (one.units for one in found.atoms)
    followed = (row.units for row in found.molecules)
    return [_unit(one) for one in (*followed, *found.nets, *single, *found.unfollowed)]


def bands(analysis: Analysis) -> list[Document]:
    """Where internal vibrations of known wavenumber are expected: the lines of a line spectrum."""
    return [_band(one) for one in (analysis.molecular.bands if analysis.molecular else ())]


def ascii_words(text: str) -> str:
    """`D∞h` as `Dinfh`, `ν3` as `nu3`."""
    return text.translate(_PLAIN)


def _unit(units: UnitSet) -> Document:
    unit = units.unit
    return {
        "formula": unit.name,
        "kind": unit.kind,
        "dimension": unit.dimension,
        "count_primitive": units.count,
        "site_group": units.site_group.schoenflies if units.site_group else None,
        "atoms": [characters(label) for label in unit.labels],
        "occupancy": float(unit.occupancy),
        "disordered": unit.disordered,
        "reason": characters(unit.reason),
        "obstacle": units.obstacle or None,
    }


def _molecule(row: MoleculeRow) -> Document:
    units, free = row.units, row.free
    site_group = units.site_group
    assert site_group is not None
    return {
        "formula": row.name,
        "formula_hill": row.formula,
        "name": row.known.name if row.known else None,
        "charge": row.known.charge if row.known else None,
        "atoms": [characters(label) for label in units.unit.labels],
        "count_primitive": units.count,
        "point_group": ascii_words(free.group.schoenflies),
        "deviation": length(free.symmetry.deviation),
        "needed_tolerance": length(free.symmetry.needed_tolerance),
        "next_higher": _higher(row),
        "site_group": site_group.schoenflies,
        "hermann_mauguin": row.symbol,
        "wyckoff": row.wyckoff,
        "multiplicity": row.multiplicity,
        "centre": [length(value) for value in units.centre],
        "axes": [_axis(one) for one in row.orientation],
        "vibrations": [_vibration(row, index) for index in range(len(row.fates))],
        "librations": _motions(row.correlation.librations.site, row.correlation.librations.crystal, row.librations),
        "translations": _motions(
            row.correlation.translations.site, row.correlation.translations.crystal, row.translations
        ),
        "stretches": [{"bond": one.pair, "count": one.count, "species": dict(one.species)} for one in row.stretches],
        "source": row.source or None,
    }


def _higher(row: MoleculeRow) -> Document | None:
    higher = row.free.symmetry.next_higher
    if higher is None:
        return None
    return {
        "point_group": ascii_words(row.free.higher_group),
        "deviation": length(higher.deviation),
        "needed_tolerance": length(higher.needed_tolerance),
    }


def length(value: float) -> float:
    """Å or a fraction to ten decimals, without negative zeros."""
    return round(float(value), 10) + 0.0


def _axis(one: AxisRelation) -> Document:
    return {
        "name": one.name,
        "direction": [length(value) for value in one.direction],
        "nearest": one.nearest,
        "angle": round(one.angle, 6),
    }


def _vibration(row: MoleculeRow, index: int) -> Document:
    vibration, fate, known = row.correlation.vibrations[index], row.fates[index], row.names[index]
    return {
        "species": vibration.species,
        "dimension": vibration.dimension,
        "count": vibration.count,
        "kind": vibration.kind,
        "names": [ascii_words(one.name) for one in known],
        "wavenumbers": [one.wavenumber for one in known],
        "wavenumbers_given": [one.given for one in known],
        "site": dict(vibration.site),
        "crystal": dict(vibration.crystal),
        "free": {"infrared": vibration.free.infrared, "raman": vibration.free.raman},
        "site_activity": _activity(fate.site, fate.at_site),
        "crystal_activity": _activity(fate.crystal, fate.in_crystal),
        "degeneracy": fate.degeneracy.value,
        "gained": list(fate.gained),
        "paths": _paths(fate),
    }


def _activity(parts: Components, found: Counts) -> Document:
    """Whether any component is active, how many are, and which."""
    return {
        "infrared": found.infrared > 0,
        "raman": found.raman > 0,
        "components": found.components,
        "infrared_components": found.infrared,
        "raman_components": found.raman,
        "species": {
            part.label: {
                "infrared": part.activity.infrared, "raman": part.activity.raman, "polar": list(part.activity.polar),
            }
            for part in parts
        },
    }  # fmt: skip


def _motions(site: dict[str, int], crystal: dict[str, int], fates: tuple[Fate, ...]) -> Document:
    paths = [{"species": fate.free.label, "count": fate.free.count, "paths": _paths(fate)} for fate in fates]
    return {"site": dict(site), "crystal": dict(crystal), "free": paths}


def _paths(fate: Fate) -> list[Document]:
    """One entry for each species of the site, with what each occurrence of it gives in the crystal."""
    return [
        {
            "site": branch.site.label,
            "count": branch.site.count,
            "crystal": {part.label: part.count for part in branch.crystal},
        }
        for branch in fate.branches
    ]


def _band(one: ExpectedBand) -> Document:
    return {
        "wavenumber": one.wavenumber,
        "given": one.given,
        "molecule": one.row,
        "unit": one.unit,
        "vibration": ascii_words(one.vibration) or None,
        "free_species": one.free_species,
        "kind": one.kind,
        "species": one.species,
        "count": one.count,
        "dimension": one.dimension,
        "infrared": one.infrared,
        "raman": one.raman,
        "polar": list(one.polar),
    }
