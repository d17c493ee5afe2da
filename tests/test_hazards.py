"""Flags against what every laboratory knows of a substance (UN GHS; common practice), on structures of other making.

Molecules come from ASE, crystals from their published cells; hand-made ions have the bond lengths of the trade.
"""

from __future__ import annotations

import tomllib
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from ase import Atoms
from ase.build import bulk, molecule

import sitesym
from sitesym.analysis import analyse
from sitesym.experiment.bench import read_laser
from sitesym.experiment.hazards import hazards_of, sample_flags
from sitesym.reading import read
from sitesym.structure import Occupant, OpenQuestion, Site, Structure

ROOT = Path(__file__).parent.parent
TABLE = tomllib.loads((Path(sitesym.__file__).parent / "data" / "hazards.toml").read_text(encoding="utf-8"))
DEMO = ROOT / "structures_demo"


def boxed(*atoms: tuple[str, tuple[float, float, float]], edge: float = 14.0) -> Structure:
    """Atoms at Cartesian places in Å in a large cubic cell."""
    places = np.array([place for _, place in atoms]) / edge
    return Structure(np.eye(3) * edge, places, tuple(Site(name, (Occupant(name),)) for name, _ in atoms))


def in_box(atoms: Atoms) -> Structure:
    atoms.set_cell([14, 14, 14])
    atoms.center()
    atoms.pbc = True
    return read(atoms)


def kinds(structure: Structure) -> dict[str, set[str]]:
    """kind -> causes"""
    found: dict[str, set[str]] = {}
    for flag in sample_flags(structure):
        found.setdefault(flag.kind, set()).add(flag.cause)
    return found


def ion(centre: str, ligand: str, length: float, directions: list[tuple[float, float, float]]) -> list:
    rays = [np.array(one) / np.linalg.norm(one) for one in directions]
    return [(centre, (4.0, 4.0, 4.0)), *((ligand, tuple(4.0 + length * ray)) for ray in rays)]


TETRAHEDRON = [(1, 1, 1), (1, -1, -1), (-1, 1, -1), (-1, -1, 1)]
TRIANGLE = [(1, 0, 0), (-0.5, 0.866, 0), (-0.5, -0.866, 0)]
PERCHLORATE = ion("Cl", "O", 1.44, TETRAHEDRON)
NITRATE = ion("N", "O", 1.25, TRIANGLE)
AZIDE = [("N", (4.0, 4.0, 2.83)), ("N", (4.0, 4.0, 4.0)), ("N", (4.0, 4.0, 5.17))]
FULMINATE = [("C", (4.0, 4.0, 2.83)), ("N", (4.0, 4.0, 4.0)), ("O", (4.0, 4.0, 5.24))]
CYANATE = [("N", (4.0, 4.0, 2.83)), ("C", (4.0, 4.0, 4.0)), ("O", (4.0, 4.0, 5.2))]
CYANIDE = [("C", (4.0, 4.0, 4.0)), ("N", (4.0, 4.0, 5.16))]
SODIUM = ("Na", (9.5, 9.5, 9.5))
METHYLAMMONIUM_LIKE = [
    ("C", (9, 9, 9)),
    ("H", (9.6, 9.6, 9.6)),
    ("H", (9.6, 8.4, 8.4)),
    ("H", (8.4, 9.6, 8.4)),
    ("H", (8.4, 8.4, 9.6)),
]


@pytest.mark.parametrize(
    ("atoms", "kind"),
    [
        ([*PERCHLORATE, SODIUM], "oxidizing"), ([*NITRATE, SODIUM], "oxidizing"), ([*AZIDE, SODIUM], "explosive"),
        ([*AZIDE, SODIUM], "toxic"), ([*FULMINATE, SODIUM], "explosive"), ([*CYANIDE, SODIUM], "toxic"),
        ([*PERCHLORATE, *METHYLAMMONIUM_LIKE], "explosive"), ([*NITRATE, *METHYLAMMONIUM_LIKE], "explosive"),
    ],
)  # fmt: skip
def test_ions_that_the_trade_fears_are_flagged(atoms: list, kind: str) -> None:
    assert kind in kinds(boxed(*atoms))


def test_isomers_are_told_apart() -> None:
    """Cyanates are no fulminates."""
    assert "explosive" not in kinds(boxed(*CYANATE, SODIUM))


