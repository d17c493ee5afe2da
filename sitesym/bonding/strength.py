"""Which contacts of a metal are far weaker than another bond of the same anion.

Pauling's electrostatic bond strength is the valence of a cation over its coordination number (Pauling 1929, J. Am.
Chem. Soc. 51, 1010). An anion to which one cation gives half of its valence or more, as C, S, P, W do in CO3, SO4, PO4,
WO4 and (just half) Si in SiO4, forms with it a group that stands out from the rest of the crystal; if no cation does,
all bonds are of one rank and build a net (anisodesmic, mesodesmic and isodesmic crystals: Evans 1939, An Introduction
to Crystal Chemistry).

The coordination number is that of the contacts. The valence need not be known: it is the sum of the bond valences
s = exp((R - d) / 0.37 Å) of the contacts (Brown and Altermatt 1985, Acta Cryst. B41, 244; Brese and O'Keeffe 1991, Acta
Cryst. B47, 192), rounded to an integer where the site holds one element. Distorted polyhedra, such as those of
ferroelectric titanates, so have one strength for all bonds and stay whole.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.bonding.chemistry import Kind
from sitesym.bonding.contacts import Booleans
from sitesym.bonding.scene import Scene
from sitesym.structure import Floats, Integers

GROUP = 0.45
"""A group stands out when one bond takes this share of the anion's valence: a half, less 10 % for rounding."""

WEAKER = 0.70
"""A metal below this share of the strongest bond's strength is left out of the group.

Octahedral titanium beside silicon has 0.67 (the Si3O9 rings of benitoite are units), zirconium beside phosphorus 0.53,
zinc and beryllium beside silicon 0.50 (the tetrahedra of willemite and the rings of beryl are units).
"""

FORMER = 0.72
"""A metal of this strength (0.75: a trivalent one with four neighbours) builds nets together with silicon, phosphorus
and their like, as the network formers of Zachariasen do (1932, J. Am. Chem. Soc. 54, 3841)."""

WEAKER_FORMER = 0.55
"""A network former is left out of the group below this share only.

Tetrahedral aluminium has 0.75 beside silicon (aluminosilicates) and 0.60 beside phosphorus (berlinite, built like
quartz), octahedral niobium beside phosphorus 0.67.
"""

MULTIPLE = 1.4
"""Bonds of a metal from this valence on (V=O, Mo=O, U=O) say nothing of its others: each kind has its own mean."""


@dataclass(frozen=True, eq=False, slots=True)
class Strengths:
    """The m contacts compared.

    weaker  (m,) contacts of a metal with oxygen or a halogen that belongs to a group about a stronger atom.
    share   (m,) bond valence of the single contact over the valence of its anion; NaN where neither atom is one.
    """

    weaker: Booleans
    share: Floats


def compare_strengths(scene: Scene, eligible: Booleans) -> Strengths:
    """Strengths of the contacts.

    `eligible` (m,) are the contacts that may count at all; those of ionic metals and of hydrogen do not.
    """
    centre, anion = _oriented(scene)
    use = np.flatnonzero(eligible & (anion >= 0))
    centre, anion = centre[use], anion[use]
    own = _bond_valences(scene, use, centre, anion)
    strength = _strengths(scene, own, centre)
    strongest = _strongest_other(scene, centre, anion, strength)
    valence = scene.elements.valence[scene.elements.index[anion]]
    limit = np.where(strength >= FORMER, WEAKER_FORMER, WEAKER)
    group = (strongest >= GROUP * valence) & (strength <= limit * strongest)
    weaker, share = np.zeros(len(scene.contacts), dtype=bool), np.full(len(scene.contacts), np.nan)
    weaker[use] = group & scene.are(Kind.METAL)[centre]
    share[use] = own / valence
    return Strengths(weaker, share)


def _oriented(scene: Scene) -> tuple[Integers, Integers]:
    """(m,) central atom and anion of each contact; -1 where neither is oxygen or a halogen, or both are alike."""
    i, j = scene.contacts.first, scene.contacts.second
    order = scene.anion_order
    swap = order[i] < order[j]
    centre, anion = np.where(swap, j, i), np.where(swap, i, j)
    none = (order[i] == order[j]) | ~scene.are(Kind.NONMETAL)[anion]
    return np.where(none, -1, centre), np.where(none, -1, anion)


def _bond_valences(scene: Scene, use: Integers, centre: Integers, anion: Integers) -> Floats:
    elements = scene.elements
    parameter = elements.parameter[elements.index[centre]] + elements.offset[elements.index[anion]]
    return np.asarray(np.exp((parameter - scene.contacts.distance[use]) / 0.37))


def _strengths(scene: Scene, own: Floats, centre: Integers) -> Floats:
    """Strength of each contact: the mean over its central atom, or over its kind where the atom has multiple bonds."""
    multiple = (own >= MULTIPLE) & scene.are(Kind.METAL)[centre]
    kind = 2 * centre + multiple
    mean = (np.bincount(kind, weights=own) / np.maximum(np.bincount(kind), 1))[kind]
    total, number = np.bincount(centre, weights=own)[centre], np.bincount(centre)[centre]
    single = scene.elements.single[scene.elements.index[centre]]
    whole = np.where(single, np.maximum(np.round(total), 1), total)
    return np.where(np.bincount(centre, weights=multiple)[centre] > 0, mean, whole / number)


def _strongest_other(scene: Scene, centre: Integers, anion: Integers, strength: Floats) -> Floats:
    """Greatest strength that each contact's anion has from an element other than the contact's own."""
    elements = scene.elements
    best = np.zeros((scene.n, len(elements.names)))
    known = np.isfinite(strength)
    np.maximum.at(best, (anion[known], elements.index[centre[known]]), strength[known])
    return np.asarray(np.where(elements.alike[elements.index[centre]], 0.0, best[anion]).max(axis=1, initial=0.0))
