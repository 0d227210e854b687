"""A stretch of grid and the jumps in it become pieces, each with a line as input."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from frontend_sim.analog.limits import Segments
from frontend_sim.simulation.kernels import Index, Real


@dataclass(frozen=True, eq=False)
class Stretch:
    """The input u of a limiter, and the linear answer v to it, at some points of a grid in a row.

    Parameters
    ----------
    rate : of the grid [Hz];  first : number of the first point
    u, v : shape (K,), at least two points; at a jump the new value
    fresh : when it jumps at the first point itself [s]; None where it does not
    """

    rate: float
    first: int
    u: Real
    v: Real
    fresh: float | None


@dataclass(frozen=True, eq=False)
class Jumps:
    """Jumps of a limiter's input: the times [s], and u and v just before and just after.

    Parameters
    ----------
    times : shape (J,);  before, after : rows u and v, shape (2, J)
    """

    times: Real
    before: Real
    after: Real


@dataclass(frozen=True, eq=False)
class Pieces:
    """What a limiter advances over, and how its pieces meet grid and jumps.

    Parameters
    ----------
    rate : of the grid [Hz];  first : number of its first point
    cut : when each piece begins [s], and which of them end at a point of the grid, shape (S,) both;
        None where every piece is a step of the grid
    jumps : when it jumps, at the begin of those pieces that start with a jump, shape (J,) [s]
    last : u and v at the last point, after its jump if it has one
    fresh : when it jumps at the last point [s]; None where it does not
    """

    segments: Segments
    rate: float
    first: int
    cut: tuple[Real, NDArray[np.bool_]] | None
    jumps: Real
    last: tuple[float, float]
    fresh: float | None

    def begins(self, pieces: Index) -> Real:
        """Return when some pieces begin [s]."""
        return (self.first + pieces) / self.rate if self.cut is None else self.cut[0][pieces]

    def on_grid(self, ends: Real) -> Real:
        """Return those of some values at the ends of all pieces that are at points of the grid."""
        return ends if self.cut is None else ends[self.cut[1]]


def pieces_of(stretch: Stretch, jumps: Jumps | None) -> Pieces:
    """Cut a stretch at the points of its grid and at jumps.

    A jump within rounding of a point is at the point, and begins a piece there; ``Pieces.jumps``
    keeps its own time, as what a conversion at the point sees hangs on that. The jumps lie behind
    the first point of the stretch, and not behind its last one.
    """
    count = len(stretch.u)
    if jumps is None or len(jumps.times) == 0:
        first = np.array([] if stretch.fresh is None else [stretch.fresh])
        at = np.zeros(len(first), np.int64)
        length = np.full(count - 1, 1.0 / stretch.rate)
        u, v = stretch.u, stretch.v
        segments = Segments(length, u[:-1], u[1:], v[1:], float(v[0]), at)
        last = (float(u[-1]), float(v[-1]))
        return Pieces(segments, stretch.rate, stretch.first, None, first, last, None)
    return _cut(stretch, jumps)


def _cut(stretch: Stretch, jumps: Jumps) -> Pieces:
    count = len(stretch.u)
    position = jumps.times * stretch.rate - stretch.first
    # Relative to the time itself: the position in this stretch has lost digits.
    near = 1e-9 + 1e-13 * jumps.times * stretch.rate
    nearest = np.clip(np.rint(position).astype(np.int64), 1, count - 1)
    on = np.abs(position - nearest) <= near
    inside = ~on
    cell = np.clip(np.floor(position[inside]).astype(np.int64) + 1, 1, count - 1)
    edges = np.insert(np.arange(count, dtype=np.float64), cell, position[inside])
    # Number of each point and of each jump among the edges.
    point = np.arange(count) + np.searchsorted(cell, np.arange(count), side="right")
    edge = np.empty(len(position), np.int64)
    edge[inside] = cell + np.arange(len(cell))
    edge[on] = point[nearest[on]]
    before = [np.insert(row, cell, 0.0) for row in (stretch.u, stretch.v)]
    after = [row.copy() for row in before]
    for row in range(2):
        # Of two jumps at one point the first tells what was before, the last what comes after.
        before[row][edge[::-1]], after[row][edge] = jumps.before[row][::-1], jumps.after[row]
    jumped = np.full(len(edges), np.nan)
    jumped[edge] = jumps.times
    if stretch.fresh is not None:
        jumped[0] = stretch.fresh
    starts = np.flatnonzero(~np.isnan(jumped[:-1]))
    ends_on_grid = np.zeros(len(edges), np.bool_)
    ends_on_grid[point] = True
    segments = Segments(
        np.diff(edges) / stretch.rate,
        after[0][:-1],
        before[0][1:],
        before[1][1:],
        float(after[1][0]),
        starts,
    )
    begins = np.arange(stretch.first, stretch.first + count - 1) / stretch.rate
    times = np.insert(begins, cell, jumps.times[inside])
    last = (float(after[0][-1]), float(after[1][-1]))
    cut = (times, ends_on_grid[1:])
    fresh = None if np.isnan(jumped[-1]) else float(jumped[-1])
    return Pieces(segments, stretch.rate, stretch.first, cut, jumped[starts], last, fresh)
