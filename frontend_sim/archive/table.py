"""Results as tables of HDF5: one row each, columns side by side."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import astuple, fields
from typing import TYPE_CHECKING, Any, Literal, get_args

import numpy as np

from frontend_sim.archive.text import clean, describe
from frontend_sim.measure.result import Result, Verdict

if TYPE_CHECKING:
    import h5py

_NUMBERS = ("value", "limit", "margin")
_COLUMNS = tuple(field.name for field in fields(Result))
_ADDED = ("bound", "advice")
"""Columns that the first records do not have."""

_UNITS: Literal["per row"] = "per row"


def put_table(group: h5py.Group, name: str, results: Sequence[Result], description: str) -> None:
    """Write results as one compound dataset; none is written where there are no results.

    Text is of fixed length, so that the checksum covers it. A number that is not there is NaN.
    """
    import h5py

    if not results:
        return
    columns = dict(zip(_COLUMNS, zip(*map(astuple, results), strict=True), strict=True))
    dtype: list[tuple[str, Any]] = []
    cells: list[Sequence[Any]] = []
    for column, values in columns.items():
        if column in _NUMBERS:
            dtype.append((column, np.dtype("<f8")))
            cells.append([math.nan if value is None else value for value in values])
        else:
            encoded = [clean(value).encode() for value in values]
            longest = max(1, *map(len, encoded))
            dtype.append((column, h5py.string_dtype("utf-8", longest)))
            cells.append(encoded)
    rows = np.array(list(zip(*cells, strict=True)), dtype=dtype)
    dataset = group.create_dataset(name, data=rows, chunks=rows.shape, fletcher32=True)
    describe(dataset, _UNITS, description)


def get_table(dataset: h5py.Dataset) -> tuple[Result, ...]:
    """Read results back; NaN becomes None. A record from before a column was added lacks it."""
    rows = dataset[...]
    there = [column for column in _COLUMNS if column not in _ADDED or column in rows.dtype.names]
    return tuple(Result(**{column: _cell(row, column) for column in there}) for row in rows)


def _cell(row: Any, column: str) -> Any:
    if column in _NUMBERS:
        value = float(row[column])
        return None if math.isnan(value) else value
    text = bytes(row[column]).decode()
    if column == "verdict" and text not in get_args(Verdict):
        raise ValueError(f"{text!r} is no verdict")
    return text
