"""Several arrays in an NPZ file."""

from __future__ import annotations

import shutil
import tempfile
import weakref
import zipfile
from pathlib import Path
from typing import Any

from numpy.lib import format as npy_format
from numpy.typing import NDArray

from frontend_sim.stimulus.recording.arrays import Array, source_of
from frontend_sim.stimulus.recording.border import border
from frontend_sim.stimulus.recording.npy import mapped_array
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
            version = npy_format.read_magic(stream)
            header = (
                npy_format.read_array_header_1_0
                if version == (1, 0)
                else npy_format.read_array_header_2_0
            )
            shape, _, dtype = header(stream)
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
            folder = tempfile.mkdtemp(prefix="frontend-sim-")
            # Removed with this object or with the process, whichever ends first.
            weakref.finalize(self, shutil.rmtree, folder, ignore_errors=True)
            unpacked = Path(archive.extract(self._name, folder))
        return mapped_array(unpacked, "")
