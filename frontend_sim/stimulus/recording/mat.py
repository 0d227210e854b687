"""One variable in a MAT file of version 4, 5 or 7; version 7.3 is HDF5 and read as such."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import RecordingError
from frontend_sim.stimulus.recording.arrays import Array, source_of
from frontend_sim.stimulus.recording.border import border
from frontend_sim.stimulus.recording.hdf5 import read_hdf5
from frontend_sim.stimulus.recording.series import Source, Wanted

_HDF5 = b"\x89HDF\r\n\x1a\n"
_CLASSES = "double single int8 uint8 int16 uint16 int32 uint32 int64 uint64 logical"
_PLAIN = frozenset(_CLASSES.split())


def read_mat(file: Path, wanted: Wanted) -> Source:
    """Read a variable; the format allows no reading in parts, so all of it is held in memory.

    Raises RecordingError if the file is no MAT file or is damaged, or if the variable holds no
    numbers.
    """
    with file.open("rb") as stream:
        head = stream.read(520)
    if _HDF5 in (head[:8], head[512:520]):
        return read_hdf5(file, wanted)
    from scipy.io import whosmat

    with border(file, "is no MAT file, or a damaged one"):
        described = whosmat(str(file))
    arrays = {name: _array(file, name, tuple(shape), kind) for name, shape, kind in described}
    return source_of(file, arrays, wanted)


def _array(file: Path, name: str, shape: tuple[int, ...], kind: str) -> Array:
    refusal = "" if kind in _PLAIN else f"is of class {kind}; expected a plain array of numbers"
    stored = {"double": "f8", "single": "f4", "logical": "u1"}.get(kind, kind)
    dtype = np.dtype("u1" if refusal else stored)
    return Array(name, shape, dtype, _Variable(file, name), refusal=refusal)


class _Variable:
    """A variable that is loaded when it is read for the first time."""

    def __init__(self, file: Path, name: str) -> None:
        self._file, self._name = file, name
        self._loaded: NDArray[Any] | None = None

    def __call__(self, index: Any) -> NDArray[Any]:
        if self._loaded is None:
            from scipy.io import loadmat

            with border(self._file, f"variable {self._name!r} cannot be read"):
                loaded = loadmat(str(self._file), variable_names=[self._name])[self._name]
            if loaded.dtype.kind == "c":
                raise RecordingError(
                    f"{self._file}: array {self._name!r} is complex; store the real part or the "
                    "magnitude"
                )
            self._loaded = loaded
        return np.asarray(self._loaded[index])
