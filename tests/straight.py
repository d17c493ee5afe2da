"""Molecule to factor group without the species of the site: the second route of the tests on correlation."""

from __future__ import annotations

from sitesym.groups.point_group import PointGroup


def straight_correlation(free: PointGroup, site: PointGroup, factor: PointGroup) -> dict[str, dict[str, int]]:
    """A species of the free molecule, its characters taken on the site operations, induced by Frobenius reciprocity."""
    above = factor.species_on(site.matrices)
    result: dict[str, dict[str, int]] = {}
    for one in free.species_on(site.matrices):
        shared = {two.label: float(one.characters @ two.characters) / len(site) / two.norm for two in above}
        assert all(abs(value - round(value)) < 1e-6 for value in shared.values()), one.label
        result[one.label] = {label: round(value) for label, value in shared.items() if round(value)}
    return result