def test_harmless_neighbours_of_dangerous_ions_are_not_flagged_as_explosive() -> None:
    """Sodium perchlorate and sodium nitrate are oxidizers, not explosives (UN GHS)."""
    for atoms in ([*PERCHLORATE, SODIUM], [*NITRATE, SODIUM]):
        assert "explosive" not in kinds(boxed(*atoms))


def test_ion_is_recognised_with_deuterium_and_across_a_cell_edge() -> None:
    shifted = [(name, tuple(np.mod(np.array(place) - 4.2, 14.0))) for name, place in [*NITRATE, *METHYLAMMONIUM_LIKE]]
    heavy = [("D" if name == "H" else name, place) for name, place in shifted]
    assert kinds(boxed(*shifted)) == kinds(boxed(*heavy))
    assert "explosive" in kinds(boxed(*heavy))


@pytest.mark.parametrize(
    ("name", "kind", "cause"),
    [("CH3NO2", "explosive", "nitro"), ("N2H4", "toxic", "N2H4"), ("H2O2", "oxidizing", "H2O2"), ("CO", "toxic", "CO"),
     ("P4", "flammable", "P4"), ("HF", "corrosive", "HF")],
)  # fmt: skip
def test_molecules_are_flagged(name: str, kind: str, cause: str) -> None:
    atoms = (
        Atoms("P4", [(1.1, 0, 0), (-1.1, 0, 0), (0, 1.1, 1.5556), (0, -1.1, 1.5556)])
        if name == "P4"
        else molecule(name)
    )
    assert cause in kinds(in_box(atoms))[kind]


@pytest.mark.parametrize("name", ["C6H6", "CH3CONH2", "H2O", "CO2", "CH3CH2NH2", "CH3CN", "C2H6"])
def test_molecules_without_such_groups_are_not_called_explosive(name: str) -> None:
    assert "explosive" not in kinds(in_box(molecule(name)))


def test_deuterium_counts_as_hydrogen() -> None:
    peroxide = in_box(molecule("H2O2"))
    heavy = tuple(replace(one, occupants=(Occupant("D"),)) if one.element == "H" else one for one in peroxide.sites)
    assert "H2O2" in kinds(replace(peroxide, sites=heavy))["oxidizing"]


def test_saturated_nitrogen_chain_is_no_diazo_group() -> None:
    """CH3-NH-NH2: the end nitrogen of a diazo group has one neighbour, here it has three."""
    atoms = [
        ("C", (4.0, 4.0, 4.0)), ("N", (5.46, 4.0, 4.0)), ("N", (5.95, 5.35, 4.0)), ("H", (3.64, 5.03, 4.0)),
        ("H", (3.64, 3.5, 4.9)), ("H", (3.64, 3.5, 3.1)), ("H", (5.8, 3.5, 4.8)), ("H", (6.97, 5.3, 4.0)),
        ("H", (5.6, 5.8, 3.2)),
    ]  # fmt: skip
    assert "explosive" not in kinds(boxed(*atoms))


def test_three_nitro_groups_are_more_than_one() -> None:
    """Three molecules with one group each are not one with three: CH(NO2)3 is built on one carbon atom."""
    one = molecule("CH3NO2")
    three = one.copy()
    for shift in (5.0, 10.0):
        other = one.copy()
        other.translate([shift, 0, 0])
        three += other
    assert kinds(in_box(three))["explosive"] == {"nitro"}
    assert "nitro, three or more" in kinds(boxed(*nitro_groups_on_carbon(3)))["explosive"]
    assert kinds(boxed(*nitro_groups_on_carbon(2)))["explosive"] == {"nitro"}


def nitro_groups_on_carbon(count: int) -> list:
    """One carbon atom with so many nitro groups and a hydrogen atom."""
    carbon = np.array([7.0, 7.0, 7.0])
    atoms = [("C", tuple(carbon)), ("H", (7.0, 7.0, 8.09))]
    rays = [
        ((0.94, 0, -0.33), (0, 1, 0)),
        ((-0.47, 0.81, -0.33), (0.87, 0.5, 0)),
        ((-0.47, -0.81, -0.33), (-0.87, 0.5, 0)),
    ]
    for ray, across in rays[:count]:
        nitrogen = carbon + 1.5 * np.array(ray)
        atoms.append(("N", tuple(nitrogen)))
        atoms += [("O", tuple(nitrogen + 0.57 * np.array(ray) + side * 1.08 * np.array(across))) for side in (1, -1)]
    return atoms


