"""Tables of the HTML page laid out as values: the site table of a factor group analysis, the Raman tensors."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from sitesym.structure import FULL
from sitesym.tensors import element_expressions
from sitesym.views.sentences import element_words, polar_words

if TYPE_CHECKING:
    from sitesym.analysis import Analysis, SiteRow, SpeciesRow
    from sitesym.tensors import TensorComponent

_ELEMENTS = (("xx", 0, 0), ("yy", 1, 1), ("zz", 2, 2), ("xy", 0, 1), ("xz", 0, 2), ("yz", 1, 2))


@dataclass(frozen=True, slots=True)
class SiteLine:
    """One set of sites: occupancy and place in words, contributions in the order of the columns."""

    site: SiteRow
    occupancy: str
    position: str
    counts: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class SiteTable:
    """Rows are sets of sites, columns the species of the factor group that occur; then the sums and the activities."""

    columns: tuple[SpeciesRow, ...]
    lines: tuple[SiteLine, ...]


def site_table(analysis: Analysis) -> SiteTable:
    """The site table; species to which no site contributes have no column."""
    columns = tuple(row for row in analysis.species if row.total)
    return SiteTable(columns, tuple(_line(site, columns) for site in analysis.sites))


def _line(site: SiteRow, columns: tuple[SpeciesRow, ...]) -> SiteLine:
    occupancy = "" if site.occupancy >= FULL else f"{site.occupancy:.3g}"
    position = ", ".join(f"{round(value, 4) + 0.0:g}".replace("-", "−") for value in site.position)
    return SiteLine(site, occupancy, position, tuple(site.contribution.get(row.label, 0) for row in columns))


@dataclass(frozen=True, slots=True)
class Matrix:
    """One component's tensor: its polar direction or "", nine elements row by row ("" where zero), and all in words."""

    polar: str
    elements: tuple[str, ...]
    spoken: str


@dataclass(frozen=True, slots=True)
class TensorGroup:
    """The tensors of one species."""

    row: SpeciesRow
    matrices: tuple[Matrix, ...]


def tensor_groups(analysis: Analysis) -> tuple[TensorGroup, ...]:
    """The Raman active species, each with the tensors of its components."""
    return tuple(
        TensorGroup(row, tuple(_matrix(row, number) for number in range(len(row.tensor.components))))
        for row in analysis.species
        if row.activity.raman
    )


def _matrix(row: SpeciesRow, number: int) -> Matrix:
    component: TensorComponent = row.tensor.components[number]
    written = [[element_words(one) for one in line] for line in element_expressions(component, row.tensor.letters)]
    spoken = ", ".join(f"{name} {written[i][j]}" for name, i, j in _ELEMENTS if written[i][j])
    return Matrix(polar_words(row, number), tuple(one for line in written for one in line), spoken)
