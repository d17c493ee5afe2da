"""Fragments for notebooks of a molecule and of a structure, read back with a parser that knows nothing of the views."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from html_reader import Reader, squeezed
from test_molecule_analysis import analysed
from views_cases import HOSTILE, case

from sitesym.molecule_analysis import analyse_molecule
from sitesym.reading.molecule import Molecule
from sitesym.structure import OpenQuestion


def words(fragment: str) -> str:
    return squeezed(" ".join(Reader(fragment).text.values()))


def test_a_molecule_shows_its_counts_and_vibrations() -> None:
    """Water: three vibrations, all in both spectra; 3657, 1595, 3756 cm-1 (Shimanouchi 1972, from memory)."""
    fragment = analysed("water")._repr_html_()
    assert "Point group C2v" in words(fragment)
    assert "3 infrared; 3 Raman; 3 both; 0 silent" in words(fragment)
    assert all(value in words(fragment) for value in ("3657", "1595", "3756"))
    assert len(Reader(fragment).tables) == 1


def test_a_single_atom_has_no_table() -> None:
    fragment = analyse_molecule(Molecule(("Ar",), np.zeros((1, 3)), "argon"))._repr_html_()
    assert not Reader(fragment).tables


def test_a_structure_shows_its_cell_and_what_is_doubtful() -> None:
    """Calcite: a 4.99 Å, c 17.06 Å, hexagonal axes (Graf 1961, from memory)."""
    structure = replace(case("calcite").structure, questions=(OpenQuestion("odd", "Look twice."),))
    shown = words(structure._repr_html_())
    assert "30 sites in the cell" in shown
    assert "a 4.9" in shown
    assert "c 17.0" in shown
    assert "α 90.00°, β 90.00°, γ 120.00°" in shown
    assert "Caution. Look twice." in shown


def test_names_of_strangers_do_no_harm() -> None:
    structure = replace(case("calcite").structure, name=HOSTILE, source=HOSTILE)
    molecule = Molecule(("O", "H", "H"), np.array([[0, 0, 0], [0.96, 0, 0], [-0.24, 0.93, 0]]), HOSTILE)
    for fragment in (structure._repr_html_(), analyse_molecule(molecule)._repr_html_()):
        read = Reader(fragment)
        assert "script" not in {tag for tag, _ in read.elements}
        assert not read.values("id")


def test_a_molecule_prints_in_one_short_line() -> None:
    molecule = Molecule(("O", "H", "H"), np.array([[0, 0, 0], [0.96, 0, 0], [-0.24, 0.93, 0]]), "water\n" + "x" * 300)
    assert repr(molecule).startswith("Molecule(3 atoms, 'water")
    assert len(repr(molecule)) < 80
    assert "\n" not in repr(molecule)
