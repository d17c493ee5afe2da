"""Words on molecules and complex ions in the crystal: what they are, where they sit, what becomes of each vibration.

Functions that name species or symbols take a `Style` and return text that is ready and safe for that kind of document.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from typing import TYPE_CHECKING

from sitesym.molecule_symmetry import DEFAULT_TOLERANCE
from sitesym.views.fate_sentences import activity_words, at_site, bands_words, in_crystal, joined, spelled
from sitesym.views.labels import TEXT, Style
from sitesym.views.sentences import fill

if TYPE_CHECKING:
    from sitesym.analysis import Analysis
    from sitesym.molecular import AxisRelation, MolecularAnalysis, MoleculeRow
    from sitesym.molecules import FreeMolecule, UnitSet

KIND_WORDS = {
    "stretching": "stretching", "bending": "bending", "out-of-plane": "out-of-plane", "torsion": "torsional",
    "skeletal": "skeletal",
}  # fmt: skip
"""How a kind of vibration reads before the word vibration."""

# Which units there are


def units_words(analysis: Analysis, style: Style = TEXT) -> tuple[str, ...]:
    """`2 CO₃ (D₃h on D₃)`, `2 Ca`: one entry for each kind of unit; empty when no molecules were looked for."""
    molecular = analysis.molecular
    if molecular is None:
        return ()
    words = [_molecule_words(row, analysis, style) for row in molecular.molecules]
    words += [_net_words(net, style) for net in molecular.nets]
    atoms: dict[str, int] = {}
    for one in molecular.atoms:
        atoms[one.units.unit.name] = atoms.get(one.units.unit.name, 0) + one.units.count
    words += [f"{count} {style.formula(name)}" for name, count in atoms.items()]
    words += [f"{one.count} {style.formula(one.unit.name)} (by atomic sites)" for one in molecular.unfollowed]
    return tuple(words)


def _molecule_words(row: MoleculeRow, analysis: Analysis, style: Style) -> str:
    label = distinguishing_label(row, analysis)
    which = f" with {style.plain(label)}" if label else ""
    groups = f"{style.schoenflies(row.free.group.schoenflies)} on {site_group_words(row, style)}"
    return f"{row.units.count} {style.formula(row.name)}{which} ({groups})"


def _net_words(net: UnitSet, style: Style) -> str:
    kind = net.unit.kind + ("s" if net.count > 1 else "")
    return f"{net.count} {style.plain(kind)} {style.formula(net.unit.name)}"


def site_group_words(row: MoleculeRow, style: Style = TEXT) -> str:
    """Schoenflies symbol of the site group."""
    group = row.units.site_group
    assert group is not None
    return style.schoenflies(group.schoenflies)


def unit_word(row: MoleculeRow) -> str:
    """What to call the unit: ion or molecule where the table of common units or the formulas tell, else unit."""
    if row.known is None:
        return "molecule" if row.alone else "unit"
    return "ion" if row.known.charge else "molecule"


LEGEND = "I infrared, R Raman, - not active; E ∥ is the polarization of infrared light. T translations, L librations."
"""What the letters in the diagram mean."""


def title(row: MoleculeRow, analysis: Analysis, style: Style = TEXT) -> str:
    """`CO₃: from the free ion to the crystal`; with an atom's label where there are inequivalent ones."""
    label = distinguishing_label(row, analysis)
    which = f" with {style.plain(label)}" if label else ""
    return f"{style.formula(row.name)}{which}: {style.plain(f'from the free {unit_word(row)} to the crystal')}"


def distinguishing_label(row: MoleculeRow, analysis: Analysis) -> str:
    """The label of an atom of the unit where other units have the same formula; else ""."""
    molecular = analysis.molecular
    several = molecular is not None and any(row in rows for rows in molecular.inequivalent)
    return next(iter(row.units.unit.labels), "") if several else ""


# Groups and orientation


