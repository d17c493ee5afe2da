"""Directions, faces and scattering geometries in the Cartesian axes of a crystal's report."""
