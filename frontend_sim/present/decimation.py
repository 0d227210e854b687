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
    values : equally spaced in time, shape (K,); NaN breaks the line, and is kept
    """
    count = len(values)
    if count <= 4 * columns:
        return np.arange(count)
    edges = np.linspace(0, count, columns + 1).astype(np.int64)
    whole = int(np.min(np.diff(edges)))
    # Columns hold `whole` or `whole + 1` points: the table repeats the last point of short ones.
    table = np.minimum(edges[:-1, None] + np.arange(whole + 1), edges[1:, None] - 1)
    found, breaks = values[table], np.isnan(values)
    rows, broken = np.arange(columns), breaks[table]
    kept = [
        edges[:-1],
        table[rows, np.argmin(np.where(broken, np.inf, found), axis=1)],
        table[rows, np.argmax(np.where(broken, -np.inf, found), axis=1)],
        edges[1:] - 1,
        np.flatnonzero(breaks),
    ]
    return np.unique(np.concatenate(kept))


def broken(breaks: NDArray[np.int64], time: Real, *values: Real) -> tuple[Real, ...]:
    """Return series in time with a NaN before each break, over which no line leads.

    Parameters
    ----------
    breaks : numbers of the points that begin anew, not the first
    time, values : shapes (K,)
    """
    rows = (np.insert(row, breaks, np.nan) for row in values)
    # A step is held up to the next point: at the end of the gap it would lead over it.
    return np.insert(time, breaks, time[breaks - 1]), *rows


def shown_flags(flags: NDArray[np.bool_], columns: int = COLUMNS) -> NDArray[np.int64]:
    """Return the raised flags to mark, at most one of each column of pixels."""
    raised = np.flatnonzero(flags)
    if len(raised) <= columns:
        return raised
    column = raised * columns // len(flags)
    first = np.concatenate([[True], column[1:] != column[:-1]])
    return np.asarray(raised[first], dtype=np.int64)
