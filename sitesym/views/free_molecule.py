"""What a report on a free molecule says, and one on two side by side, in words ready for a style."""

from __future__ import annotations

from pathlib import PurePath
from typing import TYPE_CHECKING

from sitesym.views.blocks import Block, Table
from sitesym.views.fate_sentences import activity_words
from sitesym.views.labels import TEXT, Style, decomposition
from sitesym.views.molecule_sentences import KIND_WORDS, free_group_words
from sitesym.views.sentences import fill, raman_elements

if TYPE_CHECKING:
    from sitesym.groups.kind import Kind
    from sitesym.molecule_analysis import (
        BandCounts,
        ComparedBands,
        MoleculeAnalysis,
        MoleculeComparison,
        MoleculeSpecies,
    )

_COUNTS = ("infrared", "raman", "both", "silent", "polarized")


def title(result: MoleculeAnalysis, style: Style = TEXT) -> str:
    """Formula and name."""
    name = result.known.name if result.known else ""
    words = ", ".join(dict.fromkeys(filter(None, (name, result.molecule.name))))
    return f"{style.formula(result.formula)}   {style.plain(words)}".rstrip()


def comparison_title(result: MoleculeComparison, style: Style = TEXT) -> str:
    """Both formulas, or one where they agree, and the names."""
    formulas = [style.formula(one.formula) for one in (result.first, result.second)]
    names = " and ".join(compared_names(result))
    return f"{style.plain(' and ').join(dict.fromkeys(formulas))}: {style.plain(names)}, {style.plain('side by side')}"


def compared_names(result: MoleculeComparison) -> tuple[str, str]:
    """What to call the two: `A (anti)`, `B (gauche)` by their names or files, `A` and `B` where there are none."""
    words = [one.molecule.name or PurePath(one.molecule.source).stem for one in (result.first, result.second)]
    first, second = (f"{letter} ({word})" if word else letter for letter, word in zip("AB", words, strict=True))
    return first, second


# One molecule


def blocks(result: MoleculeAnalysis, style: Style = TEXT) -> tuple[Block, ...]:
    """The report on one molecule; a single atom has no more than its first block."""
    head = Block("", _fields(result, style), cautions=_cautions(result, style))
    if result.free.symmetry.is_atom:
        return (head, Block("", notes=(style.plain("A single atom has no vibrations."),)))
    return (
        head,
        Block("", table=_answer(result, style), notes=(exclusion(result, style), *_polarized_note(result, style))),
        Block("Vibrations", table=vibration_table(result, style), notes=_source_notes(result, style)),
        Block("Stretches by kind of bond", table=_stretches(result, style), notes=_stretch_notes(result, style)),
        Block("Species", table=_species(result, style)),
        Block("Atoms in the molecule's axes", table=_atoms(result, style), notes=(style.plain(_ATOMS_NOTE),)),
    )


_ATOMS_NOTE = "In Å from the centre, as measured; 'off' is the distance from the place that the point group demands."


def _fields(result: MoleculeAnalysis, style: Style) -> tuple[tuple[str, str], ...]:
    free = result.free
    if free.symmetry.is_atom:
        found = (("File", result.molecule.source), ("Point group", "Kh, that of a sphere"), ("Atoms", "1"))
        return tuple((style.plain(name), style.plain(words)) for name, words in found if words)
    motions = {one.label: one for one in result.species}
    fields = [
        ("File", style.plain(result.molecule.source)),
        ("Point group", free_group_words(free, style)),
        ("Axes", style.plain(axes_words(free.group.kind, free.is_planar))),
        ("Atoms", style.plain(_number_words(result))),
        ("Bonds", style.plain(result.reason)),
    ]
    if motions:
        fields += [
            ("Γ(internal)", decomposition({k: one.internal for k, one in motions.items()}, style)),
            ("Γ(translation)", decomposition({k: one.translations for k, one in motions.items()}, style)),
            ("Γ(rotation)", decomposition({k: one.rotations for k, one in motions.items()}, style)),
        ]
    return tuple((style.plain(name), words) for name, words in fields if words)


