"""What the search for bonds takes and gives: the user's word, the verdict on each contact, the bonds."""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum

from sitesym.bonding.contacts import Contacts
from sitesym.errors import UsageError
from sitesym.structure import Floats, Integers


class Verdict(IntEnum):
    """Why a contact is a bond (below 20) or is none (from 20 on); `REASONS` says it in words."""

    UNDECIDED = 0
    COVALENT = 1
    HYDROGEN = 2
    COORDINATION = 3
    POLAR = 4
    METALLIC = 5
    IONIC_LATTICE = 6
    REQUESTED = 7
    IONIC = 20
    STRONGER = 21
    INCOMPLETE = 22
    ENDLESS = 23
    FAR_SIDE = 24
    HYDROGEN_BOND = 25
    ALTERNATIVE = 26
    METALS = 27
    BEYOND = 28
    FORBIDDEN = 29
    APART = 30


FIRST_REFUSAL = Verdict.IONIC

REASONS = {
    Verdict.COVALENT: "shorter than {scale:g} times the sum of the covalent radii",
    Verdict.HYDROGEN: "a hydrogen atom and its nearest neighbour",
    Verdict.COORDINATION: "a metal and its ligands",
    Verdict.POLAR: "no other element binds this anion far more strongly",
    Verdict.METALLIC: "metal atoms near each other",
    Verdict.IONIC_LATTICE: "no stronger bond was found, so the contacts of the ionic or metallic lattice count",
    Verdict.REQUESTED: "as you asked",
    Verdict.IONIC: "alkali and alkaline-earth ions are held by charge",
    Verdict.STRONGER: "the anion belongs to a group about another element, which binds it far more strongly",
    Verdict.INCOMPLETE: "the metal has lost other neighbours to stronger groups and is no centre of a complex",
    Verdict.ENDLESS: "it would be part of an endless chain, layer or net; the finite group is kept a unit of its own",
    Verdict.FAR_SIDE: "the two only lie on either side of an atom that is bound to both",
    Verdict.HYDROGEN_BOND: "a hydrogen bond; each hydrogen atom keeps its nearest neighbour",
    Verdict.ALTERNATIVE: "disordered alternatives, never there together",
    Verdict.METALS: "too long for a bond between metal atoms",
    Verdict.BEYOND: "longer than {scale:g} times the sum of the covalent radii",
    Verdict.FORBIDDEN: "as you asked",
    Verdict.APART: "outside the unit that you asked for",
}
"""Half a sentence for each verdict."""

Pair = tuple[str, str]


@dataclass(frozen=True, slots=True)
class BondRules:
    """The cut-off and the user's word, which wins over the rule.

    scale   a contact is considered below `scale` times the sum of the covalent radii.
    add     pairs to count as bonded, each an element or the label of an atom: ("Ca", "O"), ("Cu1", "O3").
    forbid  pairs not to count as bonded, likewise.
    units   groups to cut out as units: a formula ("CO3") or labels of atoms ("C1,O1,O2").
    """

    scale: float = 1.15
    add: tuple[Pair, ...] = ()
    forbid: tuple[Pair, ...] = ()
    units: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        if not 0.5 <= self.scale <= 2:
            raise UsageError(
                f"A bond cut-off of {self.scale:g} times the sum of covalent radii makes no sense.",
                "Give a number between 0.5 and 2; 1.15 is usual.",
            )

    @property
    def speaks(self) -> bool:
        """Whether the user asked for anything."""
        return bool(self.add or self.forbid or self.units)


@dataclass(frozen=True, eq=False, slots=True)
class Bonds:
    """The bonds of a crystal, m in number, and the near contacts that are none.

    first, second  (m,) indices; atom `second` in the cell `shift` is bonded to atom `first` in the cell 0 0 0. Each
                   bond stands once.
    shift          (m, 3) lattice translations, integers.
    distance       (m,) lengths in Å.
    verdict        (m,) `Verdict` of each bond.
    refused        the contacts that were considered and left out, `refusal` their verdicts.
    scale          the cut-off that was used.
    """

    first: Integers
    second: Integers
    shift: Integers
    distance: Floats
    verdict: Integers
    refused: Contacts
    refusal: Integers
    scale: float

    def __len__(self) -> int:
        return len(self.first)

    def words(self, verdict: int) -> str:
        """The reason behind a verdict, half a sentence."""
        return REASONS[Verdict(verdict)].format(scale=self.scale)
