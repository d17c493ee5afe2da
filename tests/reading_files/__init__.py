"""Texts of structure files, written for the tests of the readers."""
