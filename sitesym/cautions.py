"""What a careful user must know before believing the analysis, in plain sentences, the most serious first."""

from __future__ import annotations

from sitesym.structure import OpenQuestion, Structure
from sitesym.symmetry.crystal import CrystalSymmetry
from sitesym.symmetry.scan import Scan

_ORDER = (
    "hydrogen_missing", "composition_mismatch", "symmetry_not_closed", "symmetry_clash", "declared_differs",
    "atoms_too_close", "occupancy_over_one", "average_structure", "partial_occupancy", "mixed_occupancy", "disorder",
    "near_supergroup", "unstable_tolerance",
)  # fmt: skip


_OCCUPANCIES = ("partial_occupancy", "mixed_occupancy")
"""What the reader says of occupancies; it goes into the caution on the average structure."""


def cautions_of(structure: Structure, symmetry: CrystalSymmetry, scan: Scan | None) -> tuple[OpenQuestion, ...]:
    """All open questions of the file and of the symmetry found, ordered by how much they may change the counts."""
    told = [question for question in structure.questions if question.code not in _OCCUPANCIES]
    found = [*told, *_declared(structure, symmetry), *_average(structure), *_cell(symmetry)]
    if scan is not None:
        found += [*_supergroup(scan), *_narrow(symmetry, scan)]
    rank = {code: index for index, code in enumerate(_ORDER)}
    return tuple(sorted(found, key=lambda question: rank.get(question.code, len(_ORDER))))


def _declared(structure: Structure, symmetry: CrystalSymmetry) -> list[OpenQuestion]:
    declared = structure.declared
    if declared.number is None or declared.number == symmetry.number:
        return []
    name = declared.hermann_mauguin or f"number {declared.number}"
    found = f"{symmetry.setting.symbol} (number {symmetry.number})"
    reason = (
        "The file lists the atoms with less symmetry than they have"
        if declared.number < symmetry.number
        else "The coordinates do not have all the symmetry that the file declares, at this tolerance"
    )
    message = f"The file declares {name} (number {declared.number}), the atoms have {found}. {reason}."
    return [OpenQuestion("declared_differs", message)]


def _average(structure: Structure) -> list[OpenQuestion]:
    shared = sum(not site.is_ordered for site in structure.sites)
    if not shared:
        return []
    read = [one.message.partition(": the analysis is of")[0] for one in structure.questions if one.code in _OCCUPANCIES]
    which = "; ".join(read) or f"{shared} of {len(structure)} sites are partly or jointly occupied"
    message = (
        f"{which}: the counts are those of the average structure, every site counted as if it were full. Real bands "
        "will be broader and more, and the selection rules of the average are relaxed."
    )
    return [OpenQuestion("average_structure", message)]


def _cell(symmetry: CrystalSymmetry) -> list[OpenQuestion]:
    copies = len(symmetry.structure) / (len(symmetry.atoms) * len(symmetry.cell.centring_vectors))
    if symmetry.cell.choice != "standard" or copies < 1.5:
        return []
    message = (
        f"The input cell is a supercell: it holds the conventional cell {copies:.3g} times. It was reduced before "
        "anything was counted."
    )
    return [OpenQuestion("supercell", message)]


def _supergroup(scan: Scan) -> list[OpenQuestion]:
    near = scan.supergroup
    if near is None:
        return []
    message = (
        f"The structure is within {near.displacement:.3f} Å (cell strain {100 * near.strain:.2f} %) of {near.symbol} "
        f"(number {near.number}), found at a tolerance of {near.tolerance:g} Å. Bands that only the smaller symmetry "
        "allows will be weak if that distortion is real, and absent if it is not."
    )
    return [OpenQuestion("near_supergroup", message)]


def _narrow(symmetry: CrystalSymmetry, scan: Scan) -> list[OpenQuestion]:
    low, high = scan.plateau
    if low != high:
        return []
    message = (
        f"The space group holds at the tolerance of {symmetry.tolerance:g} Å only, not at the next smaller or larger "
        "one of the scan: look at the scan before you believe it."
    )
    return [OpenQuestion("unstable_tolerance", message)]
