"""Where a structure comes from: a path or standard input, read whole, decompressed and decoded."""

from __future__ import annotations

import bz2
import gzip
import io
import lzma
import os
import re
import stat
import sys
import zlib
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import IO, Any

from sitesym.errors import ReadError, UsageError
from sitesym.reading.text import printable

LARGEST = 100 * 2**20
"""Bytes read at most; a structure file of 20,000 atoms has about two million."""

_COMPRESSED: dict[bytes, Callable[[IO[bytes]], Any]] = {
    b"\x1f\x8b": gzip.open,
    b"BZh": bz2.open,
    b"\xfd7zXZ\x00": lzma.open,
}
_BYTE_ORDER_MARKS = {b"\xef\xbb\xbf": "utf-8-sig", b"\xff\xfe": "utf-16", b"\xfe\xff": "utf-16"}


@dataclass(frozen=True, slots=True)
class Given:
    """The content of a source.

    `name` is safe to print; `path` is None for standard input; `data` is decompressed, and `packed` tells whether it
    differs from what lies at `path`.
    """

    name: str
    data: bytes
    path: Path | None = None
    packed: bool = False

    @property
    def is_binary(self) -> bool:
        """Bytes that no text holds."""
        return not self._mark and b"\x00" in self.data

    @property
    def text(self) -> str:
        """The content as text: Unicode where it is valid, else Windows or Latin-1 (old files name authors so).

        Line ends of every system become line feeds.
        """
        return re.sub(r"\r\n?", "\n", self._decoded)

    @property
    def _decoded(self) -> str:
        if self._mark:
            return self.data.decode(self._mark, errors="replace")
        for encoding in ("utf-8", "cp1252"):
            try:
                return self.data.decode(encoding)
            except UnicodeDecodeError:
                continue
        return self.data.decode("latin-1")

    @property
    def _mark(self) -> str:
        return next((name for mark, name in _BYTE_ORDER_MARKS.items() if self.data.startswith(mark)), "")


def open_source(source: str | os.PathLike[str], standard_input: IO[Any] | None = None) -> Given:
    """Read a path, or standard input when the source is "-".

    Raises ReadError when there is no such file, when it is a folder, may not be read, is empty or too large.
    """
    if os.fspath(source) == "-":
        return _unpacked(Given("standard input", _read_stream(standard_input)))
    if os.fspath(source) == "":
        raise ReadError("The name of the file is empty.", "Name a structure file.")
    path = Path(source)
    name = printable(str(path))
    try:
        return _unpacked(Given(name, _read_path(path), path))
    except FileNotFoundError:
        raise ReadError(f"There is no file {name}.", "Check the spelling and the folder.") from None
    except (IsADirectoryError, NotADirectoryError):
        raise ReadError(f"{name} is a folder, or lies in a file.", "Name a structure file inside it.") from None
    except PermissionError:
        raise ReadError(f"{name} may not be read.", "Ask for the right to read it, or copy it.") from None
    except (OSError, ValueError) as error:
        raise ReadError(f"{name} cannot be opened: {printable(str(error))}.", "Check the path.") from None


@contextmanager
def error_named(name: str) -> Iterator[None]:
    """Errors of reading tell the name of the file, wherever they arise."""
    try:
        yield
    except ReadError as error:
        if re.search(rf"(?<!\S){re.escape(name)}(?![\w/])", error.problem):
            raise
        plain = error.problem.removeprefix("The file ")
        problem = f"{name}: {plain}" if plain == error.problem else f"{name} {plain}"
        raise type(error)(problem, error.mend) from error


def _read_path(path: Path) -> bytes:
    if stat.S_ISDIR(path.stat().st_mode):
        raise IsADirectoryError
    with path.open("rb") as stream:
        return stream.read(LARGEST + 1)


def _read_stream(stream: IO[Any] | None) -> bytes:
    stream = stream if stream is not None else sys.stdin.buffer
    content = stream.read(LARGEST + 1)
    if isinstance(content, str):
        return content.encode("utf-8", errors="replace")
    if not isinstance(content, bytes):
        raise UsageError("The standard input is no stream of text or bytes.", "Pass an open file.")
    return content


def _unpacked(given: Given) -> Given:
    opener = next((opener for magic, opener in _COMPRESSED.items() if given.data.startswith(magic)), None)
    if opener is not None:
        try:
            with opener(io.BytesIO(given.data)) as stream:
                given = Given(given.name, stream.read(LARGEST + 1), given.path, packed=True)
        except (OSError, EOFError, zlib.error, lzma.LZMAError):
            raise ReadError(f"{given.name} is compressed, and damaged.", "Fetch or pack it again.") from None
    if len(given.data) > LARGEST:
        raise ReadError(f"{given.name} is larger than {LARGEST // 2**20} MB.", "Give a file with one structure only.")
    if not given.data.strip(b" \t\r\n\x00\xef\xbb\xbf"):
        raise ReadError(f"{given.name} is empty.", "Save or fetch the structure file again.")
    return given
