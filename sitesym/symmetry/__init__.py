"""The symmetry of a crystal structure: search, axes, site groups, tolerance."""
