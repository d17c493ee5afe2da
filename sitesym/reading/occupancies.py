"""Occupancies that some files give per general position: an atom on a mirror plane as 0.5, on a fourfold axis as 0.25.

The CIF dictionary wants the chemical occupancy of the site. Where multiplying by the order of the site makes the
content that of the formula, and the figures as they stand do not, the former is meant.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from sitesym.reading.expectation import Expectation
from sitesym.reading.listing import Listing, Operations
from sitesym.reading.merging import Content, assemble
from sitesym.structure import OpenQuestion, Structure

_WRONG = 0.1
_RIGHT = 0.02


def assemble_checked(
    listing: Listing, operations: Operations, expectation: Expectation
) -> tuple[Content, tuple[OpenQuestion, ...]]:
    """The content of the cell, occupancies read as fractions of general positions where the formula demands it."""
    content = assemble(listing, operations)
    orders = len(operations) / np.array(content.multiplicities)
    scaled = listing.occupancies * orders
    special = (orders > 1) & (listing.occupancies < 1)
    if not special.any() or (scaled[special] > 1.01).any() or _misfit(listing, content, expectation) < _WRONG:
        return content, ()
    occupancies = np.where(special, np.minimum(scaled, 1.0), listing.occupancies)
    other = assemble(replace(listing, occupancies=occupancies), operations)
    if _misfit(listing, other, expectation) > _RIGHT:
        return content, ()
    message = (
        "The occupancies in the file are fractions of general positions; those on special positions were multiplied by "
        "the order of the site, which gives the content of the formula."
    )
    return other, (OpenQuestion("occupancies_rescaled", message),)


def _misfit(listing: Listing, content: Content, expectation: Expectation) -> float:
    return expectation.misfit(Structure(listing.lattice, content.fractional, content.sites).composition)
