"""The version of this package: the only place where it is written."""

__version__ = "0.1.0"
