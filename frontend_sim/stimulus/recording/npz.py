"""Several arrays in an NPZ file."""

from __future__ import annotations

import shutil
import tempfile
import weakref
import zipfile
from pathlib import Path
from typing import IO, Any, Literal

import numpy as np
from numpy.lib import format as npy_format
from numpy.typing import NDArray

from frontend_sim.stimulus.recording.arrays import Array, source_of
from frontend_sim.stimulus.recording.border import border
from frontend_sim.stimulus.recording.series import Source, Wanted

IN_MEMORY = 1 << 25
"""Largest member that is held in memory [bytes]; a larger one is unpacked to a temporary file."""


def read_npz(file: Path, wanted: Wanted) -> Source:
    """Read members of an NPZ file, compressed or not.

    Raises RecordingError if the archive is damaged, or a member is a pickle or holds no numbers.
    """
    with border(file, "is a damaged NPZ file"), zipfile.ZipFile(file) as archive:
        members = [name for name in archive.namelist() if name.endswith(".npy")]
        arrays = {name.removesuffix(".npy"): _Member(file, name) for name in members}
        found = {name: member.described(archive) for name, member in arrays.items()}
    return source_of(file, found, wanted)


class _Member:
    """One array of the archive, unpacked when it is read for the first time."""

    def __init__(self, file: Path, name: str) -> None:
        self._file, self._name = file, name
        self._unpacked: Array | None = None

    def described(self, archive: zipfile.ZipFile) -> Array:
        """Return shape and type from the header alone."""
        with archive.open(self._name) as stream:
            shape, _, dtype = _header(stream)
        return Array(self._name.removesuffix(".npy"), shape, dtype, self._read)

    def _read(self, index: object) -> NDArray[Any]:
        if self._unpacked is None:
            with border(self._file, f"member {self._name!r} cannot be unpacked"):
                self._unpacked = self._unpack()
        return self._unpacked.read(index)

    def _unpack(self) -> Array:
        with zipfile.ZipFile(self._file) as archive:
            if archive.getinfo(self._name).file_size <= IN_MEMORY:
                with archive.open(self._name) as stream:
                    whole = npy_format.read_array(stream, allow_pickle=False)
                return Array("", whole.shape, whole.dtype, lambda index: whole[index])
            unpacked = tempfile.TemporaryFile(prefix="frontend-sim-")  # noqa: SIM115 - outlives this call
            # Without a name, it goes with this object or with the process, whatever ends that.
            weakref.finalize(self, unpacked.close)
            with archive.open(self._name) as stream:
                shutil.copyfileobj(stream, unpacked)
        unpacked.seek(0)
        shape, fortran, dtype = _header(unpacked)
        offset = unpacked.tell()
        order: Literal["F", "C"] = "F" if fortran else "C"

        def read(index: Any) -> NDArray[Any]:
            # Mapped anew each time, so that pages which were read once do not stay in memory.
            with border(self._file, f"member {self._name!r} is cut off"):
                part = np.memmap(unpacked, dtype, "r", offset, shape, order)[index]
            return np.array(part)

        return Array("", shape, dtype, read)


def _header(stream: IO[bytes]) -> tuple[tuple[int, ...], bool, np.dtype[Any]]:
    """Return shape, whether columns lie one after the other, and type of an NPY stream."""
    version = npy_format.read_magic(stream)
    header = (
        npy_format.read_array_header_1_0 if version == (1, 0) else npy_format.read_array_header_2_0
    )
    found: tuple[tuple[int, ...], bool, np.dtype[Any]] = header(stream)
    return found
