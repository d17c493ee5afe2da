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


def assemble(listing: Listing, operations: Operations) -> Content:
    """Expand the listing and merge what coincides.

    Raises NotAStructureError when two unlike atoms, both fully there, lie on one point.
    """
    orbits = expand(listing, operations)
    contacts = _contacts(listing, orbits, SAME_ATOM if len(operations) > 1 else SAME_POINT)
    copies_listed = _lists_copies(contacts, listing)
    places: dict[int, _Place] = {}
    duplicates: list[tuple[int, int]] = []
    for row in range(len(listing)):
        occupant = {listing.elements[row]: float(orbits.occupancies[row])}
        here = _Place(row, occupant, listing.groups[row], [row])
        host = _host(here, places, contacts.get(row, {}), listing, orbits, copies_listed, duplicates)
        if host is None:
            places[row] = here
    chosen = np.isin(orbits.owners, list(places))
    made = {row: _site(place, listing) for row, place in places.items()}
    sites = tuple(made[int(row)] for row in orbits.owners[chosen])
    repeated = _duplicate_question(duplicates, listing, len(operations) > 1)
    questions = repeated + _excess_question(list(places.values()), listing)
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


def _host(
    here: _Place,
    places: dict[int, _Place],
    contacts: dict[int, float],
    listing: Listing,
    orbits: Orbits,
    copies_listed: bool,
    duplicates: list[tuple[int, int]],
) -> _Place | None:
    """The place that takes this atom in, None when it stands by itself."""
    for row, distance in sorted(contacts.items(), key=lambda item: item[1]):
        place = places.get(row)
        if place is None:
            continue
        if _is_duplicate(here, place, distance, copies_listed, listing):
            duplicates.append((here.row, row))
            return place
        same_size = orbits.counts[here.row] == orbits.counts[row]
        if same_size and _shares(here, place, distance):
            (element, occupancy), *_ = here.occupants.items()
            place.occupants[element] = place.occupants.get(element, 0.0) + occupancy
            place.rows.append(here.row)
            place.group = place.group if place.group == here.group else ""
            return place
        _refuse_collision(here, place, listing)
    return None


def _lists_copies(contacts: dict[int, dict[int, float]], listing: Listing) -> bool:
    """The file lists symmetry copies as atoms of their own: some full atom falls on another of its element."""
    full = listing.occupancies >= FULL
    return any(
        full[late] and full[early] and listing.elements[late] == listing.elements[early]
        for late, others in contacts.items()
        for early in others
    )


def _is_duplicate(here: _Place, place: _Place, distance: float, copies_listed: bool, listing: Listing) -> bool:
    """The same atom listed again: the same element and disorder group, not two parts of one position.

    Partly occupied atoms that fall on each other add up, as a refinement counts them, unless that makes more than
    one atom, the name is the same, or the file lists symmetry copies of its full atoms too.
    """
    (element, occupancy), *_ = here.occupants.items()
    if element not in place.occupants or not _same_group(here, place):
        return False
    if min(occupancy, place.occupants[element]) >= FULL:
        return True
    alike = any(
        listing.elements[row] == element and abs(listing.occupancies[row] - listing.occupancies[here.row]) < ROUNDING
        for row in place.rows
    )
    too_much = place.occupancy + occupancy > 1 + ROUNDING
    copy = copies_listed and not _listed_together(here, place, listing)
    return distance < SAME_POINT and alike and (too_much or copy or _same_name(here, place, listing))


def _shares(here: _Place, place: _Place, distance: float) -> bool:
    """Part of one position: room is left there, or the file puts both on the very same point."""
    (element, occupancy), *_ = here.occupants.items()
    fits = occupancy + place.occupancy <= 1 + 5 * ROUNDING
    if element in place.occupants or not _same_group(here, place):
        return distance < SAME_POINT and fits
    both_full = min(occupancy, place.occupancy) >= FULL
    return fits or (distance < SAME_POINT and not both_full)


def _same_group(here: _Place, place: _Place) -> bool:
    return here.group == place.group or "" in (here.group, place.group)


def _listed_together(here: _Place, place: _Place, listing: Listing) -> bool:
    """The file gives both the same coordinates, before any symmetry operation."""
    difference = listing.fractional[place.rows] - listing.fractional[here.row]
    return bool((np.linalg.norm(difference @ listing.lattice, axis=1) < SAME_POINT).any())


def _same_name(here: _Place, place: _Place, listing: Listing) -> bool:
    name = listing.labels[here.row], listing.types[here.row]
    return any(name == (listing.labels[row], listing.types[row]) for row in place.rows)


def _refuse_collision(here: _Place, place: _Place, listing: Listing) -> None:
    if min(here.occupancy, place.occupancy) < FULL or not _same_group(here, place):
        return
    if set(here.occupants) == set(place.occupants):
        return
    one, two = (f"{printable(listing.labels[row], 40)} ({listing.elements[row]})" for row in (place.row, here.row))
    where = ", ".join(f"{value:.4f}" for value in listing.fractional[here.row])
    raise NotAStructureError(
        f"{one} and {two} are both fully there and lie on one point, near {where}.",
        "Correct the coordinates, or give the occupancies if the site is mixed.",
    )


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
            f"{len(duplicates)} of the {counted(len(listing), 'listed atom')} repeat others that are listed already"
            f"{', symmetry copies included' if moved else ''} (such as {late}, of {early}); each was counted once.",
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
