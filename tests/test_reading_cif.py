"""CIF: values, elements, occupancies, disorder and blocks, with all the faults that real files have."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from reading_files.texts import ROCK_SALT, cif, codes, counts, distances, message, read_text

from sitesym.errors import NotAStructureError, ReadError, UsageError
from sitesym.structure import Occupant

P1 = ("x,y,z",)
RUTILE = ("Ti Ti 0 0 0", "O O 0.305 0.305 0")
RUTILE_CELL = (4.594, 4.594, 2.959, 90, 90, 90)


def test_rock_salt_from_its_operations(tmp_path: Path) -> None:
    """Eight atoms; each Na has six Cl at a/2 and twelve Na at a/sqrt(2)."""
    structure = read_text(tmp_path, cif(ROCK_SALT, symbol="F m -3 m", extra="_chemical_name_mineral 'Halite'"))
    assert counts(structure) == {"Na": 4, "Cl": 4}
    near = distances(structure, 0)
    assert near[:6] == pytest.approx([2.82] * 6)
    assert near[6:18] == pytest.approx([5.64 / np.sqrt(2)] * 12)
    assert (structure.name, structure.format, structure.declared.number) == ("Halite", "CIF", 225)
    assert codes(structure) == ["symmetry_from_symbol"]


def test_standard_uncertainties_and_letter_case_of_tags(tmp_path: Path) -> None:
    text = cif(("Ti Ti 0 0 0", "O O 0.3050(12) 0.3050(12) 0"), ("4.594(3)", *RUTILE_CELL[1:]), symbol="P 42/m n m")
    structure = read_text(tmp_path, text.replace("_cell_length_a", "_CELL_length_A").replace("fract_x", "FRACT_X"))
    assert counts(structure) == {"Ti": 2, "O": 4}
    assert structure.lattice[0, 0] == pytest.approx(4.594)


def test_new_tags_with_dots(tmp_path: Path) -> None:
    """Dictionaries in DDLm write _atom_site.fract_x and _space_group_symop.operation_xyz."""
    text = cif(ROCK_SALT, operations=P1).replace("_atom_site_", "_atom_site.").replace("_cell_", "_cell.")
    text = text.replace("_symmetry_equiv_pos_as_xyz", "_space_group_symop.operation_xyz")
    assert counts(read_text(tmp_path, text)) == {"Na": 1, "Cl": 1}


def test_one_atom_outside_a_loop(tmp_path: Path) -> None:
    text = "data_\n" + "\n".join(f"_cell_length_{axis} 3.0" for axis in "abc")
    text += "\n_symmetry_space_group_name_H-M 'I m -3 m'\n_atom_site_label Fe1\n"
    text += "_atom_site_fract_x 0\n_atom_site_fract_y 0\n_atom_site_fract_z 0\n"
    structure = read_text(tmp_path, text)
    assert counts(structure) == {"Fe": 2}
    assert "angle_assumed" in codes(structure)


def test_fractions_as_coordinates(tmp_path: Path) -> None:
    structure = read_text(tmp_path, cif(("Zn Zn 1/3 2/3 0",), (2.66, 2.66, 4.95, 90, 90, 120), symbol="P 63/m m c"))
    assert structure.fractional[0] == pytest.approx([1 / 3, 2 / 3, 0])


@pytest.mark.parametrize("digits", ["0.33 0.67", "0.333 0.667", "0.3333 0.6667"])
def test_rounded_special_positions_are_made_exact(tmp_path: Path, digits: str) -> None:
    """Magnesium (hexagonal close packing, from memory): two atoms, exactly on 1/3, 2/3, 1/4."""
    structure = read_text(
        tmp_path, cif((f"Mg Mg {digits} 0.25",), (3.21, 3.21, 5.21, 90, 90, 120), symbol="P 63/m m c")
    )
    assert counts(structure) == {"Mg": 2}
    assert structure.fractional[0] == pytest.approx([1 / 3, 2 / 3, 0.25], abs=1e-12)


def test_first_image_keeps_the_coordinates_of_the_file(tmp_path: Path) -> None:
    structure = read_text(tmp_path, cif(("O O -0.1 1.2 0.3",), symbol="P -1"))
    assert structure.fractional[0] == pytest.approx([-0.1, 1.2, 0.3])
    assert structure.fractional[1] == pytest.approx([0.1, 0.8, 0.7])


def test_labels_without_type_symbols(tmp_path: Path) -> None:
    """The formula tells calcium from an alpha carbon; water oxygen and deuterium are known by name."""
    atoms = ("CA1 0 0 0", "C1 0.3 0.3 0.3", "OW1 0.5 0.5 0", "D1 0.6 0.6 0.1", "O2 0 0.5 0.5")
    text = cif(atoms, operations=P1, columns="label fract_x fract_y fract_z", extra="_chemical_formula_sum 'C Ca D O2'")
    structure = read_text(tmp_path, text)
    assert structure.elements == ("Ca", "C", "O", "D", "O")
    assert "CA1 as Ca" in message(structure, "elements_guessed")
    assert "1 D" in message(structure, "deuterium")


def test_alpha_carbon_stays_carbon_beside_calcium(tmp_path: Path) -> None:
    """A label in the usual spelling settles who is calcium, so CA is the carbon that is still missing."""
    atoms = ("CA 0 0 0", "Ca1 0.5 0.5 0.5", "O1 0 0.5 0.5")
    text = cif(atoms, operations=P1, columns="label fract_x fract_y fract_z", extra="_chemical_formula_sum 'C Ca O'")
    assert read_text(tmp_path, text).elements == ("C", "Ca", "O")


def test_charges_and_odd_types(tmp_path: Path) -> None:
    atoms = ("M1 Fe3+ 0 0 0", "X2 O2- 0.5 0 0", "Y3 D0 0 0.5 0", "Ow ? 0 0 0.5", "C5 o 0.5 0.5 0.5")
    assert read_text(tmp_path, cif(atoms, operations=P1)).elements == ("Fe", "O", "D", "O", "O")


def test_unknown_element_is_an_error(tmp_path: Path) -> None:
    with pytest.raises(ReadError, match="element of site M1"):
        read_text(tmp_path, cif(("M1 0 0 0",), operations=P1, columns="label fract_x fract_y fract_z"))


def test_dummy_atoms_are_left_out_and_said(tmp_path: Path) -> None:
    atoms = ("Na Na 0 0 0 1 ?", "H1 H ? ? ? 1 ?", "Cg1 Cg 0.1 0.1 0.1 1 dum", "H2 H . . . 1 d", "V1 Va 0.2 0.2 0.2 1 d")
    columns = "label type_symbol fract_x fract_y fract_z occupancy calc_flag"
    structure = read_text(tmp_path, cif(atoms, operations=P1, columns=columns))
    assert counts(structure) == {"Na": 1}
    assert message(structure, "dummy_atoms").startswith("4 sites without coordinates, or no atoms, left out: H1, Cg1")


def test_empty_sites_are_left_out(tmp_path: Path) -> None:
    atoms = ("Na Na 0 0 0 1", "Cl Cl 0.5 0.5 0.5 0")
    text = cif(atoms, operations=P1, columns="label type_symbol fract_x fract_y fract_z occupancy")
    assert message(read_text(tmp_path, text), "empty_sites") == "1 site with occupancy 0 left out: Cl."


OCCUPIED = "label type_symbol fract_x fract_y fract_z occupancy"


def test_partial_and_mixed_occupancy_are_kept(tmp_path: Path) -> None:
    """Two elements on one position make one site; the vacancy stays."""
    atoms = ("Ca Ca 0 0 0 0.75(2)", "Mg Mg 0 0 0 .25", "O O 0.5 0.5 0.5 0.9", "Cl Cl 0.5 0 0 ?")
    structure = read_text(tmp_path, cif(atoms, operations=P1, columns=OCCUPIED))
    assert structure.sites[0].occupants == (Occupant("Ca", 0.75), Occupant("Mg", 0.25))
    assert structure.sites[1].occupancy == pytest.approx(0.9)
    assert structure.sites[2].is_ordered
    assert "Ca Ca 0.75 + Mg 0.25" in message(structure, "mixed_occupancy")
    assert message(structure, "partial_occupancy").startswith("1 site is only partly occupied (O 0.9)")


def test_two_valences_on_one_position_add_up(tmp_path: Path) -> None:
    """Fe2+ and Fe3+ on one point are one iron atom, fully there (magnetite's octahedral site, common practice)."""
    atoms = ("Fe1 Fe2+ 0 0 0 0.5", "Fe2 Fe3+ 0 0 0 0.5")
    structure = read_text(tmp_path, cif(atoms, operations=P1, columns=OCCUPIED))
    assert structure.sites[0].occupants == (Occupant("Fe", 1.0),)
    assert "Fe2, with Fe1" in message(structure, "occupancies_added")


def test_near_positions_of_one_element_remain_apart(tmp_path: Path) -> None:
    """Split positions 0.08 Å apart are two; they are alternatives, so nobody calls them too close."""
    atoms = ("O1 O 0 0 0.1 0.6", "O2 O 0 0 0.115 0.4", "Na Na 0.5 0.5 0.5 1")
    structure = read_text(tmp_path, cif(atoms, symbol="P -1", columns=OCCUPIED))
    assert len(structure) == 5
    assert "atoms_too_close" not in codes(structure)


def test_disorder_groups_are_kept(tmp_path: Path) -> None:
    atoms = ("Na Na 0 0 0 1 . .", "O1 O 0.5 0.5 0.5 0.6 A 1", "O2 O 0.5 0.5 0.6 0.4 A 2", "O3 O 0.2 0.2 0 0.5 . -1")
    columns = OCCUPIED + " disorder_assembly disorder_group"
    structure = read_text(tmp_path, cif(atoms, operations=P1, columns=columns))
    assert [site.disorder_group for site in structure.sites] == ["", "A1", "A2", "-1"]
    assert "3 atoms are in disorder groups (-1, A1, A2)" in message(structure, "disorder")


def test_atom_disordered_about_an_axis_adds_up(tmp_path: Path) -> None:
    """A third of an atom 0.03 Å off a threefold axis is one atom on the axis once its images are taken as one."""
    atoms = ("N N 0.004 0 0 0.3333 -1", "O O 0.4 0.1 0.5 1 .")
    columns = OCCUPIED + " disorder_group"
    structure = read_text(tmp_path, cif(atoms, (8, 8, 6, 90, 90, 120), symbol="P 3", columns=columns))
    assert counts(structure)["N"] == pytest.approx(1.0, abs=1e-3)


def test_halves_on_a_mirror_add_up(tmp_path: Path) -> None:
    """Hydrogen listed on both sides of a mirror with 0.5 each is one atom a side, as refinement programs count it."""
    atoms = ("H1 H 0.1 0.2 0.3 0.5", "H2 H 0.9 0.2 0.3 0.5", "C C 0 0.2 0.2 1")
    structure = read_text(tmp_path, cif(atoms, (9, 9, 9, 90, 90, 90), operations=("x,y,z", "-x,y,z"), columns=OCCUPIED))
    assert counts(structure) == {"H": 2, "C": 1}
    assert structure.is_ordered


def test_symmetry_copies_listed_twice_count_once(tmp_path: Path) -> None:
    """A file that lists all eight atoms of rock salt and the operations too; positions agree within rounding."""
    atoms = [
        f"Na{i} Na {x} {y} {z}" for i, (x, y, z) in enumerate([(0, 0, 0), (0, 0.5, 0.5), (0.5, 0, 0.5), (0.5, 0.5, 0)])
    ]
    atoms += ["Cl Cl 0.5 0.5 0.501"]
    structure = read_text(tmp_path, cif(atoms, symbol="F m -3 m"))
    assert counts(structure) == {"Na": 4, "Cl": 4}
    assert message(structure, "duplicates_merged").startswith("3 of the 5 listed atoms repeat others")


def test_partial_copies_are_not_added_where_copies_are_listed(tmp_path: Path) -> None:
    atoms = ("Na1 Na 0.1 0.2 0.3 1", "Na2 Na -0.1 -0.2 -0.3 1", "Cl1 Cl 0.4 0.4 0.1 0.5", "Cl2 Cl -0.4 -0.4 -0.1 0.5")
    structure = read_text(tmp_path, cif(atoms, symbol="P -1", columns=OCCUPIED))
    assert counts(structure) == {"Na": 2, "Cl": 1}


def test_unlike_full_atoms_on_one_point_are_an_error(tmp_path: Path) -> None:
    atoms = ("Ca Ca 0 0 0", "Mg Mg 0 0 0.001")
    with pytest.raises(NotAStructureError, match=r"Ca \(Ca\) and Mg \(Mg\) are both fully there"):
        read_text(tmp_path, cif(atoms, symbol="P -1"))


def test_occupancies_over_one_are_said(tmp_path: Path) -> None:
    atoms = ("Ca Ca 0 0 0 0.8", "Mg Mg 0 0 0 0.4", "O O 0.5 0.5 0.5 2")
    structure = read_text(tmp_path, cif(atoms, operations=P1, columns=OCCUPIED))
    assert codes(structure).count("occupancy_over_one") == 2
    assert structure.sites[1].occupants == (Occupant("O", 1.0),)


def test_occupancies_per_general_position_are_recognised(tmp_path: Path) -> None:
    """Titanium of rutile (site order 8) given as 0.125, oxygen (order 4) as 0.25: the formula shows what is meant."""
    atoms = ("Ti Ti 0 0 0 0.125", "O O 0.305 0.305 0 0.25")
    formula = "_chemical_formula_sum 'O2 Ti'\n_cell_formula_units_Z 2"
    structure = read_text(tmp_path, cif(atoms, RUTILE_CELL, symbol="P 42/m n m", columns=OCCUPIED, extra=formula))
    assert counts(structure) == {"Ti": 2, "O": 4}
    assert structure.is_ordered
    assert "occupancies_rescaled" in codes(structure)


def test_true_partial_occupancy_on_special_positions_is_left(tmp_path: Path) -> None:
    atoms = ("Ti Ti 0 0 0 0.5", "O O 0.305 0.305 0 1")
    formula = "_chemical_formula_sum 'O2 Ti0.5'\n_cell_formula_units_Z 2"
    structure = read_text(tmp_path, cif(atoms, RUTILE_CELL, symbol="P 42/m n m", columns=OCCUPIED, extra=formula))
    assert counts(structure) == {"Ti": 1, "O": 4}
    assert "occupancies_rescaled" not in codes(structure)


def test_missing_hydrogen_stands_first_with_figures(tmp_path: Path) -> None:
    """Portlandite without its hydrogen: Ca(OH)2, one formula unit in the cell."""
    formula = "_chemical_formula_sum 'Ca H2 O2'\n_cell_formula_units_Z 1"
    atoms = ("Ca Ca 0 0 0", "O O 0.3333 0.6667 0.234")
    structure = read_text(tmp_path, cif(atoms, (3.59, 3.59, 4.91, 90, 90, 120), symbol="P -3 m 1", extra=formula))
    assert codes(structure)[0] == "hydrogen_missing"
    assert "asks for 2 in the cell, the sites give 0" in message(structure, "hydrogen_missing")


def test_water_without_hydrogen_is_told_by_its_name(tmp_path: Path) -> None:
    atoms = ("Ca Ca 0 0 0", "Wat O 0.5 0.5 0.5")
    assert "Wat" in message(read_text(tmp_path, cif(atoms, operations=P1)), "hydrogen_missing")


@pytest.mark.parametrize(
    ("formula", "code", "words"),
    [
        ("'O2 Ti'\n_cell_formula_units_Z 2", "", ""),
        ("'O2 Ti'\n_cell_formula_units_Z 4", "formula_units", "holds 2 formula units, the file says 4"),
        ("'O3 Ti'\n_cell_formula_units_Z 2", "composition_mismatch", "O 4 for 6 expected"),
        ("'O2 Ti'\n_exptl_crystal_density_diffrn 4.25", "", ""),
        ("'O2 Ti'\n_exptl_crystal_density_diffrn 8.5", "formula_units", "implies by its density 4"),
        ("'C60'", "composition_mismatch", "expected"),
        ("?", "", ""),
    ],
)
def test_content_against_formula(tmp_path: Path, formula: str, code: str, words: str) -> None:
    """Rutile: two formula units, density 4.25 g/cm3 (handbook value, from memory)."""
    text = cif(RUTILE, RUTILE_CELL, symbol="P 42/m n m", extra=f"_chemical_formula_sum {formula}")
    structure = read_text(tmp_path, text)
    found = [one for one in codes(structure) if one in ("formula_units", "composition_mismatch")]
    assert found == ([code] if code else [])
    assert words in message(structure, code)


def test_atoms_too_close_are_said_with_the_distance(tmp_path: Path) -> None:
    atoms = ("C1 C 0 0 0", "C2 C 0.1 0 0", "H1 H 0.5 0.5 0.5", "O1 O 0.5 0.5 0.65")
    structure = read_text(tmp_path, cif(atoms, operations=P1))
    assert "1 pair of atoms is closer than any bond, nearest C1 and C2 at 0.56" in message(structure, "atoms_too_close")


def test_cell_volume_that_disagrees_is_said(tmp_path: Path) -> None:
    structure = read_text(tmp_path, cif(ROCK_SALT, operations=P1, extra="_cell_volume 359.8(2)"))
    assert "make 179.4 Å³, the file says 359.8 Å³" in message(structure, "volume_mismatch")


def test_cartesian_coordinates(tmp_path: Path) -> None:
    """Coordinates in Å along the cell's own axes, with the file's matrix and without one."""
    atoms = ("Na Na 0 0 0", "Cl Cl 2.82 2.82 2.82")
    text = cif(atoms, operations=P1, columns="label type_symbol Cartn_x Cartn_y Cartn_z")
    structure = read_text(tmp_path, text)
    assert structure.fractional[1] == pytest.approx([0.5, 0.5, 0.5])
    assert "frame_assumed" in codes(structure)
    matrix = [f"_atom_sites_fract_tran_matrix_{i}{j} {1 / 5.64 if i == j else 0}" for i in (1, 2, 3) for j in (1, 2, 3)]
    structure = read_text(tmp_path, "\n".join([text, *matrix]))
    assert structure.fractional[1] == pytest.approx([0.5, 0.5, 0.5])
    assert "frame_assumed" not in codes(structure)


def test_the_block_with_a_structure_is_taken(tmp_path: Path) -> None:
    text = "data_global\n_journal_year 1999\n" + cif(ROCK_SALT, operations=P1, name="I") + "data_end\n_x 1\n"
    assert len(read_text(tmp_path, text)) == 2


def test_several_structures_need_a_choice(tmp_path: Path) -> None:
    text = cif(ROCK_SALT, operations=P1, name="low") + cif(ROCK_SALT, symbol="F m -3 m", name="high")
    with pytest.raises(ReadError, match="holds 2 structures: low, high") as caught:
        read_text(tmp_path, text)
    assert "--block low" in caught.value.mend
    assert len(read_text(tmp_path, text, block="high")) == 8
    assert len(read_text(tmp_path, text, block=1)) == 2
    assert len(read_text(tmp_path, text, block="2")) == 8
    assert "several_blocks" in codes(read_text(tmp_path, text, block="LOW"))
    with pytest.raises(UsageError, match="no data block 'other'"):
        read_text(tmp_path, text, block="other")


def test_modulated_structures_give_their_average(tmp_path: Path) -> None:
    operations = "loop_\n_space_group_symop_ssg_operation_algebraic\nx1,x2,x3,x4\n-x1,-x2,-x3,-x4\n"
    extra = f"_cell_modulation_dimension 1\n{operations}"
    structure = read_text(tmp_path, cif(("O O 0.1 0.2 0.3",), extra=extra))
    assert len(structure) == 2
    assert "modulated" in codes(structure)


def test_magnetic_operations_act_on_positions(tmp_path: Path) -> None:
    loops = (
        "loop_\n_space_group_symop_magn_operation.xyz\nx,y,z,+1\n-x,-y,-z,-1\n"
        "loop_\n_space_group_symop_magn_centering.xyz\nx,y,z,+1\nx+1/2,y+1/2,z+1/2,-1\n"
    )
    structure = read_text(tmp_path, cif(("O O 0.1 0.2 0.3",), extra=loops))
    assert len(structure) == 4
    assert "magnetic" in codes(structure)


def test_names_are_text_without_control_characters(tmp_path: Path) -> None:
    extra = "_chemical_name_common '<script>alert(1)</script> \x1b[31m=cmd|x é'"
    structure = read_text(tmp_path, cif(ROCK_SALT, operations=P1, extra=extra))
    assert structure.name == "<script>alert(1)</script> [31m=cmd|x é"


def test_old_encodings_are_read(tmp_path: Path) -> None:
    """Author names in Latin-1, a byte-order mark, and UTF-16 do not disturb the atoms."""
    text = cif(ROCK_SALT, operations=P1, extra="_chemical_name_common 'Kähler'")
    for encoding in ("latin-1", "utf-8-sig", "utf-16"):
        structure = read_text(tmp_path, text.encode(encoding))
        assert (len(structure), structure.name) == (2, "Kähler")


def test_non_ascii_outside_quotes_does_not_stop_the_reader(tmp_path: Path) -> None:
    text = cif(ROCK_SALT, operations=P1, extra="_journal_name_full Météo")
    assert len(read_text(tmp_path, text)) == 2


def test_windows_line_ends_and_words_before_the_block(tmp_path: Path) -> None:
    text = "# header\nFrom: a mail\n" + cif(ROCK_SALT, operations=P1)
    assert len(read_text(tmp_path, text.replace("\n", "\r\n"))) == 2
