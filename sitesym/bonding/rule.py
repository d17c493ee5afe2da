"""The rule: which contacts of a crystal are bonds. Each decision stands here with its reason.

A contact is a pair of atoms nearer than 1.15 times the sum of their covalent radii (Cordero and others 2008, Dalton
Trans. 2832); measured on molecular crystals, 1.15 to 1.3 did alike. Contacts of hydrogen reach to 1.3 times, because
bridging hydrogen has longer bonds, and so do those of a few pairs whose bonds are longer than their radii tell (Tl, Pb,
Bi with anions; F with F and O; see data/bond_chemistry.toml). No single cut-off serves metals, so contacts are judged:

1. Alternatives. Atoms of different disorder groups are not bonded; nor are two partly occupied ones that lie too near
   each other to be there together.
2. Hydrogen. Each hydrogen atom has one bond, to its nearest neighbour relative to the radii. Exceptions: it bridges two
   metal or metalloid atoms (boranes, hydrides), and a symmetric hydrogen bond (both within 0.03 Å, as in HF2-) counts
   on both sides as long as it ties no endless chain, layer or net.
3. Non-metals and metalloids (B, Si, Ge, As, Sb, Te) among themselves are bonded: molecules, oxoanions, silicates,
   borates.
4. Alkali and alkaline-earth metals, except beryllium, have no bonds: calcite is Ca and CO3, K2PtCl6 is K and PtCl6, a
   feldspar is a net with cations in its holes. Lithium and magnesium beside an organic carbon or nitrogen atom are
   treated as other metals are (organolithium compounds, Grignard reagents).
5. A contact across a triangle, whose ends lie on either side of an atom bound to both, is none (Zr and Si in zircon).
6. Other metals, with oxygen and halogens: a contact is a bond unless the anion has a far stronger bond to another
   element (see `strength`). PtCl6, WO4, TiO2, LiNbO3, spinels, Al-O in AlPO4: bonds. Fe-O in siderite, Pb-O in PbWO4,
   Zr-O in zircon, Al-O in garnets: none, the anions belong to CO3, WO4, SiO4.
7. Other metals, with anything else (C, N, S, P, ...): a contact is a bond. MoS2, GaAs, cyanides, carbonyls.
8. Complexes. A metal that touches carbon or nitrogen of a ligand, or any atom of an organic one, is a coordination
   centre: its contacts with organic ligands are bonds, and those with inorganic groups (nitrate, sulfate,
   tetrafluoroborate) are if the complex stays finite.
9. Water and hydroxide are bonded to a metal if the complex stays finite: Cr(H2O)6 and Sn(OH)6 are complexes, the
   hydroxide of gibbsite is a unit of its own. So is water on alkali and alkaline-earth ions, by 4. A metal that has
   lost contacts to stronger groups by 6 is no centre of a complex: it also loses water, hydroxide, and simple anions to
   which it gives less than half of their valence. The water of szomolnokite FeSO4 H2O, the hydroxide of alunite and the
   fluoride of topaz are units of their own; the short V=O and U=O bonds of vanadyl and uranyl salts stay.
10. Metal atoms are bonded to each other below 1.06 times the sum of radii (Mn2(CO)10, Hg2Cl2), below the full cut-off
    where the crystal holds no non-metal at all.
11. If not a single bond was found (NaCl, CaF2, MgO, PbS, sodium), the crystal is an ionic or metallic lattice: then the
    contacts of cations with anions, or of metal atoms, count up to 1.35 times the sum, so that nets and layers show as
    such.

Unnamed elements (A, B, C, ...) have no bonds: nothing is known of them.
"""

from __future__ import annotations

import numpy as np

from sitesym.bonding.chemistry import Kind, listed
from sitesym.bonding.contacts import Booleans
from sitesym.bonding.graph import connected_parts, labels_of_parts
from sitesym.bonding.result import FIRST_REFUSAL, Verdict
from sitesym.bonding.scene import Scene
from sitesym.bonding.strength import GROUP, compare_strengths
from sitesym.structure import Integers

SYMMETRIC = 0.03
"""A hydrogen atom lies midway when its two distances differ by less than this (Å)."""

BRIDGE = 1.12
"""A hydride bridges when its longer bond is less than this factor longer than the shorter."""

METAL_BOND = 1.06
"""Largest ratio to the sum of radii of a bond between metal atoms in a compound with non-metals."""


