"""Loss of symmetry: what it can account for, of the crystal and of a unit's site; facts from published correlations."""

from __future__ import annotations

from literature import of_entry, reference

from sitesym.analysis import Analysis, analyse
from sitesym.bands.explanation import explain
from sitesym.bands.inventory import inventory
from sitesym.bands.measurement import Band
from sitesym.bands.site_lowering import site_lowerings

ENTRIES = {entry["name"]: entry for entry in reference("decompositions.toml")["compound"]}


def analysed(name: str) -> Analysis:
    return analyse(of_entry(ENTRIES[name]), scan=False)


def test_two_modes_cannot_have_four_wavenumbers() -> None:
    """Diamond structure in D2d: T2g becomes B2 + E, both active in infrared and Raman: two wavenumbers, not four."""
    bands = [Band(1332, "raman"), Band(900, "raman"), Band(611, "infrared"), Band(1100, "infrared")]
    result = explain(analysed("diamond"), bands)
    for one in result.lowerings:
        if one.name == "D2d":
            assert one.fails


def test_raman_of_nominally_cubic_barium_titanate_needs_loss_of_symmetry() -> None:
    """Pm-3m has no first-order Raman line (Perry and Hall, Phys. Rev. Lett. 15, 700, 1965; from memory)."""
    entry = next(one for one in ENTRIES.values() if one["space_group"] == 221 and "titanate" in one["name"])
    result = explain(analyse(of_entry(entry), scan=False), [Band(250, "raman"), Band(715, "raman")])
    assert all(one.placed.family is None for one in result.bands)
    assert all("symmetry_lowering" in {reason.cause for reason in one.reasons} for one in result.bands)
    assert not any(one.subgroup.group.has_inversion for one in result.lowerings)


def test_site_of_lower_symmetry_allows_the_symmetric_stretch_of_carbonate_in_infrared() -> None:
    """A1 of D3 is not infrared active; in C3 and C2 it becomes A, which holds the axis (Fateley 1971; from memory)."""
    analysis = analysed("calcite")
    symmetric = next(one for one in inventory(analysis) if one.vibration == "ν1")
    left = {one.left for one in site_lowerings(analysis, symmetric, "infrared")}
    assert left == {"C3", "C2"}
    assert site_lowerings(analysis, symmetric, "raman") == ()
    reasons = explain(analysis, [Band(1063, "infrared"), Band(1086, "raman"), Band(1407, "infrared")]).bands[1].reasons
    assert any("C3 in place of D3" in reason.argument for reason in reasons)


def test_water_in_an_anhydrous_salt_is_offered_as_a_hydrate() -> None:
    """K2SO4 has no water; 1640 and 3450 in infrared are the bands of water (common practice). Gypsum has its own."""
    sulfate = explain(analysed("potassium sulfate"), [Band(1640, "infrared"), Band(3450, "infrared")])
    assert all(any("hydrate" in reason.argument for reason in one.reasons) for one in sulfate.bands)
    gypsum = explain(analysed("gypsum"), [Band(1621, "infrared"), Band(3405, "infrared")])
    assert not any("hydrate" in reason.argument for one in gypsum.bands for reason in one.reasons)
