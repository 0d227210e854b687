"""One dataset in an HDF5 file."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import RecordingError
from frontend_sim.stimulus.recording.arrays import Array, source_of
from frontend_sim.stimulus.recording.border import border
from frontend_sim.stimulus.recording.series import Source, Wanted

PACKING = ("scale_factor", "add_offset")
"""Attributes of numbers that were packed into fewer bits; they are told of, not applied."""

MOST = 10_000
"""Datasets that are looked at when none is named."""


def read_hdf5(file: Path, wanted: Wanted) -> Source:
    """Read a dataset part by part.

    Raises RecordingError if the file is no HDF5 file or is cut off, if the path is none of its
    datasets or is a group, and if the dataset holds no numbers.
    """
    import h5py

    with border(file, "is no HDF5 file, or a damaged one"), h5py.File(file, "r") as opened:
        arrays = _arrays(file, opened)
        for path in (wanted.dataset, wanted.time, wanted.column):
            item = opened.get(path) if isinstance(path, str) and path in opened else None
            if isinstance(item, h5py.Group):
                inside = [n for n in arrays if n.startswith(f"{path}/".lstrip("/"))]
                raise RecordingError(
                    f"{file}: {path!r} is a group, not a dataset; "
                    f"it holds {', '.join(inside[:24]) or 'no dataset'}"
                )
            if isinstance(item, h5py.Dataset):  # reached by a link, perhaps
                arrays.setdefault(str(path).strip("/"), _array(file, str(path), item))
    return source_of(file, arrays, wanted)


def _arrays(file: Path, opened: Any) -> dict[str, Array]:
    import h5py

    arrays: dict[str, Array] = {}

    def visit(name: str, item: object) -> bool | None:
        if isinstance(item, h5py.Dataset) and item.shape is not None:
            arrays[name] = _array(file, name, item)
        return True if len(arrays) >= MOST else None

    opened.visititems(visit)
    return arrays


def _array(file: Path, name: str, dataset: Any) -> Array:
    unit = dataset.attrs.get("units", "")
    if isinstance(unit, np.ndarray) and unit.size == 1:  # some programs write every attribute so
        unit = unit.item()
    unit = unit.decode("utf-8", "replace") if isinstance(unit, bytes) else str(unit)
    packed = [key for key in PACKING if key in dataset.attrs]
    told = f"{name}: {' and '.join(packed)} of the file not applied; give them by scale and offset"
    return Array(
        name.strip("/"),
        dataset.shape,
        dataset.dtype,
        _reader(file, name),
        unit,
        told=told if packed else "",
    )


def _reader(file: Path, name: str) -> Any:
    def read(index: object) -> NDArray[Any]:
        import h5py

        # Opened anew each time: an open HDF5 file can neither be shared nor sent to a worker.
        with border(file, f"{name!r} cannot be read"), h5py.File(file, "r") as opened:
            return np.asarray(opened[name][index])

    return read
