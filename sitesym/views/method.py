"""The method note that ends every report: what was computed, how, under which conventions, with citations.

It is written so that it can go into the experimental part of a paper.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING

from sitesym.molecule_symmetry import DEFAULT_TOLERANCE
from sitesym.version import __version__
from sitesym.views.labels import TEXT, Style
from sitesym.views.sentences import factor_group_words, fill, scan_runs, space_group_words

if TYPE_CHECKING:
    from sitesym.analysis import Analysis


@dataclass(frozen=True, slots=True)
class Paragraph:
    """One paragraph: a short heading (plain words) and its text, ready for the style it was asked for in."""

    heading: str
    text: str


def paragraphs(analysis: Analysis, style: Style = TEXT) -> tuple[Paragraph, ...]:
    """The note in order. Numbers in square brackets point into `references(analysis)`."""
    made = (
        ("Symmetry", _symmetry(analysis, style)),
        ("Counting", _counting(analysis, style)),
        ("Selection rules", _rules(analysis, style)),
        ("Axes and labels", _axes(analysis, style)),
        *([("Molecules and ions", _molecules(analysis, style))] if analysis.molecular else []),
        ("Limits", _limits(analysis, style)),
    )
    return tuple(Paragraph(heading, text) for heading, text in made)


def references(analysis: Analysis) -> tuple[str, ...]:
    """The cited publications as plain text, in the order of their numbers, which start at 1."""
    table = _table()
    cited = _ORDER if analysis.molecular else tuple(key for key in _ORDER if key not in _OF_MOLECULES)
    return tuple(table[key] for key in cited)


_OF_MOLECULES = (
    "covalent_radii", "internal_coordinates", "correlation_field", "unit_cell_group", "correlation_method",
)  # fmt: skip
_ORDER = (
    "space_group_search", "international_tables", "site_group", "site_tables", "factor_group", "hyper_raman",
    "raman_tensors", "axes", "notation", *_OF_MOLECULES,
)  # fmt: skip


@lru_cache(maxsize=1)
def _table() -> dict[str, str]:
    import tomllib
    from importlib.resources import files

    with files("sitesym.data").joinpath("references.toml").open("rb") as stream:
        return {key: entry["text"] for key, entry in tomllib.load(stream).items()}


def _cite(*keys: str) -> str:
    return "[" + ", ".join(str(_ORDER.index(key) + 1) for key in keys) + "]"


def _symmetry(analysis: Analysis, style: Style) -> str:
    return fill(
        style,
        "Space group {group} was found from the atomic positions with spglib {search} at a tolerance of {tolerance} Å; "
        "symbols follow International Tables {tables}.{scan} The factor group is {factor}. All counts refer to the "
        "primitive cell. Site groups were derived from the operations that keep each atom in place, in the axes of "
        "this report.",
        group=space_group_words(analysis, style),
        search=_cite("space_group_search"),
        tolerance=f"{analysis.symmetry.tolerance:g}",
        tables=_cite("international_tables"),
        scan=_scan(analysis, style),
        factor=factor_group_words(analysis, style),
    )


def _scan(analysis: Analysis, style: Style) -> str:
    if analysis.scan is None:
        return style.plain(" Other tolerances were not tried.")
    low, high = analysis.scan.plateau
    if low == high:
        return style.plain(" It was found at no neighbouring tolerance.")
    tried = scan_runs(analysis)
    range_words = f" The same group was found from {low:g} to {high:g} Å"
    return style.plain(f"{range_words}, tolerances from {tried[0].low:g} to {tried[-1].high:g} Å having been tried.")


def _counting(analysis: Analysis, style: Style) -> str:
    return fill(
        style,
        "The 3N = {branches} branches at the zone centre were reduced to species of the factor group by two routes: "
        "induction from the site group of every set of equivalent atoms {site}, and the characters of the whole "
        "displacement representation {direct}. Both gave the same result. The three acoustic branches, the species of "
        "a polar vector, were subtracted once. Counts are numbers of distinct frequencies: a degenerate species counts "
        "once.",
        branches=str(analysis.totals.branches),
        site=_cite("site_group", "site_tables"),
        direct=_cite("factor_group"),
    )


def _rules(analysis: Analysis, style: Style) -> str:
    del analysis
    return fill(
        style,
        "A species is infrared active if it occurs in the polar vector, Raman active if it occurs in the symmetric "
        "tensor of second rank, hyper-Raman active {hyper} if it occurs in the symmetric tensor of third rank. Raman "
        "tensors were found by projection and are given in the usual form {tensors}; equal letters stand for equal "
        "values within one species, and the polar direction of a component stands beside its tensor. The "
        "antisymmetric part is listed for resonance.",
        hyper=_cite("hyper_raman"),
        tensors=_cite("raman_tensors"),
    )


def _axes(analysis: Analysis, style: Style) -> str:
    return fill(
        style,
        "Cartesian axes: {axes}. The frame is z along c, y along b*, x completing a right-handed set {frame}. Species "
        "are named after Mulliken {notation}; pairs of complex-conjugate species are joined to one of dimension 2. "
        "{rule}",
        axes=style.plain(analysis.axes),
        frame=_cite("axes"),
        notation=_cite("notation"),
        rule=style.plain(_labelling(analysis)),
    ).rstrip()


def _labelling(analysis: Analysis) -> str:
    """The rule that fixes those labels of the factor group that a convention has to fix."""
    name = analysis.factor_group.schoenflies
    if name in ("D2", "D2h"):
        return "B1, B2 and B3 are symmetric under the twofold axes along z, y and x."
    if name == "C2v":
        return "Labels take the polar axis as z and the others in cyclic order; B1 is symmetric under the mirror xz."
    if name == "D2d":
        return "B2 is the species of a displacement along z."
    if name in ("D4", "C4v", "D4h", "D6", "C6v", "D6h"):
        return "B1 is symmetric under the elements in the second place of the Hermann-Mauguin symbol."
    return ""


def _molecules(analysis: Analysis, style: Style) -> str:
    molecular = analysis.molecular
    assert molecular is not None
    tolerance = molecular.tolerance or DEFAULT_TOLERANCE
    return fill(
        style,
        "Atoms were taken as bonded by their distances, by covalent radii {radii} and by the chemistry of the "
        "elements; the reason stands with each unit. Point groups of free units were found from their positions at a "
        f"tolerance of {tolerance:g} Å. Their internal vibrations were divided into stretching, bending, out-of-plane, "
        "torsional and skeletal ones by the representations of internal coordinates, redundancies removed "
        "{coordinates}. Internal vibrations, librations and translations were followed from the free unit through its "
        "site group to the factor group {correlation} by the actual operations of the crystal, not by tables. Their "
        "sum equals the count by atomic sites, species by species; chains, layers and nets were counted by atomic "
        "sites.",
        radii=_cite("covalent_radii"),
        coordinates=_cite("internal_coordinates"),
        correlation=_cite("site_group", "correlation_field", "unit_cell_group", "correlation_method"),
    )


def _limits(analysis: Analysis, style: Style) -> str:
    average = (
        "" if analysis.is_ordered
        else " Sites that are partly or jointly occupied were counted as if full (average structure)."
    )  # fmt: skip
    return style.plain(
        "Symmetry says what is allowed at first order in an ideal crystal, not how strong it is: bands may be too weak "
        "to see or coincide, and overtones, combinations and defects may add others. Wavevectors are taken as zero."
        f"{average} Computed with sitesym {__version__}."
    )
