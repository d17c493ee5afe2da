"""Where the text of a command goes: a file that is not overwritten by accident, or standard output."""

from __future__ import annotations

import argparse
import io
import os
import sys

from sitesym.errors import UsageError


def check_output(arguments: argparse.Namespace) -> None:
    """Refuse to overwrite, before anything is computed."""
    target = arguments.output
    if not target or not os.path.exists(target):
        return
    sources = (arguments.file, getattr(arguments, "second", None))
    if any(source and os.path.exists(source) and os.path.samefile(source, target) for source in sources):
        raise UsageError(f"The output '{target}' is the structure file itself.", "Choose another name for --output.")
    if not arguments.force:
        raise UsageError(f"The file '{target}' exists.", "Choose another name, or add --force to overwrite it.")


def write(text: str, arguments: argparse.Namespace) -> None:
    """Write to the file that --output names, else to standard output."""
    if not arguments.output:
        _print(text)
        return
    mode = "w" if arguments.force else "x"
    try:
        with open(arguments.output, mode, encoding="utf-8", errors="backslashreplace", newline="\n") as stream:
            stream.write(text)
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise UsageError(f"Cannot write '{arguments.output}': {reason}.", "Choose another --output.") from error


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
    """UTF-8 out, whatever the locale says; never a failure on a character."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(encoding="utf-8", errors="backslashreplace")


def leave_standard_output() -> None:
    """Drop what is still to be written, so that the interpreter does not complain about it at exit."""
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