def _number_words(result: MoleculeAnalysis) -> str:
    """`8: 3 × 8 − 6 = 18 internal vibrations`."""
    atoms, rigid = len(result.molecule), 5 if result.free.group.kind.is_linear else 6
    degenerate = any(one.internal and one.dimension > 1 for one in result.species)
    partners = ", degenerate ones counted with all their partners" if degenerate else ""
    count = 3 * atoms - rigid
    return f"{atoms}: 3 × {atoms} − {rigid} = {count} internal vibration{'s' if count > 1 else ''}{partners}"


def axes_words(kind: Kind, planar: bool) -> str:
    """What the molecule's x, y and z are, by the rules that fix its labels."""
    name = kind.schoenflies
    if kind.is_linear:
        return "z along the molecule"
    if name in ("C1", "Ci"):
        return "none is fixed by symmetry"
    if name == "Cs":
        return "z normal to the mirror plane"
    if kind.is_polyhedral:
        return "x, y, z along axes of the polyhedron; all three are alike"
    if name == "D2h":
        return "x normal to the plane, z through the most atoms" if planar else "z through the most atoms"
    if name == "C2v":
        return "z the twofold axis, x normal to the plane" if planar else "z the twofold axis, yz the richest mirror"
    return f"z the {_FOLD.get(kind.n, f'{kind.n}-fold')} axis{_SECOND.get(kind.family.value, '')}"


_FOLD = {2: "twofold", 3: "threefold", 4: "fourfold", 5: "fivefold", 6: "sixfold", 8: "eightfold"}
_SECOND = {
    "Cnh": ", normal to the mirror plane", "Cnv": ", x normal to a mirror", "Dn": ", x along a twofold axis",
    "Dnh": ", x along a twofold axis", "Dnd": ", x along a twofold axis", "S2n": " of rotation",
}  # fmt: skip
"""What else is known of the axes of a family of groups."""


def _cautions(result: MoleculeAnalysis, style: Style) -> tuple[str, ...]:
    found = [style.plain(one.message) for one in result.cautions]
    return tuple(found + ([style.plain(result.remark)] if result.remark else []))


def _answer(result: MoleculeAnalysis, style: Style) -> Table:
    found, rules = result.counts, [(one, one.activity) for one in result.species]
    chosen = {
        "infrared": [one for one, rule in rules if rule.infrared],
        "Raman": [one for one, rule in rules if rule.raman],
        "both": [one for one, rule in rules if rule.infrared and rule.raman],
        "silent": [one for one, rule in rules if rule.silent],
    }
    numbers = (found.infrared, found.raman, found.both, found.silent)
    rows = tuple(
        (style.plain(name), str(number), decomposition({one.label: one.internal for one in some}, style))
        for (name, some), number in zip(chosen.items(), numbers, strict=True)
    )
    return Table((style.plain("seen in"), style.plain("frequencies"), style.plain("species")), rows, "<><", (2,))


def exclusion(result: MoleculeAnalysis, style: Style = TEXT) -> str:
    """Whether infrared and Raman exclude each other in the free molecule."""
    if result.has_exclusion:
        return style.plain(
            "The molecule has a centre of inversion: as long as it keeps this form, no vibration shows both in "
            "infrared and in Raman."
        )
    both = [one for one in result.species if one.activity.infrared and one.activity.raman and one.internal]
    if not both:
        return style.plain("There is no centre of inversion, yet no vibration shows in both infrared and Raman.")
    species = ", ".join(style.species(one.label) for one in both)
    return fill(
        style,
        "There is no centre of inversion: vibrations of {species} show in both infrared and Raman.",
        species=species,
    )


def _polarized_note(result: MoleculeAnalysis, style: Style) -> tuple[str, ...]:
    number = result.counts.polarized
    label = next(one.label for one in result.species if one.polarized)
    if not number:
        return (style.plain("No Raman band is polarized: none is totally symmetric."),)
    rest = result.counts.raman > number
    others = "; all others are depolarized (ratio 3/4 for plane polarized light)" if rest else ""
    return (
        fill(
            style,
            f"{number} Raman band{'s' if number > 1 else ''} ({{species}}) "
            f"{'are' if number > 1 else 'is'} polarized in gas or liquid{others}.",
            species=style.species(label),
        ),
    )


