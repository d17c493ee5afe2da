"""What the cell should hold according to the file: its formula times Z, or its formula, cell volume and density."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from sitesym.reading.cif_document import Block
from sitesym.reading.cif_values import parse_number
from sitesym.reading.elements import HYDROGENS, atomic_weight
from sitesym.reading.formula import parse_formula

GRAM_PER_CUBIC_CENTIMETRE = 0.602214076
"""1 g/cm³ in atomic mass units per Å³ (Avogadro constant, SI 2019)."""


@dataclass(frozen=True, slots=True)
class Expectation:
    """The formula of the file and how often it is in the cell.

    formula  element -> atoms in a formula unit, {} when unknown.
    units    formula units in the cell, None when unknown.
    stated   whether that number stands in the file, rather than following from the density.
    """

    formula: Mapping[str, float]
    units: float | None = None
    stated: bool = False

    @property
    def elements(self) -> frozenset[str]:
        """All elements of the formula."""
        return frozenset(self.formula)

    def cell(self, composition: Mapping[str, float]) -> dict[str, float]:
        """Element -> atoms expected in a cell of this composition, hydrogen isotopes together as H; {} when unknown.

        Where Z is unknown the heavier atoms tell it; where they have nothing in common with the formula it is 1.
        """
        units = self.units or self.units_of(composition) or 1.0
        return {element: count * units for element, count in pooled(self.formula).items()}

    def units_of(self, composition: Mapping[str, float]) -> float:
        """Formula units by the atoms other than hydrogen: the number on which most elements agree, whole if possible.

        0 when there is no telling.
        """
        formula, content = pooled(self.formula), pooled(composition)
        heavy = [element for element in formula if element != "H"] or list(formula)
        ratios = [content.get(element, 0.0) / formula[element] for element in heavy]

        def merit(ratio: float) -> tuple[int, float]:
            return -sum(abs(other - ratio) < 0.03 * ratio for other in ratios), abs(ratio - round(ratio))

        return min(ratios, key=merit, default=0.0)

    def misfit(self, composition: Mapping[str, float]) -> float:
        """Part of the expected atoms (hydrogen left out) that are missing or too many; 0 when nothing is expected."""
        expected, content = self.cell(composition), pooled(composition)
        heavy = [element for element in {*expected, *content} if element != "H"] if expected else []
        total = sum(expected.get(element, 0.0) for element in heavy)
        differences = sum(abs(expected.get(element, 0.0) - content.get(element, 0.0)) for element in heavy)
        return differences / total if total else 0.0


def pooled(composition: Mapping[str, float]) -> dict[str, float]:
    """The composition with D and T counted as H."""
    result: dict[str, float] = {}
    for element, count in composition.items():
        name = "H" if element in HYDROGENS else element
        result[name] = result.get(name, 0.0) + count
    return result


def read_expectation(block: Block, volume: float) -> Expectation:
    """From the formula, Z or else the density in the block, and the cell volume in Å³."""
    formula = parse_formula(block.value("_chemical_formula_sum"))
    units: float | None = _positive(block.value("_cell_formula_units_z"))
    if units or not formula:
        return Expectation(formula, units, stated=units is not None)
    density = _positive(block.value("_exptl_crystal_density_diffrn"))
    if density is None:
        return Expectation(formula)
    mass = sum(atomic_weight(element) * count for element, count in formula.items())
    units = density * volume * GRAM_PER_CUBIC_CENTIMETRE / mass
    whole = round(units)
    return Expectation(formula, float(whole) if whole and abs(units - whole) < 0.05 * whole else None)


def _positive(text: str | None) -> float | None:
    try:
        value = parse_number(text)
    except ValueError:
        return None
    return value if value and value > 0 else None
