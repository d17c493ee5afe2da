"""Which atoms of a crystal are bonded (the rule and its reasons: see `rule`)."""

from sitesym.bonding.contacts import Contacts
from sitesym.bonding.requests import parse_pair
from sitesym.bonding.result import BondRules, Bonds, Verdict
from sitesym.bonding.search import find_bonds

__all__ = ["BondRules", "Bonds", "Contacts", "Verdict", "find_bonds", "parse_pair"]