def free_group_words(free: FreeMolecule, style: Style = TEXT) -> str:
    """`D₃h, deviation 0.018 Å; next higher group …`: the free unit's own group and how far it can be trusted."""
    found = free.symmetry
    higher = found.next_higher
    group = style.schoenflies(free.group.schoenflies)
    if higher is None:
        after = style.plain("; no higher group is near")
    else:
        after = fill(
            style,
            f"; the next higher group {{group}} would move an atom by {higher.deviation:.2f} Å (tolerance "
            f"{higher.needed_tolerance:.2f} Å)",
            group=style.schoenflies(free.higher_group),
        )
    return f"{group}{style.plain(f', deviation {found.deviation:.3f} Å')}{after}"


def tolerance_remark(row: MoleculeRow, analysis: Analysis, style: Style = TEXT) -> str:
    """Where the free group was not taken at the usual tolerance: why; else ""."""
    molecular = analysis.molecular
    if molecular is not None and molecular.tolerance is not None:
        return style.plain(f"The free group was looked for at your tolerance of {molecular.tolerance:g} Å.")
    needed = row.free.symmetry.needed_tolerance
    if needed <= DEFAULT_TOLERANCE:
        return ""
    return fill(
        style,
        f"The free group needs a tolerance of {needed:.2f} Å, more than the usual {DEFAULT_TOLERANCE:g} Å: it was "
        "taken because {formula} of this group is a common unit. Expect wide splittings.",
        formula=style.formula(row.name),
    )


def site_words(row: MoleculeRow, style: Style = TEXT) -> str:
    """`D₃ (32), Wyckoff position 6a`."""
    place = style.plain(f"), Wyckoff position {row.multiplicity}{row.wyckoff}")
    return f"{site_group_words(row, style)} ({style.symbol(row.symbol)}{place}"


def orientation_words(row: MoleculeRow, style: Style = TEXT) -> str:
    """`z ∥ c, x ∥ a, y 12.3° from b`; "" for a unit without an axis or plane of symmetry."""
    if row.free.group.schoenflies in ("C1", "Ci"):
        return ""
    planar = row.free.is_planar
    return style.plain(", ".join(_axis_words(one, row, planar) for one in row.orientation))


def _axis_words(one: AxisRelation, row: MoleculeRow, planar: bool) -> str:
    direction = "xyz".index(one.name)
    flat = planar and bool(abs(row.free.positions @ row.free.group.frame[direction]).max() < 1e-3)
    name = one.name + (" (normal to the plane)" if flat else "")
    if one.angle < 0.05:
        return f"{name} ∥ {one.nearest}"
    numbers = ", ".join(f"{value + 0.0:.2f}".replace("-", "−").replace("−0.00", "0.00") for value in one.direction)
    return f"{name} {one.angle:.1f}° from {one.nearest} [{numbers}]"


def facts(analysis: Analysis, row: MoleculeRow, style: Style = TEXT) -> tuple[tuple[str, str], ...]:
    """What stands at the head of a molecule's section: names of fields and their text, empty ones left out."""
    found = (
        ("Free group", free_group_words(row.free, style)),
        ("Site", site_words(row, style)),
        ("Crystal", _crystal_words(analysis, row, style)),
        ("Its axes", orientation_words(row, style)),
        ("Bonds", style.plain(row.units.unit.reason)),
        ("Wavenumbers", style.plain(source_words(row))),
    )
    return tuple((name, words) for name, words in found if words)


def remarks(analysis: Analysis, row: MoleculeRow, style: Style = TEXT) -> tuple[str, ...]:
    """What must be known before believing the section."""
    found = (tolerance_remark(row, analysis, style), average_sentence(row, style), style.plain(row.remark))
    return tuple(filter(None, found))


def _crystal_words(analysis: Analysis, row: MoleculeRow, style: Style) -> str:
    count = row.units.count
    number = f", {spelled(count)} such {unit_word(row)}{'s' if count > 1 else ''} in the primitive cell"
    return style.schoenflies(analysis.factor_group.schoenflies) + style.plain(number)


def source_words(row: MoleculeRow) -> str:
    """Where the wavenumbers of a unit come from; "" where there are none."""
    given = any(one.given for names in row.names for one in names)
    if not row.source:
        return "yours, where printed" if given else ""
    free = f"of the free {unit_word(row)}, from {row.source}"
    return f"yours where they stand with 'at'; others {free}" if given else free


