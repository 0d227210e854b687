"""A working copy of numbers: in memory while they are few, in a temporary file when many."""

from __future__ import annotations

import tempfile
import weakref
from collections.abc import Iterable
from dataclasses import dataclass
from typing import IO

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import RecordingError
from frontend_sim.stimulus.recording.series import Real

IN_MEMORY = 1 << 21
"""Most numbers of one series that stay in memory, 16 MB."""


@dataclass(frozen=True, eq=False)
class Stored:
    """Numbers that have been put away.

    The temporary file has no name or is removed with the process, and it is mapped anew for each
    reading, so that pages which were read once do not stay in memory.
    """

    count: int
    memory: Real | None
    file: IO[bytes] | None

    def view(self) -> Real:
        """Return all numbers as one array, mapped from the file where there is one."""
        if self.memory is not None:
            return self.memory
        mapped: NDArray[np.float64] = np.memmap(
            self.file,
            dtype=np.float64,
            mode="r",
            shape=(self.count,),  # type: ignore[call-overload]  # None only with memory
        )
        return mapped

    def read(self, first: int, last: int) -> Real:
        """Return numbers first to last - 1; not to be changed."""
        if self.memory is not None:
            return self.memory[first:last]
        return np.array(self.view()[first:last])


def store(blocks: Iterable[Real]) -> Stored:
    """Put away one series of numbers."""
    return store_columns(((block,) for block in blocks), 1)[0]


def store_columns(blocks: Iterable[tuple[Real, ...]], width: int) -> tuple[Stored, ...]:
    """Put away several series that come side by side, block by block.

    Raises RecordingError if the folder for temporary files has no room.
    """
    held: list[tuple[Real, ...]] = []
    files: list[IO[bytes]] = []
    count = 0
    try:
        for block in blocks:
            held.append(tuple(np.ascontiguousarray(part, dtype=np.float64) for part in block))
            count += len(block[0])
            if count > IN_MEMORY:
                files = files or [tempfile.TemporaryFile() for _ in range(width)]  # noqa: SIM115 - lives on
                _write(held, files)
                held.clear()
    except BaseException:
        for file in files:
            file.close()
        raise
    if not files:
        return tuple(Stored(count, _joined([row[k] for row in held]), None) for k in range(width))
    return tuple(_kept(count, file) for file in files)


def _kept(count: int, file: IO[bytes]) -> Stored:
    """Return numbers in a file, which is closed, and so removed, with the last use of them."""
    stored = Stored(count, None, file)
    weakref.finalize(stored, file.close)
    return stored


def _write(held: list[tuple[Real, ...]], files: list[IO[bytes]]) -> None:
    try:
        for row in held:
            for file, part in zip(files, row, strict=True):
                file.write(part.data)
        for file in files:
            file.flush()
    except OSError as error:
        raise RecordingError(
            f"no room for a working copy of the recording in {tempfile.gettempdir()}: "
            f"{error.strerror or error}; set the environment variable TMPDIR to a larger folder"
        ) from None


def _joined(parts: list[Real]) -> Real:
    whole = np.concatenate(parts) if parts else np.empty(0)
    whole.setflags(write=False)
    return whole