def judge(scene: Scene, alternatives: Booleans) -> Integers:
    """(m,) `Verdict` of each contact of the scene, given the mask of disordered alternatives."""
    verdict = np.where(alternatives, Verdict.ALTERNATIVE, Verdict.UNDECIDED)
    _hydrogen(scene, verdict)
    covalent = scene.between(*(scene.are(Kind.NONMETAL, Kind.METALLOID),) * 2) & _open(verdict)
    verdict[covalent] = Verdict.COVALENT
    if not scene.are(Kind.METAL, Kind.IONIC, Kind.METALLOID).any():
        return _settled(scene, verdict)
    verdict[scene.far_side & (verdict < FIRST_REFUSAL)] = Verdict.FAR_SIDE
    organic = _organic(scene, verdict)
    scene = _organometallic(scene, verdict, organic)
    verdict[_metal_contacts(scene) & _open(verdict)] = Verdict.METALS
    verdict[(verdict == Verdict.METALS) & _metal_bonds(scene)] = Verdict.METALLIC
    verdict[scene.contacts.partner(scene.are(Kind.IONIC)) & _open(verdict)] = Verdict.IONIC
    _ligands(scene, verdict, organic)
    return _settled(scene, verdict)


def _open(verdict: Integers) -> Booleans:
    return np.asarray(verdict == Verdict.UNDECIDED)


def _taken(verdict: Integers) -> Booleans:
    return np.asarray((verdict > Verdict.UNDECIDED) & (verdict < FIRST_REFUSAL))


def _settled(scene: Scene, verdict: Integers) -> Integers:
    """Decide on symmetric hydrogen bonds, the last contacts left open."""
    _if_finite(scene, verdict, _open(verdict), Verdict.HYDROGEN)
    return verdict


def _hydrogen(scene: Scene, verdict: Integers) -> None:
    """Rule 2; symmetric hydrogen bonds stay undecided."""
    hydrogen = scene.are(Kind.HYDROGEN)
    contacts, ratio = scene.contacts, scene.ratio
    ionic = contacts.partner(scene.are(Kind.IONIC))
    candidates = contacts.partner(hydrogen) & ~ionic & _open(verdict)
    heavy = candidates & ~(hydrogen[contacts.first] & hydrogen[contacts.second])
    satisfied = (scene.count(heavy) > 0) & hydrogen
    pairs = candidates & ~heavy & ~contacts.partner(satisfied)
    nearest = np.full(scene.n, np.inf)
    for ends in (contacts.first, contacts.second):
        np.minimum.at(nearest, ends[heavy | pairs], ratio[heavy | pairs])
    limit = np.where(hydrogen, nearest, -np.inf)
    best = np.maximum(limit[contacts.first], limit[contacts.second])
    bond = (heavy | pairs) & (ratio <= best + 1e-6)
    bridging = heavy & contacts.partner(scene.are(Kind.METAL, Kind.METALLOID)) & (ratio <= best * BRIDGE)
    bridging &= scene.contacts.partner(_bound_to_heavy(scene, bond) & hydrogen)
    verdict[candidates | (ionic & contacts.partner(satisfied))] = Verdict.HYDROGEN_BOND
    verdict[bond | bridging] = Verdict.HYDROGEN
    _symmetric(scene, verdict, heavy & ~bridging, hydrogen)


def _bound_to_heavy(scene: Scene, bond: Booleans) -> Booleans:
    """(n,) atoms whose bonds go to a metal or metalloid."""
    return scene.count(bond, scene.are(Kind.METAL, Kind.METALLOID)) > 0


def _symmetric(scene: Scene, verdict: Integers, heavy: Booleans, hydrogen: Booleans) -> None:
    """Leave both contacts of a hydrogen atom midway between two non-metal atoms undecided."""
    contacts = scene.contacts
    heavy = heavy & contacts.partner(scene.are(Kind.NONMETAL))
    end = np.where(hydrogen[contacts.first], contacts.first, contacts.second)
    shortest = np.full(scene.n, np.inf)
    np.minimum.at(shortest, end[heavy], contacts.distance[heavy])
    equal = heavy & (contacts.distance < shortest[end] + SYMMETRIC)
    midway = equal & (np.bincount(end[equal], minlength=scene.n) > 1)[end]
    verdict[midway] = Verdict.UNDECIDED