@pytest.mark.parametrize(
    ("symbol", "kind"),
    [
        ("Be", "toxic"),
        ("As", "toxic"),
        ("Cd", "toxic"),
        ("Hg", "toxic"),
        ("Tl", "toxic"),
        ("Pb", "toxic"),
        ("U", "radioactive"),
    ],
)
def test_toxic_and_radioactive_elements_are_flagged(symbol: str, kind: str) -> None:
    assert symbol in {
        cause
        for causes in [kinds(boxed((symbol, (1, 1, 1)), ("O", (7, 7, 7))))[kind]]
        for one in causes
        for cause in one.split(", ")
    }


def test_sulfide_is_flagged_and_sulfate_is_not() -> None:
    """Moist acid sets hydrogen sulfide free from sulfides (common practice)."""
    assert "sulfide" in kinds(read(bulk("ZnS", "zincblende", a=5.41)))["toxic"]
    assert "sulfide" not in kinds(read(DEMO / "gypsum.cif")).get("toxic", set())


def test_quartz_dust_is_flagged_and_silicon_is_not() -> None:
    assert "crystalline silica" in kinds(read(DEMO / "quartz.cif"))["toxic"]
    assert kinds(read(DEMO / "silicon.cif")) == {}


def test_sodium_nitrate_of_the_demonstration_is_an_oxidizer() -> None:
    assert kinds(read(DEMO / "sodium_nitrate.cif")) == {"oxidizing": {"NO3"}}


def test_mixed_site_raises_the_flags_of_all_its_elements() -> None:
    calcite = read(DEMO / "calcite.cif")
    lead = (Occupant("Ca", 0.99), Occupant("Pb", 0.01))
    sites = tuple(replace(site, occupants=lead) if site.element == "Ca" else site for site in calcite.sites)
    assert "Pb" in kinds(replace(calcite, sites=sites))["toxic"]


def test_what_the_file_hides_is_said() -> None:
    """No element names, or no hydrogen: silence would look like clearance."""
    unnamed = boxed(("A", (1, 1, 1)), ("B", (7, 7, 7)))
    assert sample_flags(unnamed)[0].kind == "unknown"
    assert "unknown" in kinds(read(DEMO / "portlandite_without_hydrogen.cif"))
    missing = replace(read(DEMO / "silicon.cif"), questions=(OpenQuestion("hydrogen_missing", "words"),))
    assert "unknown" in kinds(missing)


def test_the_gravest_comes_first() -> None:
    found = [flag.kind for flag in sample_flags(boxed(*PERCHLORATE, *METHYLAMMONIUM_LIKE))]
    assert found[0] == "explosive"
    assert found == sorted(
        found, key=["explosive", "radioactive", "toxic", "corrosive", "flammable", "oxidizing"].index
    )


def test_every_plan_speaks_of_the_laser_and_gives_no_clearance() -> None:
    """IEC 60825-1 and the laser safety officer; heating and decomposition of what absorbs (common practice)."""
    found = hazards_of(analyse(read(DEMO / "silicon.cif"), scan=False))
    words = " ".join(one.words for one in found.cautions)
    for wanted in ("IEC 60825-1", "laser safety officer", "decompose", "absorbs"):
        assert wanted in words
    assert "never a clearance" in found.preface


@pytest.mark.parametrize(
    ("line", "topic", "there"),
    [("785", "invisible beam", True), ("632.8", "invisible beam", False), ("325", "ultraviolet beam", True),
     ("532", "frequency-doubled or pumped laser", True), ("514.5", "frequency-doubled or pumped laser", False)],
)  # fmt: skip
def test_cautions_follow_the_laser(line: str, topic: str, there: bool) -> None:
    found = hazards_of(analyse(read(DEMO / "silicon.cif"), scan=False), [read_laser(line)])
    assert (topic in {one.topic for one in found.cautions}) is there


def test_cold_and_energetic_samples_get_their_cautions() -> None:
    silicon = analyse(read(DEMO / "silicon.cif"), scan=False)
    assert "cryostat" in {one.topic for one in hazards_of(silicon, temperature=77).cautions}
    assert "cryostat" not in {one.topic for one in hazards_of(silicon).cautions}
    azide = analyse(boxed(*AZIDE, SODIUM), scan=False)
    assert "energetic sample" in {one.topic for one in hazards_of(azide).cautions}


def test_every_entry_of_the_table_has_words_and_a_source() -> None:
    for name in ("always", "when", "element", "composition", "unit", "group"):
        for entry in TABLE[name]:
            assert entry["words"].endswith(".")
            assert entry["source"]