# What becomes of a vibration


def names_words(row: MoleculeRow, index: int) -> str:
    """`ν3`, `ν6, ν9`: the usual names of one row of vibrations; "" unless all of them have one."""
    named = [one.name for one in row.names[index] if one.name]
    return ", ".join(named) if len(named) == row.correlation.vibrations[index].count else ""


def wavenumbers_words(row: MoleculeRow, index: int) -> str:
    """`near 1415 cm⁻¹` for tabulated wavenumbers, `at 1407 cm⁻¹` for the user's; "" where not all are known."""
    known = row.names[index]
    values = [one.wavenumber for one in known if one.wavenumber is not None]
    if len(values) < row.correlation.vibrations[index].count:
        return ""
    given = all(one.given for one in known)
    return f"{'at' if given else 'near'} {joined([f'{value:g}' for value in values])} cm⁻¹"


def vibration_sentence(analysis: Analysis, row: MoleculeRow, index: int, style: Style = TEXT) -> str:
    """What becomes of one row of vibrations: at the site, by the correlation field, and in the two spectra."""
    fate = row.fates[index]
    many = fate.free.count > 1
    each = "each gives " if many else ""
    return "".join((
        _subject(row, index, style),
        " ",
        at_site(site_group_words(row, style), fate, many, style),
        in_crystal(analysis, fate, many, row.units.count == 1, style),
        style.plain(f": {each}{bands_words(fate.in_crystal)}."),
    ))  # fmt: skip


def vibration_sentences(analysis: Analysis, row: MoleculeRow, style: Style = TEXT) -> tuple[str, ...]:
    """One sentence for each row of vibrations: by the numbers of their names where all have one, else as counted."""
    numbers = [re.match(r"ν(\d+)", names_words(row, index)) for index in range(len(row.fates))]
    order = sorted(range(len(numbers)), key=lambda k: int(one[1]) if all(numbers) and (one := numbers[k]) else k)
    return tuple(vibration_sentence(analysis, row, index, style) for index in order)


def _subject(row: MoleculeRow, index: int, style: Style) -> str:
    """`ν3 (E′ stretching, near 1415 cm⁻¹, infrared and Raman in the free ion)`."""
    fate, kind = row.fates[index], KIND_WORDS[row.correlation.vibrations[index].kind]
    names, species = names_words(row, index), style.species(fate.free.label)
    where = wavenumbers_words(row, index)
    free = f"{activity_words(fate.free.activity)} in the free {unit_word(row)}"
    inside = style.plain(", ".join(filter(None, (where, free))))
    if names:
        return f"{style.plain(names)} ({species} {style.plain(kind)}, {inside})"
    count = fate.free.count
    lead = "The" if count == 1 else str(count)
    return f"{lead} {species} {style.plain(kind + ' vibration' + ('s' if count > 1 else ''))} ({inside})"


def exclusion_sentence(analysis: Analysis, row: MoleculeRow, style: Style = TEXT) -> str:
    """Whether the internal vibrations of this unit may coincide in infrared and Raman, and why."""
    alone = (
        f"With one such {unit_word(row)} in the primitive cell the correlation field splits nothing. "
        if row.units.count == 1
        else ""
    )
    return style.plain(alone + _exclusion(analysis, row))


def _exclusion(analysis: Analysis, row: MoleculeRow) -> str:
    site = row.units.site_group
    assert site is not None
    if site.has_inversion:
        return (
            "The unit sits on a centre of inversion: as in the free unit, none of its vibrations shows in both spectra."
        )
    if analysis.factor_group.has_inversion:
        return (
            "The site has no centre of inversion, the crystal has one: where a vibration shows in both spectra, the "
            "bands belong to different components and may lie apart by the correlation splitting."
        )
    if row.free.group.has_inversion:
        return (
            "The free unit's centre of inversion is lost in this crystal: infrared and Raman do not exclude each other."
        )
    return "Neither the free unit nor the crystal has a centre of inversion: infrared and Raman exclude nothing."