def _organic(scene: Scene, verdict: Integers) -> Booleans:
    """(n,) atoms of organic groups: those with carbon bound to carbon, hydrogen, or nitrogen that bears hydrogen.

    Carbonate, cyanide, thiocyanate, carbon monoxide and carbides are none.
    """
    light = scene.are(Kind.NONMETAL, Kind.METALLOID, Kind.HYDROGEN)
    bonds = _taken(verdict) & scene.between(light, light)
    carbon, hydrogen = scene.elements.named(frozenset("C")), scene.are(Kind.HYDROGEN)
    amine = scene.elements.named(frozenset("N")) & (scene.count(bonds, hydrogen) > 0)
    seed = carbon & (scene.count(bonds, carbon | hydrogen | amine) > 0)
    part = labels_of_parts(scene.n, scene.contacts.first[bonds], scene.contacts.second[bonds])
    return np.asarray(np.isin(part, part[seed]) & light)


def _organometallic(scene: Scene, verdict: Integers, organic: Booleans) -> Scene:
    """Treat lithium and magnesium beside an organic carbon or nitrogen atom as other metals (rule 4)."""
    candidates = scene.elements.named(listed("organometallic")) & scene.are(Kind.IONIC)
    if not candidates.any() or not organic.any():
        return scene
    donors = organic & scene.elements.named(frozenset({"C", "N"}))
    return scene.with_kind(candidates & (scene.count(_open(verdict), donors) > 0), Kind.METAL)


def _metal_contacts(scene: Scene) -> Booleans:
    metal = scene.are(Kind.METAL, Kind.IONIC)
    return scene.between(metal, metal)


def _metal_bonds(scene: Scene) -> Booleans:
    """(m,) contacts without ionic metals that are short enough for a bond between metal atoms (rule 10)."""
    covalent = ~scene.contacts.partner(scene.are(Kind.IONIC))
    if not scene.are(Kind.NONMETAL).any():
        return np.asarray(covalent)
    return np.asarray(covalent & (scene.ratio <= METAL_BOND))


def _ligands(scene: Scene, verdict: Integers, organic: Booleans) -> None:
    """Rules 6 to 9: the contacts between metals and everything else."""
    metal, hydrogen = scene.are(Kind.METAL), scene.are(Kind.HYDROGEN)
    if not metal.any():
        return
    contacts = scene.contacts
    core = _taken(verdict) & ~contacts.partner(metal)
    neighbours = scene.count(core)
    ligand = scene.other_than(metal)
    pending = _open(verdict) & contacts.partner(metal) & ~hydrogen[ligand]
    donor = organic | (scene.elements.named(frozenset({"C", "N", "P"})) & (neighbours > 0))
    centre = metal & (scene.count(pending, donor) > 0)
    aquo = _bears_only(scene, core, hydrogen, neighbours) & scene.elements.named(frozenset("O")) & ~organic
    strengths = compare_strengths(scene, pending | core)
    weaker = pending & strengths.weaker & ~organic[ligand]
    conditional = weaker & contacts.partner(centre)
    weaker &= ~conditional
    waters = pending & aquo[ligand] & ~weaker & ~conditional
    loose = waters | ((neighbours[ligand] == 0) & (strengths.share < GROUP))
    incomplete = pending & loose & ~weaker & contacts.partner(metal & (scene.count(weaker) > 0))
    verdict[pending] = np.where(neighbours[ligand[pending]] > 0, Verdict.COORDINATION, Verdict.POLAR)
    verdict[weaker] = Verdict.STRONGER
    verdict[waters | conditional] = Verdict.UNDECIDED
    verdict[incomplete] = Verdict.INCOMPLETE
    _if_finite(scene, verdict, waters & ~incomplete, Verdict.COORDINATION)
    _if_finite(scene, verdict, conditional & ~incomplete, Verdict.COORDINATION)


def _bears_only(scene: Scene, core: Booleans, partner: Booleans, neighbours: Integers) -> Booleans:
    """(n,) atoms whose bonds so far all go to atoms in the mask, one at least."""
    return np.asarray((neighbours > 0) & (scene.count(core, partner) == neighbours))


def _if_finite(scene: Scene, verdict: Integers, pending: Booleans, bond: Verdict) -> None:
    """Count the pending contacts as bonds where the group that they make is finite, or no more endless than before."""
    if not pending.any():
        return
    contacts, taken = scene.contacts, _taken(verdict)
    before = contacts.where(taken)
    after = contacts.where(taken | pending)
    old = connected_parts(scene.n, before.first, before.second, before.shift)
    new = connected_parts(scene.n, after.first, after.second, after.shift)
    own = np.zeros_like(new.dimension)
    if bond is Verdict.HYDROGEN:
        np.maximum.at(own, new.part, old.dimension[old.part])
    finite = (new.dimension <= own)[new.part[contacts.first]]
    verdict[pending] = np.where(finite[pending], bond, Verdict.ENDLESS)
