"""Words that all views share: polarizations, tensor elements, counts, and the notes beside the tables.

Functions that name species or symbols take a `Style` and return text that is ready and safe for that kind of document.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from string import Formatter
from typing import TYPE_CHECKING

from sitesym.views.labels import TEXT, Style, decomposition

if TYPE_CHECKING:
    import numpy as np
    import numpy.typing as npt

    from sitesym.analysis import Analysis, SpeciesRow
    from sitesym.structure import OpenQuestion
    from sitesym.symmetry.scan import Scan, ScanPoint
    from sitesym.tensors import TensorSpecies

    Floats = npt.NDArray[np.float64]

CHANGES_COUNTS = frozenset({
    "hydrogen_missing", "composition_mismatch", "symmetry_not_closed", "symmetry_clash", "atoms_too_close",
    "occupancy_over_one",
})  # fmt: skip
"""Codes of cautions under which the counts themselves may be wrong; the others only say how to take them."""

_PLACES = ((0, 0), (1, 1), (2, 2), (0, 1), (0, 2), (1, 2))
_AXES = "xyz"
_ZERO = 1e-7


def fill(style: Style, template: str, **parts: str) -> str:
    """The template with its own words made safe for the style, and `{name}` replaced by parts that already are."""
    return "".join(
        style.plain(literal) + (parts[name] if name else "") for literal, name, _, _ in Formatter().parse(template)
    )


def infrared_words(row: SpeciesRow) -> str:
    """`E ∥ z` or `E ∥ (x, y)`; "" if inactive.

    Where symmetry leaves the dipole's direction open: `E in plane (x, z)`, or `E not fixed` in space.
    """
    if not row.activity.infrared:
        return ""
    if is_direction_open(row):
        return f"E in plane ({axes_words(row)})" if len(row.activity.polar) == 2 else "E not fixed"
    if row.dimension == 1:
        return f"E ∥ {direction_words(row.tensor.polar_space[0])}".replace("∥ −", "∥ ")
    return f"E ∥ ({axes_words(row)})"


def axes_words(row: SpeciesRow) -> str:
    """`x, z`: the axes along which the dipole of this species has a part."""
    return ", ".join(row.activity.polar)


def is_direction_open(row: SpeciesRow) -> bool:
    """Whether the dipole of a mode of this species may point anywhere in a plane or in space, as the mode likes."""
    return row.dimension == 1 and len(row.tensor.polar_space) > 1


def polar_words(row: SpeciesRow, component: int) -> str:
    """Direction of the dipole of one component, as printed beside its Raman tensor: `z`, `−x`, `x, z`; "" if none."""
    direction = row.tensor.components[component].polar
    if direction is None:
        return ""
    return axes_words(row) if is_direction_open(row) else direction_words(direction)


def direction_words(direction: Floats) -> str:
    """`z`, `−x`, or the Cartesian components `[0.50, 0.87, 0.00]` of a unit vector (3,)."""
    for axis, value in zip(_AXES, direction, strict=True):
        if abs(value) > 1 - 1e-6:
            return axis if value > 0 else f"−{axis}"
    return "[" + ", ".join(f"{value:.2f}".replace("-", "−") for value in direction) + "]"


def raman_words(row: SpeciesRow) -> str:
    """Elements of the Raman tensor as character tables print them: `xx+yy, zz`, `(xx−yy, xy), (xz, yz)`."""
    return ", ".join(raman_elements(row.tensor))


def raman_or_silent(row: SpeciesRow) -> str:
    """The same; the word silent for a species that is in neither spectrum. It stands in the Raman column everywhere."""
    return raman_words(row) or ("silent" if row.activity.silent else "")


def raman_elements(tensor: TensorSpecies) -> tuple[str, ...]:
    """One entry for each independent element of the symmetric tensor, partners of a degenerate species in brackets."""
    entries: dict[frozenset[str], str] = {}
    for letter in range(len(tensor.letters)):
        parts = [_quadratic(component.basis[letter]) for component in tensor.components]
        entries.setdefault(frozenset(parts), parts[0] if len(parts) == 1 else f"({', '.join(parts)})")
    return tuple(entries.values())


def _quadratic(basis: Floats) -> str:
    """The quadratic form of a symmetric (3, 3) matrix up to a factor: `xx+yy−2zz`."""
    elements = [(_AXES[i] + _AXES[j], float(basis[i, j])) for i, j in _PLACES if abs(basis[i, j]) > _ZERO]
    unit = min(abs(value) for _, value in elements) * (1 if elements[0][1] > 0 else -1)
    terms = [f"{'−' if value / unit < 0 else '+'}{_factor(abs(value / unit))}{name}" for name, value in elements]
    return "".join(terms).removeprefix("+")


def _factor(size: float) -> str:
    return "" if abs(size - 1) < 1e-6 else f"{size:.3g}"


def resonance_words(row: SpeciesRow) -> str:
    """Antisymmetric parts that may appear in resonance: `xy−yx`; "" if none."""
    return ", ".join(row.tensor.antisymmetric).replace("-", "−")


def element_words(expression: str) -> str:
    """One element of a tensor from `element_expressions`, with a proper minus sign."""
    return expression.replace("-", "−")


@dataclass(frozen=True, slots=True)
class CountRow:
    """A line of the answer: what is counted, how many distinct frequencies, and of which species (typeset)."""

    key: str
    title: str
    count: int
    species: str


def count_rows(analysis: Analysis, style: Style = TEXT) -> tuple[CountRow, ...]:
    """Infrared, Raman, both, silent: distinct fundamental frequencies of optic branches, and their species."""
    totals = analysis.totals
    chosen: tuple[tuple[str, str, int, Callable[[SpeciesRow], bool]], ...] = (
        ("infrared", "Infrared", totals.infrared, lambda row: row.activity.infrared),
        ("raman", "Raman", totals.raman, lambda row: row.activity.raman),
        ("infrared_and_raman", "Both", totals.infrared_and_raman, in_both),
        ("silent", "Silent", totals.silent, lambda row: row.activity.silent),
    )
    return tuple(
        CountRow(key, title, count, species_sum(filter(rule, analysis.species), style))
        for key, title, count, rule in chosen
    )


def in_both(row: SpeciesRow) -> bool:
    """Active in infrared and in Raman."""
    return row.activity.infrared and row.activity.raman


def species_sum(rows: Iterable[SpeciesRow], style: Style = TEXT) -> str:
    """`A₁g + 3A₂g`: the optic modes of these species; `none` where there are none."""
    return decomposition({row.label: row.optic for row in rows}, style)


def optic_sum(analysis: Analysis, style: Style = TEXT) -> str:
    """All optic modes as a sum of species."""
    return species_sum(analysis.species, style)


def acoustic_sum(analysis: Analysis, style: Style = TEXT) -> str:
    """The acoustic modes as a sum of species."""
    return decomposition({row.label: row.acoustic for row in analysis.species}, style)


def listed(rows: Iterable[SpeciesRow], style: Style = TEXT) -> str:
    """`A₁g, A₂g and Eu`."""
    names = [style.species(row.label) for row in rows]
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"


def setting_words(analysis: Analysis) -> str:
    """The setting where a space group has several: `hexagonal axes`, `unique axis c`; "" where nothing needs saying.

    Choices of origin are not named: no label and no tensor depends on them.
    """
    choice = analysis.symmetry.setting.choice
    if choice == "H":
        return "hexagonal axes"
    if 3 <= analysis.symmetry.number <= 15:
        return _monoclinic_words(choice, analysis.symmetry.setting.full)
    standard = [one.symbol for one in analysis.settings if one.standard]
    if standard and not analysis.settings[0].standard:
        return f"a setting of {TEXT.symbol(standard[0].replace(' ', ''))}"
    return ""


def _monoclinic_words(choice: str, full: str) -> str:
    """The unique axis, and the full symbol for cells other than the first choice, which the short symbol hides."""
    bare = choice.removeprefix("-")
    named = f", cell choice {bare[1]}" if len(bare) > 1 else ""
    return f"unique axis {bare[0]}{named}" + (f": {TEXT.symbol(full)}" if choice not in ("a", "b", "c", "b1") else "")


def space_group_words(analysis: Analysis, style: Style = TEXT) -> str:
    """`R3̄c (number 167, hexagonal axes)`."""
    setting = setting_words(analysis)
    number = f"number {analysis.symmetry.number}" + (f", {setting}" if setting else "")
    return f"{style.symbol(analysis.space_group)} ({style.plain(number)})"


def factor_group_words(analysis: Analysis, style: Style = TEXT) -> str:
    """`D₃d (3̄m), order 12`."""
    group = analysis.factor_group
    return f"{style.schoenflies(group.schoenflies)} ({style.symbol(analysis.factor_group_symbol)}), order {len(group)}"


def atoms_words(analysis: Analysis) -> str:
    """`10 in the primitive cell: 30 branches, 3 of them acoustic`."""
    totals = analysis.totals
    return f"{totals.atoms_primitive} in the primitive cell: {totals.branches} branches, 3 of them acoustic"


def serious_cautions(analysis: Analysis) -> tuple[OpenQuestion, ...]:
    """Cautions under which the counts themselves may be wrong: they belong above the counts."""
    return tuple(one for one in analysis.cautions if one.code in CHANGES_COUNTS)


def other_cautions(analysis: Analysis) -> tuple[OpenQuestion, ...]:
    """Cautions that say how to take the counts."""
    return tuple(one for one in analysis.cautions if one.code not in CHANGES_COUNTS)


def notes(analysis: Analysis, style: Style = TEXT) -> tuple[str, ...]:
    """All notes to the table of species that apply, in reading order, each ready for the style."""
    makers = (
        exclusion, polarization_note, silent_note, resonance_note, longitudinal_note, hexagonal_note, trigonal_note,
    )  # fmt: skip
    return tuple(sentence for maker in makers if (sentence := maker(analysis, style)))


def exclusion(analysis: Analysis, style: Style = TEXT) -> str:
    """Whether infrared and Raman exclude each other, and why."""
    if analysis.factor_group.has_inversion:
        return fill(
            style,
            "The crystal has a centre of inversion: infrared and Raman exclude each other. What both show at the same "
            "wavenumber is an accident, or a sign that the inversion is lost.",
        )
    shared = [row for row in analysis.species if in_both(row)]
    if not shared:
        return fill(
            style,
            "There is no centre of inversion, yet in this class no species is active in both infrared and Raman.",
        )
    return fill(
        style,
        "There is no centre of inversion: {species} can be active in both infrared and Raman.",
        species=listed(shared, style),
    )


def polarization_note(analysis: Analysis, style: Style = TEXT) -> str:
    """For triclinic and monoclinic crystals: symmetry does not fix where the dipole points."""
    sentences = [
        fill(style, _OPEN[len(row.activity.polar)], species=style.species(row.label), axes=axes_words(row))
        for row in analysis.species
        if is_direction_open(row)
    ]
    return " ".join(sentences)


_OPEN = {
    2: "{species}: the dipole lies in the plane ({axes}), but its direction there is not fixed by symmetry and differs "
    "from mode to mode.",
    3: "{species}: the direction of the dipole in space is not fixed by symmetry and differs from mode to mode.",
}


def silent_note(analysis: Analysis, style: Style = TEXT) -> str:
    """Which modes neither infrared nor Raman shows, and which of them hyper-Raman does."""
    silent = [row for row in analysis.species if row.activity.silent and row.optic]
    if not silent:
        return fill(style, "No optic mode is silent.")
    words = fill(style, "Silent in infrared and Raman: {species}.", species=species_sum(silent, style))
    seen = [row for row in silent if row.activity.hyper_raman]
    if seen:
        words += fill(style, " Of these, hyper-Raman scattering may show {species}.", species=listed(seen, style))
    return words


def resonance_note(analysis: Analysis, style: Style = TEXT) -> str:
    """Species that only the antisymmetric part of the scattering tensor shows."""
    rows = [row for row in analysis.species if row.activity.resonance and not row.activity.raman and row.optic]
    if not rows:
        return ""
    parts = ", ".join(f"{style.species(row.label)} ({style.plain(resonance_words(row))})" for row in rows)
    return fill(
        style,
        "Near resonance with an electronic transition the antisymmetric part of the Raman tensor can show {parts}.",
        parts=parts,
    )


def longitudinal_note(analysis: Analysis, style: Style = TEXT) -> str:
    """Polar modes in the Raman spectrum have two frequencies."""
    rows = [row for row in analysis.species if in_both(row) and row.optic]
    if not rows:
        return ""
    return fill(
        style,
        "Modes of {species} are polar. Each is counted once here, but Raman scattering can show it at a transverse and "
        "at a longitudinal frequency, depending on the geometry.",
        species=listed(rows, style),
    )


def hexagonal_note(analysis: Analysis, style: Style = TEXT) -> str:
    """In hexagonal classes the literature does not agree which species is B1 and which B2."""
    rows = [row for row in analysis.species if row.label.startswith("B")]
    if not 168 <= analysis.symmetry.number <= 194 or len(rows) < 2 or not rows[0].label.startswith("B1"):
        return ""
    return fill(
        style,
        "The literature is divided on which species are called B1 and which B2 in hexagonal classes. Here those "
        "named B1 are symmetric under the elements in the second place of the Hermann-Mauguin symbol. Neither is ever "
        "infrared or Raman active.",
    )


def trigonal_note(analysis: Analysis, style: Style = TEXT) -> str:
    """In trigonal classes the sign of some tensor elements hangs on the sense of the axes."""
    if not 143 <= analysis.symmetry.number <= 167 or not any(_couples(row) for row in analysis.species):
        return ""
    return fill(
        style,
        "In trigonal crystals the elements yz and xz of a degenerate species change sign against xx−yy and xy when x "
        "and y are reversed (a turn by 180° about z): compare the axes before comparing signs with the literature.",
    )


def _couples(row: SpeciesRow) -> bool:
    """A degenerate species that is seen both along and across the main axis."""
    return row.dimension == 2 and len(raman_elements(row.tensor)) > 1


def permutation_note(analysis: Analysis, style: Style = TEXT) -> str:
    """What the table of orthorhombic settings is for; "" for other crystals."""
    if not analysis.settings:
        return ""
    return fill(
        style,
        "The labels of the B species depend on which axis is called a, b and c. This table translates them from the "
        "setting of this report to the others, whose a, b, c are given in terms of the report's. Compare settings "
        "before comparing labels with the literature.",
    )


@dataclass(frozen=True, slots=True)
class ScanRun:
    """Neighbouring tolerances (Å) at which the same space group was found; `used` marks the report's own."""

    low: float
    high: float
    number: int | None
    symbol: str
    used: bool