def vibration_table(result: MoleculeAnalysis, style: Style) -> Table:
    """One row for each species and kind of vibration, with names and wavenumbers where they are known."""
    rows = []
    for one, known in zip(result.vibrations, result.names, strict=True):
        names = ", ".join(item.name for item in known if item.name)
        values = ", ".join(f"{item.wavenumber:g}" for item in known if item.wavenumber is not None)
        rows.append((
            style.species(one.species), str(one.count), style.plain(KIND_WORDS[one.kind]),
            style.plain(activity_words(one.activity)), style.plain(names), values,
        ))  # fmt: skip
    header = tuple(map(style.plain, ("species", "number", "kind", "seen in", "names", "cm⁻¹")))
    return Table(header, tuple(rows), "<><<<<", (4, 5))


def _source_notes(result: MoleculeAnalysis, style: Style) -> tuple[str, ...]:
    given = any(one.given for names in result.names for one in names)
    words = []
    if result.source:
        words.append(f"Wavenumbers from {result.source}" + (", except those that you gave." if given else "."))
    elif given:
        words.append("Wavenumbers as you gave them.")
    return tuple(map(style.plain, words))


def _stretches(result: MoleculeAnalysis, style: Style) -> Table | None:
    if not result.stretches:
        return None
    from sitesym.molecule_analysis import band_counts

    rows = []
    for one in result.stretches:
        found = band_counts(result.free.group, one.species)
        counts = (str(found.infrared), str(found.raman), str(found.both))
        rows.append((style.plain(one.pair), str(one.count), *counts))
    header = tuple(map(style.plain, ("bond", "number", "infrared", "Raman", "both")))
    return Table(header, tuple(rows), "<>>>>")


def _stretch_notes(result: MoleculeAnalysis, style: Style) -> tuple[str, ...]:
    sums = [
        fill(style, f"{one.pair} bonds span {{species}}.", species=decomposition(one.species, style))
        for one in result.stretches
    ]
    sizes = {one.label: one.dimension for one in result.species}
    wanted = sum(one.count for one in result.stretches)
    own = sum(one.count * sizes[one.species] for one in result.vibrations if one.kind == "stretching")
    if own < wanted:
        words = f"The {wanted} bonds are not independent: only {own} stretches are, the others follow from them."
        sums.append(style.plain(words))
    return tuple(sums)


def _species(result: MoleculeAnalysis, style: Style) -> Table:
    linear = result.free.group.kind.is_linear
    shown = (
        one
        for one in result.species
        if not linear or one.activity.raman or one.internal or one.translations or one.rotations
    )
    rows = tuple(_species_row(one, style) for one in shown)
    header = ("species", "internal", "translation", "rotation", "dipole", "Raman tensor")
    return Table(tuple(map(style.plain, header)), rows, "<>>><<", (5,))


def _species_row(one: MoleculeSpecies, style: Style) -> tuple[str, ...]:
    counts = (str(number) if number else "" for number in (one.internal, one.translations, one.rotations))
    return (
        style.species(one.label), *counts, style.plain(", ".join(one.activity.polar)),
        style.plain(raman_words(one)),
    )  # fmt: skip


def raman_words(one: MoleculeSpecies) -> str:
    """Elements of the Raman tensor as character tables print them; "" if inactive."""
    if not one.activity.raman:
        return ""
    return _FIVE if one.dimension == 5 else ", ".join(raman_elements(one.tensor))


_FIVE = "(xx+yy−2zz, xx−yy, xy, xz, yz)"
"""The five partners of Hg and H: the whole tensor but its trace."""


def _atoms(result: MoleculeAnalysis, style: Style) -> Table:
    free = result.free
    off = ((free.measured - free.positions) ** 2).sum(axis=1) ** 0.5
    rows = tuple(
        (style.plain(label), *(_coordinate(value, style) for value in place), f"{gap:.3f}")
        for label, place, gap in zip(free.labels, free.measured, off, strict=True)
    )
    return Table(("", "x", "y", "z", style.plain("off")), rows, "<>>>>")


