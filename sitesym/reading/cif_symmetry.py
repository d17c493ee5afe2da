"""The symmetry of a CIF: its operations first, then the Hall symbol, the Hermann-Mauguin symbol, the number.

Where these contradict each other or the cell, each is tried on the atoms, and the one that gives the content the
formula asks for, without atoms too close, is taken; the contradiction is always said.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from sitesym.errors import NotAStructureError, ReadError, SitesymError
from sitesym.reading.cif_document import Block
from sitesym.reading.cif_names import Named, declared_symmetry, named_groups, stated_symbol, title
from sitesym.reading.cif_operations import complete, listed_operations
from sitesym.reading.cif_symbols import fits_cell, operations_of, setting_of_operations, settings_of_number
from sitesym.reading.contacts import close_contacts, crowding
from sitesym.reading.expectation import Expectation
from sitesym.reading.listing import Listing, Operations, identity
from sitesym.reading.merging import assemble
from sitesym.structure import DeclaredSymmetry, OpenQuestion, Structure

if TYPE_CHECKING:
    import gemmi


@dataclass(frozen=True, eq=False, slots=True)
class Symmetry:
    """The operations to apply, what the file declares, and what is doubtful."""

    operations: Operations
    declared: DeclaredSymmetry
    questions: tuple[OpenQuestion, ...]


@dataclass(frozen=True, eq=False, slots=True)
class _Case:
    """The atoms and the formula by which a choice of operations is judged, and what was said about it so far."""

    listing: Listing
    expectation: Expectation
    questions: list[OpenQuestion] = field(default_factory=list)

    def say(self, code: str, message: str) -> None:
        self.questions.append(OpenQuestion(code, message))

    def fits(self, operations: Operations) -> bool:
        return fits_cell(operations, self.listing.lattice)

    def candidates(self, named: Named) -> list[gemmi.SpaceGroup]:
        """The named settings that fit the cell; if none does, the other settings of the same type that do."""
        for settings in (named.settings, settings_of_number(named.number)):
            if fitting := [setting for setting in settings if self.fits(operations_of(setting))]:
                return fitting
        return list(named.settings)

    def fault(self, operations: Operations) -> tuple[float, int, int]:
        """How badly the content goes wrong with these operations.

        Misfit of the composition in fiftieths, number of atoms too close, and the shortest bond below 0.95 of the
        usual length in twentieths.
        """
        lattice = self.listing.lattice
        try:
            content = assemble(self.listing, operations)
            composition = Structure(lattice, content.fractional, content.sites).composition
        except SitesymError:
            return (float("inf"), 0, 0)
        contacts = close_contacts(lattice, content.fractional, content.sites)
        strain = max(0.0, crowding(lattice, content.fractional, content.sites) - 0.05)
        return (round(self.expectation.misfit(composition) * 50), len(contacts), round(strain * 20))

    def best(self, settings: list[gemmi.SpaceGroup]) -> gemmi.SpaceGroup:
        if len(settings) == 1:
            return settings[0]
        return min(settings, key=lambda setting: self.fault(operations_of(setting)))


def find_symmetry(block: Block, listing: Listing, expectation: Expectation, whole_cell: bool = False) -> Symmetry:
    """Decide on the operations.

    Raises NotAStructureError when the file says nothing of symmetry and nobody vouches for the whole cell.
    """
    case = _Case(listing, expectation)
    names = named_groups(block)
    listed = listed_operations(block)
    if listed is not None:
        operations = _from_list(case, listed, names)
    elif names:
        operations = operations_of(_from_name(case, names[0]))
    elif whole_cell:
        operations = identity()
        case.say("whole_cell", "The file says nothing of symmetry; its atoms were taken as the whole cell.")
    else:
        raise _no_symmetry(block)
    if whole_cell and (listed is not None or names):
        case.say(
            "whole_cell_ignored", "The file states its symmetry, so that was used in spite of the whole-cell option."
        )
    _say_names_apart(case, names)
    if not case.fits(operations):
        message = (
            "The cell lengths and angles have not the shape that the symmetry requires: one or the other is wrong."
        )
        case.say("cell_clash", message)
    return Symmetry(operations, declared_symmetry(block, names, operations), tuple(case.questions))


def _no_symmetry(block: Block) -> NotAStructureError:
    symbol = stated_symbol(block)
    what = f"gives a space group {symbol!r} that is not known" if symbol else "says nothing of its symmetry"
    return NotAStructureError(
        f"The file {what}, and lists no operations.",
        "Add the space group, or say with --whole-cell that it lists every atom of the cell.",
    )


def _from_name(case: _Case, named: Named) -> gemmi.SpaceGroup:
    """The setting that a symbol or number means, with the reason where it leaves a choice."""
    candidates = case.candidates(named)
    faults = [case.fault(operations_of(setting)) for setting in candidates] if len(candidates) > 1 else [(0.0, 0, 0)]
    setting = candidates[faults.index(min(faults))]
    message = f"The file lists no symmetry operations; those of {title(setting)} were taken from its {named.word}"
    if named.text != str(named.number):
        message += f" {named.text!r}"
    if len(candidates) > 1:
        others = ", ".join(other.xhm() for other in candidates if other.xhm() != setting.xhm())
        alone = faults.count(min(faults)) == 1
        reason = "only this choice gives a sensible content" if alone else "nothing tells which, so compare a distance"
        message += f", which leaves the origin or axes open (also {others}): {reason}"
    case.say("symmetry_from_symbol", message + ".")
    _say_other_setting(case, named, setting)
    return setting


def _from_list(case: _Case, listed: Operations, names: tuple[Named, ...]) -> Operations:
    """The listed operations completed to a group, unless they are faulty and the file's symbol serves better."""
    try:
        group = complete(listed)
    except ReadError:
        if not names:
            raise
        setting = case.best(case.candidates(names[0]))
        case.say("symmetry_not_closed", f"The operations listed form no group; those of {title(setting)} were used.")
        return operations_of(setting)
    closed, named = len(group) == len(listed), _counterpart(case, group, names)
    rival = _rival(case, group, closed, named) if named is not None else None
    if not closed:
        used = "these were used" if rival is None else f"{title(rival)}, which the file names, was used instead"
        message = f"The file lists {len(listed)} operations, which form no group; completed they are {len(group)}, "
        case.say("symmetry_not_closed", f"{message}but {used}." if rival else f"{message}and {used}.")
    if named is not None and (closed or rival is None):
        _say_clash(case, group, named, rival)
    if named is not None and rival is not None:
        _say_other_setting(case, named, rival)
    return group if rival is None else operations_of(rival)


