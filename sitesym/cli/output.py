"""Where the text of a command goes: a file that is not overwritten by accident, or standard output."""

from __future__ import annotations

import argparse
import io
import os
import sys

from sitesym.errors import UsageError

_INPUTS = ("file", "second", "raman", "infrared", "bands", "suspect", "pins", "wavenumbers", "fit")
"""Arguments that name files to be read, one or several each."""


def check_output(arguments: argparse.Namespace) -> None:
    """Refuse to overwrite, before anything is computed."""
    check_target(arguments.output, "--output", arguments)


def check_target(target: str | None, option: str, arguments: argparse.Namespace) -> None:
    """Refuse to overwrite what `option` names: never a file that is read, others only with --force."""
    if target == "":
        raise UsageError(f"The name for {option} is empty.", f"Name a file, or leave {option} out.")
    if not target or not os.path.exists(target):
        return
    if os.path.isdir(target):
        raise UsageError(f"'{target}' is a folder.", f"Name a file for {option}, such as one inside it.")
    for name in _INPUTS:
        given = getattr(arguments, name, None) or ()
        sources = (given,) if isinstance(given, str) else given
        if any(os.path.exists(source) and os.path.samefile(source, target) for source in sources):
            what = "the structure file itself" if name in ("file", "second") else "a file that is to be read"
            raise UsageError(f"The output '{target}' is {what}.", f"Choose another name for {option}.")
    if not arguments.force:
        raise UsageError(f"The file '{target}' exists.", "Choose another name, or add --force to overwrite it.")


def write(text: str, arguments: argparse.Namespace) -> None:
    """Write to the file that --output names, else to standard output."""
    if not arguments.output:
        _print(text)
        return
    write_file(text, arguments.output, "--output", force=arguments.force)


def write_file(text: str, target: str, option: str, *, force: bool) -> None:
    """Write a file that `option` names; an existing one only by force."""
    try:
        with open(target, "w" if force else "x", encoding="utf-8", errors="backslashreplace", newline="\n") as stream:
            stream.write(text)
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise UsageError(f"Cannot write '{target}': {reason}.", f"Choose another {option}.") from error


def _print(text: str) -> None:
    try:
        sys.stdout.write(text)
        sys.stdout.flush()
    except BrokenPipeError:
        raise
    except OSError as error:
        leave_standard_output()
        raise UsageError(
            f"Cannot write to standard output: {error.strerror}.", "Make room, or use --output."
        ) from error


def speak_utf8() -> None:
    """UTF-8 out, whatever the locale says; never a failure on a character, or on a stream that the caller closed."""
    if sys.stdout is None:
        sys.stdout = io.StringIO()
    if sys.stderr is None:
        sys.stderr = io.StringIO()
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(encoding="utf-8", errors="backslashreplace")


def leave_standard_output() -> None:
    """Drop what is still to be written, so that the interpreter does not complain about it at exit."""
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