# Several kinds of units; units that are no molecules


def inequivalent_sentences(analysis: Analysis, style: Style = TEXT) -> tuple[str, ...]:
    """For units of one formula that symmetry does not connect: how many more bands to expect."""
    molecular = analysis.molecular
    return tuple(_inequivalent(rows, style) for rows in (molecular.inequivalent if molecular else ()))


def _inequivalent(rows: Sequence[MoleculeRow], style: Style) -> str:
    name = f"{rows[0].known.name} ({{formula}})" if rows[0].known else "{formula}"
    pairs = sorted({pair for row in rows for pair in row.bond_pairs})
    bonds = f"{pairs[0]} stretching bands" if len(pairs) == 1 else "bands of each internal vibration"
    times = {2: "twice", 3: "three times"}.get(len(rows), f"{len(rows)} times")
    groups = [site_group_words(row, style) for row in rows]
    sites = groups[0] if len(set(groups)) == 1 else joined(groups)
    return fill(
        style,
        f"There are {spelled(len(rows))} inequivalent kinds of {name}, on {{sites}} sites: up to {times} as many "
        f"{bonds} as for one kind. Symmetry does not tell how far apart they lie.",
        formula=style.formula(rows[0].name),
        sites=sites,
    )


def net_sentences(analysis: Analysis, style: Style = TEXT) -> tuple[str, ...]:
    """For chains, layers and nets, and units that could not be followed: how they were treated, and why."""
    molecular = analysis.molecular
    if molecular is None:
        return ()
    nets = [
        fill(
            style,
            f"{{formula}} is {_article(one.unit.kind)}, not a molecule: its vibrations are those of the whole crystal. "
            "They are counted by atomic sites, as framework.",
            formula=style.formula(one.unit.name),
        )
        for one in molecular.nets
    ]
    others = [
        fill(
            style,
            f"{{formula}} is counted by atomic sites, as framework: {one.obstacle}.",
            formula=style.formula(one.unit.name),
        )
        for one in molecular.unfollowed
    ]
    return (*nets, *others)


def _article(kind: str) -> str:
    return f"an endless {kind}" if kind in ("chain", "layer") else f"a {kind}"


def average_sentence(row: MoleculeRow, style: Style = TEXT) -> str:
    """For a unit of partly or jointly occupied atoms: that its group is that of an average; else ""."""
    if not row.units.unit.disordered:
        return ""
    return style.plain(
        "Atoms of this unit are partly or jointly occupied: its group and site are those of the average. A single unit "
        "has less symmetry, so real bands may split further and show where they are forbidden here."
    )


ORIGINS = ("translational", "librational", "internal", "framework")
"""The fields of `sitesym.molecular.Origin` in the order in which they are shown."""


def without_wavenumber(molecular: MolecularAnalysis, style: Style = TEXT) -> str:
    """How many internal vibrations are not among the expected bands; "" if none is missing."""
    missing = sum(
        vibration.count - sum(one.wavenumber is not None for one in names)
        for row in molecular.molecules
        for vibration, names in zip(row.correlation.vibrations, row.names, strict=True)
    )
    if not missing:
        return ""
    many = "s" if missing > 1 else ""
    return style.plain(f"{missing} more internal vibration{many} of free units without a wavenumber.")


BAND_NOTE = (
    "Free wavenumbers usually shift in the crystal by 5 to 30 cm⁻¹, but the stretches of oxyanions (ν3) may spread "
    "over 100 cm⁻¹ and more, and those of hydrogen-bonded groups shift by far more. Components of one vibration stand "
    "on one line, for symmetry does not tell how far they lie apart."
)


def origin_note(style: Style = TEXT) -> str:
    """What the columns of the origins mean."""
    return style.plain(
        "Translational: units moving as wholes against each other, without the acoustic modes. Librational: units "
        "turning as wholes. Internal: within units. Framework: atoms of chains, layers and nets. Modes of one species "
        "mix; the origins are exact as counts only."
    )
