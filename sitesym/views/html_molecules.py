"""What the page shows of molecules and complex ions: one block for each kind of unit, and where bands are expected."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from sitesym.views import molecule_sentences as words
from sitesym.views.labels import HTML
from sitesym.views.molecule_tables import BAND_HEADER, band_cells
from sitesym.views.templating import ready

if TYPE_CHECKING:
    from sitesym.analysis import Analysis
    from sitesym.fate import Fate
    from sitesym.known_units import KnownVibration
    from sitesym.molecular import MolecularAnalysis, MoleculeRow

Values = dict[str, Any]


@dataclass(frozen=True, slots=True)
class VibrationLine:
    """A row of the table of vibrations. `names` and `wavenumbers` are "" where they are not known."""

    names: str
    wavenumbers: str
    kind: str
    fate: Fate

    @property
    def infrared(self) -> dict[str, int]:
        """Components of one vibration in the crystal that infrared shows."""
        return {part.label: part.count for part in self.fate.crystal if part.activity.infrared}

    @property
    def raman(self) -> dict[str, int]:
        """Those that Raman shows."""
        return {part.label: part.count for part in self.fate.crystal if part.activity.raman}

    @property
    def silent(self) -> dict[str, int]:
        """Those that neither shows."""
        return {part.label: part.count for part in self.fate.crystal if part.activity.silent}


@dataclass(frozen=True, slots=True)
class Block:
    """One kind of unit. `anchor` is unique on the page; texts are ready HTML."""

    anchor: str
    title: str
    facts: tuple[tuple[str, str], ...]
    remarks: tuple[str, ...]
    diagram: str
    lines: tuple[VibrationLine, ...]
    sentences: tuple[str, ...]

    @property
    def known(self) -> bool:
        """Whether some wavenumber is known."""
        return any(line.wavenumbers for line in self.lines)


def molecules_part(analysis: Analysis) -> Values | None:
    """What the section on molecules shows; None when they were not looked for."""
    from sitesym.views.figures import diagram_key, line_spectrum

    molecular = analysis.molecular
    if molecular is None:
        return None
    return {
        "units": [ready(one) for one in words.units_words(analysis, HTML)],
        "notes": [ready(one) for one in _notes(analysis)],
        "reasons": _other_reasons(molecular),
        "blocks": [_block(analysis, row, number) for number, row in enumerate(molecular.molecules, start=1)],
        "key": diagram_key(),
        "spectrum": line_spectrum(analysis, "bands-drawing"),
        "spectrum_notes": [words.BAND_NOTE, words.without_wavenumber(molecular)],
        "bands": [[ready(cell) for cell in cells] for cells in band_cells(analysis, HTML)],
        "band_header": BAND_HEADER,
        "axes": analysis.axes,
    }


def origins_part(analysis: Analysis) -> Values | None:
    """Where the optic modes come from, species by species; None when molecules were not looked for."""
    molecular = analysis.molecular
    if molecular is None:
        return None
    names = [name for name in words.ORIGINS if any(getattr(one, name) for one in molecular.origins.values())]
    rows = [(row, [getattr(molecular.origins[row.label], name) for name in names]) for row in analysis.species]
    return {
        "names": names,
        "rows": rows,
        "sums": [sum(counts[column] for _, counts in rows) for column in range(len(names))],
        "note": ready(words.origin_note(HTML)),
    }


def _notes(analysis: Analysis) -> list[str]:
    molecular = analysis.molecular
    notes = [*words.net_sentences(analysis, HTML), *words.inequivalent_sentences(analysis, HTML)]
    if molecular is not None and not molecular.molecules:
        notes.append("There is no molecule or complex ion whose vibrations could be followed into the crystal.")
    return notes


def _other_reasons(molecular: MolecularAnalysis) -> list[tuple[str, str]]:
    """What is no molecule, with the reason why it ends where it does, as far as no molecule's own block says it."""
    told = {row.units.unit.reason for row in molecular.molecules}
    found: dict[str, str] = {}
    for one in (*molecular.nets, *molecular.unfollowed, *(atom.units for atom in molecular.atoms)):
        if one.unit.reason not in told and not any(one.unit.reason in longer for longer in told):
            label = one.unit.labels[0] if one.unit.labels and len(one.unit.atoms) == 1 else ""
            named = f" <small>{HTML.plain(label)}</small>" if label not in ("", one.unit.name) else ""
            found.setdefault(one.unit.reason, HTML.formula(one.unit.name) + named)
    return [(ready(name), reason) for reason, name in found.items()]


def _block(analysis: Analysis, row: MoleculeRow, number: int) -> Block:
    from sitesym.views.figures import correlation_diagram

    anchor = f"unit-{number}"
    remarks = (words.tolerance_remark(row, analysis, HTML), words.average_sentence(row, HTML), HTML.plain(row.remark))
    order = _reading_order(row)
    sentences = [words.vibration_sentence(analysis, row, index, HTML) for index in order]
    sentences.append(words.exclusion_sentence(analysis, row, HTML))
    return Block(
        anchor,
        ready(words.title(row, analysis, HTML)),
        tuple((name, ready(text)) for name, text in _facts(analysis, row) if text),
        tuple(ready(one) for one in remarks if one),
        correlation_diagram(analysis, row, f"{anchor}-diagram"),
        _lines(row, order),
        tuple(ready(one) for one in sentences if one),
    )


def _facts(analysis: Analysis, row: MoleculeRow) -> tuple[tuple[str, str], ...]:
    unit = words.unit_word(row)
    return (
        ("Primitive cell", HTML.plain(f"{row.units.count} such {unit}{'s' if row.units.count > 1 else ''}")),
        ("Free group", words.free_group_words(row.free, HTML)),
        ("Site group", words.site_words(row, HTML)),
        ("Its axes", words.orientation_words(row, HTML)),
        ("Bonds", HTML.plain(row.units.unit.reason)),
        ("Wavenumbers", HTML.plain(_source(row))),
    )


def _lines(row: MoleculeRow, order: Sequence[int]) -> tuple[VibrationLine, ...]:
    kinds = [one.kind for one in row.correlation.vibrations]
    return tuple(VibrationLine(ready(_names(row, k)), _known(row.names[k]), kinds[k], row.fates[k]) for k in order)


def _names(row: MoleculeRow, index: int) -> str:
    """The usual names; in those that begin with a species, as `Hg(1)`, it is set as one."""
    species = row.fates[index].free.label
    set_names = [
        HTML.species(species) + HTML.plain(name[len(species) :]) if name.startswith(species) else HTML.plain(name)
        for name in words.names_words(row, index).split(", ")
    ]
    return ", ".join(set_names)


def _known(names: Sequence[KnownVibration]) -> str:
    """`1063` or `993, 3073`: the wavenumbers that are known."""
    return ", ".join(f"{one.wavenumber:g}" for one in names if one.wavenumber is not None)


def _reading_order(row: MoleculeRow) -> list[int]:
    """The rows of vibrations by the numbers of their names where all have one, else as they are."""
    places = range(len(row.fates))
    numbers = [re.match(r"ν(\d+)", words.names_words(row, k)) for k in places]
    return sorted(places, key=lambda k: int(one[1]) if all(numbers) and (one := numbers[k]) else k)


def _source(row: MoleculeRow) -> str:
    """Where the wavenumbers come from; "" where there are none."""
    given = any(one.given for names in row.names for one in names)
    if not row.source:
        return "yours, where printed" if given else ""
    free = f"of the free {words.unit_word(row)}, from {row.source}"
    return f"yours where given with 'at'; others {free}" if given else free
