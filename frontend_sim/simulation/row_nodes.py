"""Where rows of instants are cut at events."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.simulation.kernels import Index, Real


@dataclass(frozen=True, eq=False)
class RowNodes:
    """The begins of some rows, the events in them, and the instants just before and behind those.

    Parameters
    ----------
    times : of all nodes, the last one the end of the last row; an event that is at an instant but
        for rounding is one node with it, shape (K + 1,) [s]
    counts : how many instants after each node the next one is, 0 if either is no instant, shape
        (K,)
    rows : which nodes are begins of rows, and the end
    others : which other nodes are instants, shape (P,)
    first, last : the instants from each of these to the node behind it, counted from the begin of
        the first row, shape (P,)
    """

    times: Real
    counts: Index
    rows: Index | slice
    others: Index
    first: Index
    last: Index

    @classmethod
    def whole(cls, begins: Index, times: Real) -> Self:
        """Return rows without events, from the numbers and times of their begins and of the end."""
        none = np.empty(0, np.int64)
        return cls(times, np.diff(begins), slice(None), none, none, none)

    @classmethod
    def cut(
        cls,
        begins: Index,
        events: Real,
        nearest: Index,
        times: Callable[[Index], Real],
        slack: Real,
    ) -> Self:
        """Cut rows at events.

        Parameters
        ----------
        begins : numbers of the instants at which rows begin, and of the end of the last
        events : behind the first of them and not behind the last, but for slack, sorted [s]
        nearest : number of the instant nearest to each event
        times : when instants of some numbers are [s]
        slack : within which an event is at its nearest instant [s]
        """
        near = times(nearest)
        on = (events >= near - slack) & (events <= near + slack)
        before = (nearest - (near > events))[~on]
        numbers = np.unique(np.concatenate([begins, nearest[on], before, before + 1]))
        at = times(numbers)
        moved = np.searchsorted(numbers, nearest[on])
        at[moved] = np.maximum(at[moved], events[on])
        between = np.searchsorted(numbers, before) + 1
        instant = np.insert(np.ones(len(numbers), np.bool_), between, False)
        node = np.flatnonzero(instant)
        next_to = np.diff(node) == 1
        counts = np.zeros(len(instant) - 1, np.int64)
        counts[node[:-1][next_to]] = np.diff(numbers)[next_to]
        begin = np.zeros(len(numbers), np.bool_)
        begin[np.searchsorted(numbers, begins)] = True
        other = np.flatnonzero(~begin)
        first, last = numbers[other] - begins[0], numbers[other + 1] - begins[0]
        all_times = np.insert(at, between, events[~on])
        return cls(all_times, counts, node[begin], node[other], first, last)
