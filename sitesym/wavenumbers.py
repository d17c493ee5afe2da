"""The user's own wavenumbers of free or measured units, from a file.

They take the place of the tabulated ones, and say where bands are expected. A TOML file holds one entry a vibration:

    [[vibration]]
    unit = "CO3"             # formula of the unit, in any order of the elements
    name = "nu3"             # usual name: nu3, v3 or ν3
    wavenumber = 1407        # in cm-1

    [[vibration]]
    unit = "H2O"
    atom = "O4"              # only the units that hold this atom; left out, all units of the formula
    species = "A1"           # species of the free molecule, as the report prints it
    kind = "bending"         # stretching, bending, out-of-plane, torsion, skeletal; may be left out if clear
    wavenumber = 1640

A CSV file has the same words in its first line, in any order, those that are not needed left out, and one vibration a
line:

    unit,name,species,kind,wavenumber
    CO3,nu3,,,1407
    H2O,,A1,bending,1640

Where several vibrations share species and kind, give as many lines as there are vibrations, or use names. `name` beside
`species` names a vibration that has no usual name.
"""

from __future__ import annotations

import csv
import io
import os
import re
import unicodedata
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

from sitesym.errors import ReadError, UsageError
from sitesym.known_units import KnownVibration, composition_of
from sitesym.vibration_names import Names, VibrationRow

FIELDS = ("unit", "name", "species", "kind", "atom", "wavenumber")
HIGHEST = 10000.0
"""cm⁻¹. No fundamental lies so high (H2: 4161)."""

_GREEK = {"Σ": "Sigma", "Π": "Pi", "Δ": "Delta", "Φ": "Phi"}


@dataclass(frozen=True, slots=True)
class Assignment:
    """One line of the file: a vibration of a unit, by name or by species and kind ("" where left out), in cm⁻¹."""

    place: str
    unit: str
    name: str
    species: str
    kind: str
    atom: str
    wavenumber: float

    @property
    def what(self) -> str:
        """The vibration in the user's words."""
        return self.name or " ".join(filter(None, (self.species, self.kind)))


@dataclass(frozen=True, slots=True)
class Wavenumbers:
    """The whole file; `source` is its name."""

    source: str
    entries: tuple[Assignment, ...]


@dataclass(frozen=True, slots=True)
class Target:
    """A unit that wavenumbers may be meant for: formula, labels of its atoms, its vibrations and their names."""

    formula: str
    labels: tuple[str, ...]
    vibrations: Sequence[VibrationRow]
    names: Names


# Reading


def read_wavenumbers(path: str | os.PathLike[str]) -> Wavenumbers:
    """Read a TOML or CSV file, told apart by its suffix or else by its content.

    Raises ReadError where the file cannot be read or a line makes no sense.
    """
    from sitesym.reading.source import open_source

    given = open_source(path)
    if given.is_binary:
        raise ReadError(f"{given.name} is no text file.", "Give wavenumbers as TOML or CSV.")
    text = given.text
    is_toml = given.name.lower().endswith(".toml") or (
        not given.name.lower().endswith(".csv") and re.search(r"(?m)^\s*\[\[vibration\]\]", text) is not None
    )
    rows = _toml_rows(text, given.name) if is_toml else _csv_rows(text, given.name)
    entries = tuple(_assignment(row, f"{given.name}, {place}") for place, row in rows)
    if not entries:
        raise ReadError(
            f"{given.name} gives no wavenumbers.",
            "Below the line unit,name,wavenumber write for example: CO3,nu3,1407.",
        )
    return Wavenumbers(given.name, entries)


def _toml_rows(text: str, source: str) -> Iterator[tuple[str, Mapping[str, Any]]]:
    import tomllib

    try:
        document = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise ReadError(f"{source} is no valid TOML: {error}.", "Put text values in quotation marks.") from None
    rows = document.get("vibration")
    if not isinstance(rows, list) or not all(isinstance(row, dict) for row in rows):
        raise ReadError(f"{source} has no [[vibration]] entries.", "Begin each vibration with a line [[vibration]].")
    for number, row in enumerate(rows, start=1):
        yield f"entry {number}", row


