"""One array in an NPY file."""

from __future__ import annotations

import re
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import RecordingError
from frontend_sim.stimulus.recording.arrays import Array, source_of
from frontend_sim.stimulus.recording.border import border
from frontend_sim.stimulus.recording.series import Source, Wanted
from frontend_sim.stimulus.recording.store import IN_MEMORY


def read_npy(file: Path, wanted: Wanted) -> Source:
    """Read an NPY file part by part, mapped into memory.

    Raises RecordingError if it is a pickle, is cut off, or holds no numbers.
    """
    if wanted.dataset is not None:
        raise RecordingError(
            f"{file}: an NPY file is one array; leave out dataset, choose with column"
        )
    return source_of(file, {"": mapped_array(file, "")}, wanted)


def mapped_array(file: Path, name: str) -> Array:
    """Return the array of an NPY file without reading its numbers."""
    with border(file, f"is damaged, or cut off after {file.stat().st_size} bytes"):
        try:
            whole = np.load(file, mmap_mode="r", allow_pickle=False)
        except ValueError as error:
            if re.search("object|pickle", str(error), re.I) is None:
                raise
            raise RecordingError(
                f"{file}: holds Python objects (a pickle), which are refused because reading runs "
                "code; store plain numbers"
            ) from None
    offset, shape, dtype = int(whole.offset), whole.shape, whole.dtype
    order: Any = "F" if whole.flags.f_contiguous and not whole.flags.c_contiguous else "C"

    def read(index: Any) -> NDArray[Any]:
        # Mapped anew each time, so that pages which were read once do not stay in memory.
        with border(file, "changed while it was read"):
            part: NDArray[Any] = np.memmap(file, dtype, "r", offset, shape, order)[index]
        return np.array(part)

    @cache
    def numbers() -> NDArray[Any]:
        held = read(...)
        held.setflags(write=False)
        return held

    few = whole.nbytes <= IN_MEMORY * 8
    return Array(name, shape, dtype, (lambda index: numbers()[index]) if few else read)
