"""Numeric datasets of HDF5 that grow along time, and their axis."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from frontend_sim.archive.layout import TIME, Column
from frontend_sim.archive.text import describe
from frontend_sim.errors import OutputError

if TYPE_CHECKING:
    import h5py

SHORTEST_CHUNK, LONGEST_CHUNK = 1024, 65536
"""Elements stored, checked and compressed as one: half a mebibyte of floats at the most."""


def open_column(group: h5py.Group, column: Column, kind: str, expected: int) -> h5py.Dataset:
    """Create an empty dataset that can grow; ``expected`` elements come at once."""
    chunk = min(max(expected, SHORTEST_CHUNK), LONGEST_CHUNK)
    packing = {"shuffle": True, "compression": "gzip", "compression_opts": 1}
    dataset = group.create_dataset(
        column.name,
        shape=(0,),
        maxshape=(None,),
        chunks=(chunk,),
        dtype=np.dtype(kind),
        fletcher32=True,
        **(packing if column.compressed else {}),
    )
    describe(dataset, column.units, column.description)
    return dataset


def attach_axis(group: h5py.Group) -> None:
    """Make the group's time the axis of its other datasets."""
    axis = group[TIME]
    axis.make_scale(TIME)
    for name, dataset in group.items():
        dataset.dims[0].label = TIME
        if name != TIME:
            dataset.dims[0].attach_scale(axis)


def extend(dataset: h5py.Dataset, values: Any) -> None:
    """Add values at the end.

    Raises
    ------
    OutputError
        If the dataset's integers cannot hold them: HDF5 would clip them and say nothing.
    """
    if len(values) == 0:
        return
    if dataset.dtype.kind in "iu":
        limits = np.iinfo(dataset.dtype)
        if values.min() < limits.min or values.max() > limits.max:
            raise OutputError(
                f"codes from {values.min()} to {values.max()} do not belong to the converter of "
                f"the scenario, whose codes fit {dataset.dtype}; save a run with its own scenario"
            )
    done = len(dataset)
    dataset.resize(done + len(values), axis=0)
    dataset[done:] = values