def _csv_rows(text: str, source: str) -> Iterator[tuple[str, Mapping[str, Any]]]:
    lines = [line for line in text.lstrip("\ufeff").splitlines() if not line.lstrip().startswith("#")]
    sample = next((line for line in lines if line.strip()), "")
    separator = next((one for one in (";", "\t") if one in sample), ",")
    reader = csv.DictReader(io.StringIO("\n".join(lines)), delimiter=separator, skipinitialspace=True)
    header = [(name or "").strip().lower() for name in reader.fieldnames or ()]
    if "unit" not in header or "wavenumber" not in header:
        raise ReadError(
            f"{source} is no table of wavenumbers: its first line has no columns 'unit' and 'wavenumber'.",
            "Begin it with: unit,name,species,kind,wavenumber.",
        )
    reader.fieldnames = header
    for row in reader:
        if any((value or "").strip() for value in row.values() if not isinstance(value, list)):
            yield f"line {reader.line_num}", {name: value for name, value in row.items() if name}


def _assignment(row: Mapping[str, Any], place: str) -> Assignment:
    unknown = sorted(str(name) for name in row if name not in FIELDS)
    if unknown:
        raise ReadError(f"{place} has an unknown field '{unknown[0]}'.", f"The fields are {', '.join(FIELDS)}.")
    words = {name: str(row.get(name) if row.get(name) is not None else "").strip() for name in FIELDS}
    if not re.fullmatch(r"(?:[A-Z][a-z]?\d*)+", words["unit"]):
        raise ReadError(f"{place}: '{words['unit']}' is no formula of a unit.", "Write it as CO3 or H2O.")
    if not words["name"] and not words["species"]:
        raise ReadError(
            f"{place} says for no vibration of {words['unit']} what it is.", "Give its name or its species."
        )
    return Assignment(
        place, words["unit"], usual_name(words["name"]), ascii_species(words["species"]), words["kind"].lower(),
        words["atom"], _value(words["wavenumber"], place),
    )  # fmt: skip


def _value(word: str, place: str) -> float:
    try:
        value = float(word)
    except ValueError:
        value = float("nan")
    if not 0 < value < HIGHEST:
        raise ReadError(f"{place}: '{word}' is no wavenumber.", f"Give a number between 0 and {HIGHEST:g} cm⁻¹.")
    return value


def usual_name(word: str) -> str:
    """`nu3`, `v3` and `ν₃` alike as `ν3`; other names as they are."""
    plain = unicodedata.normalize("NFKC", word)
    return re.sub(r"^(?:nu|v|ν)_?(?=\d|$|[a-z]?\d)", "ν", plain)


def ascii_species(word: str) -> str:
    """`E′`, `A₂″` and `Σg⁺` as `E'`, `A2''` and `Sigma_g+`."""
    plain = unicodedata.normalize("NFKC", word.replace("″", "''").replace("′", "'").replace('"', "''"))
    plain = plain.replace("′′", "''").replace("′", "'").replace("−", "-")
    for letter, name in _GREEK.items():
        plain = re.sub(f"^{letter}", name, plain)
    return re.sub(r"^(Sigma|Pi|Delta|Phi)_?([gu])", r"\1_\2", plain)


# Use


def assigned(table: Wavenumbers, targets: Sequence[Target]) -> tuple[Names, ...]:
    """The names of each target with the user's wavenumbers in the place of the tabulated ones.

    An entry goes to every unit that it fits. Raises UsageError for one that fits none, or does not say clearly enough
    which vibration it means.
    """
    result = [target.names for target in targets]
    for entries in _grouped(table.entries):
        problem = UsageError(*_no_unit(entries[0], targets))
        fits = False
        for number, target in enumerate(targets):
            if _is_meant(entries[0], target):
                try:
                    result[number] = _changed(entries, replace(target, names=result[number]))
                    fits = True
                except UsageError as error:
                    problem = error
        if not fits:
            raise problem
    return tuple(result)


