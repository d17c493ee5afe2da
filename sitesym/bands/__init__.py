"""Explanations of measured infrared and Raman bands, made from an analysis."""