def _coordinate(value: float, style: Style) -> str:
    return style.plain(f"{round(value, 4) + 0.0:.4f}".replace("-", "−"))


# Two molecules


def comparison_blocks(result: MoleculeComparison, style: Style = TEXT) -> tuple[Block, ...]:
    """The report on two molecules side by side."""
    cautions = [style.plain(one.message) for one in result.cautions]
    for name, one in (("A", result.first), ("B", result.second)):
        cautions += [style.plain(f"{name}: {caution.message}") for caution in one.cautions]
    fields = [field for name, one in (("A", result.first), ("B", result.second)) for field in _who(name, one, style)]
    rows = (*result.bands, *result.stretches)
    return (
        Block("", tuple(fields), cautions=tuple(cautions)),
        Block("Numbers of bands, A and B", table=_compared(rows, style), notes=(style.plain(_COMPARED_NOTE),)),
        Block("Which bands tell them apart", notes=telling(result, style)),
    )


_COMPARED_NOTE = (
    "Distinct frequencies, degenerate ones counted once. Both: in infrared and Raman alike. Polarized: in the Raman "
    "spectrum of gas or liquid. Stretches of one kind of bond are counted by the bonds themselves."
)


def _who(name: str, one: MoleculeAnalysis, style: Style) -> list[tuple[str, str]]:
    where = one.molecule.source or one.molecule.name
    group = style.plain("Kh") if one.free.symmetry.is_atom else free_group_words(one.free, style)
    return [(name, " ".join(filter(None, (style.formula(one.formula), style.plain(where))))), (f"{name} is", group)]


def _compared(rows: tuple[ComparedBands, ...], style: Style) -> Table:
    header = ("", "infrared", "Raman", "both", "silent", "polarized")
    cells = tuple((style.plain(one.what), *_pairs(one)) for one in rows if one.first.total or one.second.total)
    return Table(tuple(map(style.plain, header)), cells, "<>>>>>", (0,))


def _pairs(one: ComparedBands) -> tuple[str, ...]:
    """`9 / 18` for each count, one number where they agree."""
    numbers = [(getattr(one.first, name), getattr(one.second, name)) for name in _COUNTS]
    return tuple(str(a) if a == b else f"{a} / {b}" for a, b in numbers)


def telling(result: MoleculeComparison, style: Style = TEXT) -> tuple[str, ...]:
    """Sentences on what tells the two molecules apart, the most telling first."""
    if not result.telling:
        words = "Symmetry allows both the same numbers of bands: only wavenumbers and intensities tell them apart."
        return (style.plain(words),)
    found = [_coincidence(result), *(_line(one) for one in result.telling)]
    return tuple(style.plain(sentence) for sentence in found if sentence)


def _coincidence(result: MoleculeComparison) -> str:
    first, second = result.first.counts.both, result.second.counts.both
    if bool(first) == bool(second):
        return ""
    names = ("A", "B") if second else ("B", "A")
    exclusive = (result.second if first else result.first).has_exclusion
    reason = f"{names[0]} has a centre of inversion: no" if exclusive else "No"
    number = max(first, second)
    shown = f"{number} vibrations show" if number > 1 else "one vibration shows"
    return (
        f"{reason} vibration of {names[0]} shows in both infrared and Raman; in {names[1]} {shown} in both. So a band "
        f"found at the same wavenumber in the two spectra speaks for {names[1]}, unless two bands coincide by accident."
    )


def _line(one: ComparedBands) -> str:
    return f"{one.what}: {_bands(one.first)} in A, {_bands(one.second)} in B."


def _bands(found: BandCounts) -> str:
    same = "all" if found.both == found.infrared == found.raman else str(found.both)
    if not found.total:
        return "none"
    if not found.raman:
        return f"{found.infrared} infrared, no Raman" if found.infrared else "none that shows"
    if not found.infrared:
        return f"{found.raman} Raman, no infrared"
    both = f" ({same} in both spectra)" if found.both else ""
    return f"{found.infrared} infrared and {found.raman} Raman{both}"