def _grouped(entries: Sequence[Assignment]) -> list[list[Assignment]]:
    """Entries that speak of the same vibrations together, for several may share species and kind."""
    groups: dict[tuple[str, ...], list[Assignment]] = {}
    for one in entries:
        key = (one.unit, one.atom, one.name) if one.name else (one.unit, one.atom, "", one.species, one.kind)
        groups.setdefault(key, []).append(one)
    twice = next((group for group in groups.values() if group[0].name and len(group) > 1), None)
    if twice:
        raise UsageError(
            f"{twice[1].place} gives {twice[1].what} of {twice[1].unit} once more.", "Keep one of the two."
        )
    return list(groups.values())


def _is_meant(entry: Assignment, target: Target) -> bool:
    same = composition_of(entry.unit) == composition_of(target.formula)
    return same and (not entry.atom or entry.atom in target.labels)


def _no_unit(entry: Assignment, targets: Sequence[Target]) -> tuple[str, str]:
    at = f" with an atom {entry.atom}" if entry.atom else ""
    units = ", ".join(dict.fromkeys(target.formula for target in targets))
    mend = f"The units are {units}." if units else "No molecule or complex ion was found."
    return f"{entry.place}: there is no unit {entry.unit}{at}.", mend


def _changed(entries: list[Assignment], target: Target) -> Names:
    first = entries[0]
    for row, names in enumerate(target.names):
        for place, known in enumerate(names):
            if first.name and known.name == first.name:
                return _with(target.names, row, place, replace(known, wavenumber=first.wavenumber, given=True))
    if not first.species:
        raise UsageError(*_no_name(first, target))
    row = _row(first, target)
    return _filled(entries, target, row)


def _with(names: Names, row: int, place: int, known: KnownVibration) -> Names:
    changed = (*names[row][:place], known, *names[row][place + 1 :])
    return (*names[:row], changed, *names[row + 1 :])


def _no_name(entry: Assignment, target: Target) -> tuple[str, str]:
    known = ", ".join(one.name for names in target.names for one in names if one.name)
    mend = f"Its vibrations are called {known}." if known else "Its vibrations have no usual names: give the species."
    return f"{entry.place}: {entry.unit} has no vibration called {entry.name}.", mend


def _row(entry: Assignment, target: Target) -> int:
    """The row of vibrations of the entry's species and kind."""
    of_species = [k for k, one in enumerate(target.vibrations) if one.species == entry.species]
    rows = [k for k in of_species if entry.kind in ("", target.vibrations[k].kind)]
    if len(rows) == 1:
        return rows[0]
    listed = ", ".join(f"{one.species} {one.kind}" for one in target.vibrations)
    what = "is not clear: there are several kinds" if rows else "does not occur"
    raise UsageError(f"{entry.place}: {entry.what} of {entry.unit} {what}.", f"Its vibrations are {listed}.")


def _filled(entries: list[Assignment], target: Target, row: int) -> Names:
    """The row with the wavenumbers of the entries: all of it at once, or one more where there is room."""
    vibration, known = target.vibrations[row], target.names[row]
    named = bool(entries[0].name)
    room = vibration.count - len(known)
    places = [] if named else [k for k, one in enumerate(known) if not one.given]
    if not places and not room:
        places = list(range(len(known)))
    if len(entries) > len(places) + room or (places and len(entries) < len(places) + room):
        raise UsageError(
            f"{entries[0].place}: {len(entries)} given for the {vibration.count} {vibration.species} {vibration.kind} "
            f"vibrations of {target.formula}.",
            "Give one wavenumber for each, or use their names.",
        )
    names = target.names
    for number, entry in enumerate(entries):
        if number < len(places):
            old = known[places[number]]
            names = _with(names, row, places[number], replace(old, wavenumber=entry.wavenumber, given=True))
        else:
            new = KnownVibration(entry.name, vibration.species, vibration.kind, entry.wavenumber, given=True)
            names = _with(names, row, len(names[row]), new)
    return names