def scan_runs(analysis: Analysis) -> tuple[ScanRun, ...]:
    """The tolerance scan with equal neighbours joined; empty when no scan was made."""
    scan: Scan | None = analysis.scan
    runs: list[list[ScanPoint]] = []
    for point in scan.points if scan else ():
        if runs and runs[-1][-1].number == point.number:
            runs[-1].append(point)
        else:
            runs.append([point])
    return tuple(_run(points, analysis) for points in runs)


def _run(points: list[ScanPoint], analysis: Analysis) -> ScanRun:
    used = any(point.tolerance == analysis.symmetry.tolerance for point in points)
    number = points[0].number
    symbol = points[0].symbol if number is None else points[0].symbol.replace(" ", "")
    if number == analysis.symmetry.number:
        symbol = analysis.space_group
    return ScanRun(points[0].tolerance, points[-1].tolerance, number, symbol, used)


def declared_words(analysis: Analysis, style: Style = TEXT) -> str:
    """What the file itself says about its space group, and whether that was found."""
    declared = analysis.structure.declared
    if declared.number is None and not declared.hermann_mauguin and not declared.hall:
        return fill(style, "The file declares no space group.")
    name = declared.hermann_mauguin or declared.hall or ""
    number = f"number {declared.number}" if declared.number is not None else "without a number"
    stated = style.plain(f"{name}, {number}" if name else number)
    if declared.number is None:
        return fill(style, "The file declares {stated}.", stated=stated)
    verdict = "as found" if declared.number == analysis.symmetry.number else "which was not found"
    return fill(style, "The file declares {stated}, {verdict}.", stated=stated, verdict=verdict)
