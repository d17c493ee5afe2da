"""From the images of listed atoms to sites: duplicates are dropped, elements that share a position become one site."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from sitesym.errors import NotAStructureError
from sitesym.reading.expansion import SAME_ATOM, Orbits, expand
from sitesym.reading.listing import Listing, Operations
from sitesym.reading.neighbours import near_pairs
from sitesym.reading.text import counted, printable
from sitesym.structure import FULL, Floats, Occupant, OpenQuestion, Site

SAME_POINT = 0.02
"""Partly occupied positions of one element closer than this (Å) are one position; farther apart they are two. So are
any atoms of a file that lists the whole cell: there no rounding on special positions can part them."""

ROUNDING = 0.01
"""Sums of occupancies may exceed 1 by this much through rounding."""


@dataclass(frozen=True, eq=False, slots=True)
class Content:
    """The content of one cell: (n, 3) fractional coordinates, n sites, and what was found in making them.

    `multiplicities` tells for every listed atom how many images it has in the cell.
    """

    fractional: Floats
    sites: tuple[Site, ...]
    questions: tuple[OpenQuestion, ...]
    multiplicities: tuple[int, ...]


@dataclass(slots=True)
class _Place:
    """A listed atom that heads a position, and what else sits there."""

    row: int
    occupants: dict[str, float]
    group: str
    rows: list[int] = field(default_factory=list)

    @property
    def occupancy(self) -> float:
        return sum(self.occupants.values())

    @property
    def element(self) -> str:
        """The first, for a listed atom the only occupant."""
        return next(iter(self.occupants))


def assemble(listing: Listing, operations: Operations) -> Content:
    """Expand the listing and merge what coincides.

    Raises NotAStructureError when two unlike atoms, both fully there, lie on one point.
    """
    orbits = expand(listing, operations)
    contacts = _contacts(listing, orbits, SAME_ATOM if len(operations) > 1 else SAME_POINT)
    merger = _Merger(listing, orbits, _lists_copies(contacts, listing))
    for row in range(len(listing)):
        merger.place(row, contacts.get(row, {}))
    chosen = np.isin(orbits.owners, list(merger.places))
    made = {row: _site(place, listing) for row, place in merger.places.items()}
    sites = tuple(made[int(row)] for row in orbits.owners[chosen])
    questions = (
        *_duplicate_question(merger.duplicates, listing, len(operations) > 1),
        *_addition_question(merger.additions, listing),
        *_excess_question(list(merger.places.values()), listing),
    )
    return Content(orbits.points[chosen], sites, questions, tuple(orbits.counts.tolist()))


def _contacts(listing: Listing, orbits: Orbits, cutoff: float) -> dict[int, dict[int, float]]:
    """For every listed atom the earlier listed atoms whose images lie on its own, and how far off (Å)."""
    pairs = near_pairs(listing.lattice, orbits.points, cutoff)
    found: dict[int, dict[int, float]] = {}
    owners = orbits.owners
    for one, two, distance in zip(owners[pairs.first], owners[pairs.second], pairs.distances, strict=True):
        early, late = sorted((int(one), int(two)))
        if early != late:
            known = found.setdefault(late, {})
            known[early] = min(known.get(early, cutoff), float(distance))
    return found


def _lists_copies(contacts: dict[int, dict[int, float]], listing: Listing) -> bool:
    """The file lists symmetry copies as atoms of their own: some full atom falls on another of its element."""
    full = listing.occupancies >= FULL
    return any(
        full[late] and full[early] and listing.elements[late] == listing.elements[early]
        for late, others in contacts.items()
        for early in others
    )


@dataclass(slots=True)
class _Merger:
    """The places found so far, by the row that heads them, and the (later, earlier) rows that were joined.

    `copies_listed` tells that the file lists symmetry copies as atoms of their own.
    """

    listing: Listing
    orbits: Orbits
    copies_listed: bool
    places: dict[int, _Place] = field(default_factory=dict)
    duplicates: list[tuple[int, int]] = field(default_factory=list)
    additions: list[tuple[int, int]] = field(default_factory=list)

    def place(self, row: int, contacts: dict[int, float]) -> None:
        """Join a listed atom to the nearest place that takes it in, or make it a place of its own."""
        occupancy = float(self.orbits.occupancies[row])
        here = _Place(row, {self.listing.elements[row]: occupancy}, self.listing.groups[row], [row])
        for head, distance in sorted(contacts.items(), key=lambda item: item[1]):
            if head in self.places and self._joined(here, self.places[head], distance):
                return
        self.places[row] = here

    def _joined(self, here: _Place, place: _Place, distance: float) -> bool:
        """Try to join; raises when that is impossible and the atoms cannot stand apart either."""
        if self._is_duplicate(here, place, distance):
            self.duplicates.append((here.row, place.row))
            return True
        same_size = self.orbits.counts[here.row] == self.orbits.counts[place.row]
        if not same_size or not _shares(here, place, distance):
            self._refuse_collision(here, place)
            return False
        if here.element in place.occupants:
            self.additions.append((here.row, place.row))
        place.occupants[here.element] = place.occupants.get(here.element, 0.0) + here.occupancy
        place.rows.append(here.row)
        place.group = place.group if place.group == here.group else ""
        return True

    def _is_duplicate(self, here: _Place, place: _Place, distance: float) -> bool:
        """The same atom listed again: the same element and disorder group, not two parts of one position.

        Partly occupied atoms that fall on each other add up, as a refinement counts them, unless that makes more than
        one atom, the name is the same, or the file lists symmetry copies of its full atoms too.
        """
        if here.element not in place.occupants or not _same_group(here, place):
            return False
        if min(here.occupancy, place.occupants[here.element]) >= FULL:
            return True
        too_much = place.occupancy + here.occupancy > 1 + ROUNDING
        copy = self.copies_listed and not self._listed_together(here, place)
        again = too_much or copy or self._same_name(here, place)
        return distance < SAME_POINT and again and self._alike(here, place)

    def _alike(self, here: _Place, place: _Place) -> bool:
        """Some atom of the place has the same element and occupancy."""
        elements, occupancies = self.listing.elements, self.listing.occupancies
        return any(
            elements[row] == here.element and abs(occupancies[row] - occupancies[here.row]) < ROUNDING
            for row in place.rows
        )

    def _listed_together(self, here: _Place, place: _Place) -> bool:
        """The file gives both the same coordinates, before any symmetry operation."""
        difference = self.listing.fractional[place.rows] - self.listing.fractional[here.row]
        return bool((np.linalg.norm(difference @ self.listing.lattice, axis=1) < SAME_POINT).any())

    def _same_name(self, here: _Place, place: _Place) -> bool:
        labels, types = self.listing.labels, self.listing.types
        name = labels[here.row], types[here.row]
        return any(name == (labels[row], types[row]) for row in place.rows)

    def _refuse_collision(self, here: _Place, place: _Place) -> None:
        """Unlike atoms, both fully there, on one point."""
        both_full = min(here.occupancy, place.occupancy) >= FULL
        if not both_full or not _same_group(here, place) or set(here.occupants) == set(place.occupants):
            return
        labels, elements = self.listing.labels, self.listing.elements
        one, two = (f"{printable(labels[row], 40)} ({elements[row]})" for row in (place.row, here.row))
        where = ", ".join(f"{value:.4f}" for value in self.listing.fractional[here.row])
        raise NotAStructureError(
            f"{one} and {two} are both fully there and lie on one point, near {where}.",
            "Correct the coordinates, or give the occupancies if the site is mixed.",
        )


def _shares(here: _Place, place: _Place, distance: float) -> bool:
    """Part of one position: room is left there, or the file puts both on the very same point."""
    fits = here.occupancy + place.occupancy <= 1 + 5 * ROUNDING
    if here.element in place.occupants or not _same_group(here, place):
        return distance < SAME_POINT and fits
    both_full = min(here.occupancy, place.occupancy) >= FULL
    return fits or (distance < SAME_POINT and not both_full)


def _same_group(here: _Place, place: _Place) -> bool:
    return here.group == place.group or "" in (here.group, place.group)


def _site(place: _Place, listing: Listing) -> Site:
    occupants = tuple(Occupant(element, min(value, 1.0)) for element, value in place.occupants.items())
    return Site(listing.labels[place.row], occupants, place.group)


def _duplicate_question(duplicates: list[tuple[int, int]], listing: Listing, moved: bool) -> tuple[OpenQuestion, ...]:
    if not duplicates:
        return ()
    late, early = (printable(listing.labels[row], 40) for row in duplicates[0])
    return (
        OpenQuestion(
            "duplicates_merged",
            f"{len(duplicates)} of the {counted(len(listing), 'listed atom')} "
            f"{'repeats' if len(duplicates) == 1 else 'repeat'} others listed already"
            f"{', symmetry copies included' if moved else ''} (such as {late}, of {early}); each was counted once.",
        ),
    )


def _addition_question(additions: list[tuple[int, int]], listing: Listing) -> tuple[OpenQuestion, ...]:
    if not additions:
        return ()
    late, early = (printable(listing.labels[row], 40) for row in additions[0])
    return (
        OpenQuestion(
            "occupancies_added",
            f"{counted(len(additions), 'partial atom')} {'shares' if len(additions) == 1 else 'share'} the place "
            f"of another of the same element (such as {late}, with {early}): the occupancies were added up.",
        ),
    )


def _excess_question(places: list[_Place], listing: Listing) -> tuple[OpenQuestion, ...]:
    over = [place for place in places if place.occupancy > 1 + ROUNDING]
    if not over:
        return ()
    worst = max(over, key=lambda place: place.occupancy)
    return (
        OpenQuestion(
            "occupancy_over_one",
            f"The occupancies add up to more than 1 on {counted(len(over), 'site')}, most on "
            f"{printable(listing.labels[worst.row], 40)} ({worst.occupancy:.3g}).",
        ),
    )
