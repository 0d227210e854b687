"""The journal of a night: one line for each run that is done, each with its own checksum."""

from __future__ import annotations

import hashlib
import json
import os
from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import IO, Any

from frontend_sim.archive.target import new_file, writing

CHECKSUM = 16
"""Hexadecimal digits of the SHA-256 at the start of each line."""


class Journal:
    """An append-only file of JSON entries.

    A line counts if its checksum is right, so that whatever a fall of power leaves at the end of
    the file is passed over. Entries are written through to the operating system one by one, and
    to the disk by ``sync``.
    """

    def __init__(self, path: Path) -> None:
        """Open the journal, or make it."""
        self.path = path
        self._open()

    def _open(self) -> None:
        with writing(self.path):
            self._stream: IO[bytes] = self.path.open("a+b", buffering=0)
            self._reader: IO[bytes] = self.path.open("rb")
            self._end = self._stream.seek(0, os.SEEK_END)
            if self._end and not self._ends_with_a_line():
                self._put(b"\n")  # what was torn off becomes a line of its own, which is wrong

    def _ends_with_a_line(self) -> bool:
        self._stream.seek(self._end - 1)
        return self._stream.read(1) == b"\n"

    def _put(self, data: bytes) -> None:
        """Write all of the data, or nothing."""
        try:
            rest = memoryview(data)
            while len(rest):
                rest = rest[self._stream.write(rest) :]
        except OSError:
            self._stream.truncate(self._end)
            raise
        self._end += len(data)

    def append(self, entry: dict[str, Any]) -> int:
        """Add an entry, and return where it stands. Raises OutputError if it cannot be written."""
        text = json.dumps(entry, separators=(",", ":"), ensure_ascii=False).encode(
            "utf-8", "backslashreplace"
        )
        offset = self._end
        with writing(self.path):
            self._put(_checksum(text) + b" " + text + b"\n")
        return offset

    def entries(self) -> Iterator[tuple[int, dict[str, Any]]]:
        """Return place and content of every entry whose checksum is right, in order."""
        with self.path.open("rb") as stream:
            offset = 0
            for line in stream:
                entry = _entry(line)
                if entry is not None:
                    yield offset, entry
                offset += len(line)

    def at(self, offset: int) -> dict[str, Any] | None:
        """Return the entry that stands somewhere, None if it is damaged."""
        self._reader.seek(offset)
        return _entry(self._reader.readline())

    def reduce(self, offsets: Iterable[int]) -> None:
        """Keep the entries that stand somewhere, in this order, and no others.

        Raises OutputError if that cannot be written; the journal is then as it was.
        """
        try:
            with new_file(self.path, self.path, overwrite=True) as temporary, writing(self.path):
                with temporary.open("xb") as stream:
                    for offset in offsets:
                        self._reader.seek(offset)
                        stream.write(self._reader.readline())
                self.close()  # some systems replace no open file
        finally:
            self.close()
            self._open()

    def sync(self) -> None:
        """Bring everything to the disk."""
        with writing(self.path):
            os.fsync(self._stream.fileno())

    def close(self) -> None:
        """Close the file."""
        self._stream.close()
        self._reader.close()


def _checksum(text: bytes) -> bytes:
    return hashlib.sha256(text).hexdigest()[:CHECKSUM].encode()


def _entry(line: bytes) -> dict[str, Any] | None:
    text = line[CHECKSUM + 1 : -1]
    if line[-1:] != b"\n" or line[:CHECKSUM] != _checksum(text):
        return None
    try:
        entry = json.loads(text)
    except ValueError:
        return None
    return entry if isinstance(entry, dict) else None