def _counterpart(case: _Case, group: Operations, names: tuple[Named, ...]) -> Named | None:
    """The name to hold against the listed group: the file's first; without one, the group's own if it fits no cell."""
    if names:
        return names[0]
    setting = setting_of_operations(group)
    return Named("list of operations", setting.xhm(), (setting,)) if setting and not case.fits(group) else None


def _is_named(group: Operations, named: Named) -> bool:
    return any(operations_of(setting).keys == group.keys for setting in named.settings)


def _rival(case: _Case, group: Operations, closed: bool, named: Named) -> gemmi.SpaceGroup | None:
    """The named setting when it is to be preferred to the listed group.

    It is when it gives a better content; when it gives an equal one, only if the list is doubtful by itself.
    """
    setting, fits = setting_of_operations(group), case.fits(group)
    same_type = _is_named(group, named) or (setting is not None and setting.number == named.number)
    if closed and fits and same_type:
        return None
    rivals = [other for other in case.candidates(named) if operations_of(other).keys != group.keys]
    if not rivals:
        return None
    best = case.best(rivals)
    doubtful = not closed or not fits or len(group) == 1
    listed_fault, named_fault = case.fault(group), case.fault(operations_of(best))
    return best if named_fault < listed_fault or (doubtful and named_fault == listed_fault) else None


def _say_clash(case: _Case, group: Operations, named: Named, rival: gemmi.SpaceGroup | None) -> None:
    """The list and the name differ."""
    if _is_named(group, named):
        return
    setting, order = setting_of_operations(group), len(operations_of(named.settings[0]))
    means = f"its {named.word} {named.text!r} means {title(named.settings[0])}"
    used = "the operations were used" if rival is None else f"{rival.xhm()} was used"
    if setting is not None:
        message = f"The operations in the file are those of {title(setting)}, {means}; {used}."
    elif rival is not None or order != len(group):
        message = f"The {len(group)} operations in the file match no tabulated setting, {means} with {order}; {used}."
    else:
        message = f"The operations match none of the tabulated settings, {means}; they were used as they stand."
        case.say("setting_unlisted", message)
        return
    case.say("symmetry_clash", message)


def _say_other_setting(case: _Case, named: Named, used: gemmi.SpaceGroup) -> None:
    if used.xhm() not in {setting.xhm() for setting in named.settings}:
        case.say(
            "symmetry_clash",
            f"The cell has not the shape that {title(named.settings[0])} asks for; {title(used)}, another setting "
            "of the same group, fits it and was used.",
        )


def _say_names_apart(case: _Case, names: tuple[Named, ...]) -> None:
    """The names of the file differ among themselves."""
    for other in names[1:]:
        if other.number != names[0].number:
            case.say(
                "symmetry_clash",
                f"The file contradicts itself: its {names[0].word} {names[0].text!r} is {title(names[0].settings[0])}, "
                f"its {other.word} {other.text!r} is {title(other.settings[0])}.",
            )
