"""Is a record still what was written?"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from frontend_sim.archive.inventory import inventory
from frontend_sim.archive.layout import INVENTORY
from frontend_sim.archive.reading import reading

if TYPE_CHECKING:
    import h5py

STRETCH = 2**20
"""Elements read at once."""


def verify(file: h5py.File, path: Path) -> None:
    """Read every dataset, so that HDF5 tests its checksums, and take the inventory again.

    Raises
    ------
    RecordError
        If something differs from what was written; the message names the dataset.
    """
    names: list[str] = []
    with reading(path, "its list of objects"):
        file.visit(names.append)
    for name in names:
        with reading(path, name):
            _read_through(file[name])
    with reading(path, "its text"):
        if inventory(file) != file.attrs[INVENTORY]:
            raise ValueError("text or attributes differ from what was written")


def _read_through(item: h5py.HLObject) -> None:
    if getattr(item, "shape", ()):
        for start in range(0, len(item), STRETCH):
            item[start : start + STRETCH]
