"""Long series become as many points as a plot can show, with every peak kept."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]

COLUMNS = 1500
"""Columns of pixels that a series is drawn into."""


def shown_points(values: Real, columns: int = COLUMNS) -> NDArray[np.int64]:
    """Return which points of a series to draw, in order: all, or a few of each column of pixels.

    Of each column the first, the lowest, the highest and the last point are kept, which gives the
    same pixels as all points. Source: U. Jugel et al. 2014, "M4: a visualization-oriented time
    series data aggregation" (from memory).

    Parameters
    ----------
    values : equally spaced in time, shape (K,)
    """
    count = len(values)
    if count <= 4 * columns:
        return np.arange(count)
    edges = np.linspace(0, count, columns + 1).astype(np.int64)
    whole = int(np.min(np.diff(edges)))
    # Columns hold `whole` or `whole + 1` points: the table repeats the last point of short ones.
    table = np.minimum(edges[:-1, None] + np.arange(whole + 1), edges[1:, None] - 1)
    found = values[table]
    rows = np.arange(columns)
    kept = [
        edges[:-1],
        table[rows, np.argmin(found, axis=1)],
        table[rows, np.argmax(found, axis=1)],
        edges[1:] - 1,
    ]
    return np.unique(np.concatenate(kept))


def shown_flags(flags: NDArray[np.bool_], columns: int = COLUMNS) -> NDArray[np.int64]:
    """Return the raised flags to mark, at most one of each column of pixels."""
    raised = np.flatnonzero(flags)
    if len(raised) <= columns:
        return raised
    column = raised * columns // len(flags)
    first = np.concatenate([[True], column[1:] != column[:-1]])
    return np.asarray(raised[first], dtype=np.int64)
