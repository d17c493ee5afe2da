"""Every error that sitesym raises on purpose.

    SitesymError                 exit code
    ├── UsageError               2   the command line, or an argument of a function, was wrong
    ├── ReadError                3   a file could not be read
    │   └── NotAStructureError   3   it was read, but describes no crystal structure
    └── InconsistencyError       4   the analysis contradicts itself and was stopped

Each carries `problem` (what failed, where, the offending value) and `mend` (what to try).
"""

from __future__ import annotations


class SitesymError(Exception):
    """Base of all deliberate errors: one line on the problem, one on the mend."""

    exit_code = 1

    def __init__(self, problem: str, mend: str = "") -> None:
        super().__init__(problem, mend)
        self.problem = problem
        self.mend = mend

    def __str__(self) -> str:
        return f"{self.problem}\n{self.mend}" if self.mend else self.problem


class UsageError(SitesymError):
    """The command line, or an argument of a public function, was wrong."""

    exit_code = 2


class ReadError(SitesymError):
    """A file could not be read: missing, unreadable, damaged or of an unknown format."""

    exit_code = 3


class NotAStructureError(ReadError):
    """The file was read, but it describes no crystal structure that can be analysed."""


class InconsistencyError(SitesymError):
    """Two routes to one number disagree, or a group is no group; the analysis was stopped."""

    exit_code = 4
