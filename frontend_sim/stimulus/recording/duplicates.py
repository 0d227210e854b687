"""Several points of the same time become one."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import Literal

import numpy as np

from frontend_sim.stimulus.recording.series import Real, Series
from frontend_sim.stimulus.recording.store import store_columns

Duplicates = Literal["error", "first", "last", "mean"]


def merged(signal: Series, time: Series, policy: Duplicates) -> tuple[Series, Series]:
    """Return signal and time with one point for each time stamp.

    Parameters
    ----------
    time : never going back
    policy : first, last or mean of the points of one time; a mean leaves out what is missing
    """
    values, times, rows = store_columns(_blocks(signal, time, policy), 3)

    def where(position: int) -> str:
        return time.where(int(rows.read(position, position + 1)[0]))

    return (
        replace(signal, count=values.count, read=values.read, where=where),
        replace(time, count=times.count, read=times.read, where=where),
    )


def _blocks(signal: Series, time: Series, policy: Duplicates) -> Iterator[tuple[Real, ...]]:
    """Return blocks of (signal, time, row); a run of equal times is never cut in two."""
    carried: tuple[Real, Real, int] = (np.empty(0), np.empty(0), 0)
    for position, new_times in time.blocks():
        new_values = signal.read(position, position + len(new_times))
        values = np.concatenate([carried[0], new_values])
        times = np.concatenate([carried[1], new_times])
        start = carried[2] if len(carried[0]) else position
        cut = int(np.searchsorted(times, times[-1], side="left"))
        yield _merge(values[:cut], times[:cut], start, policy)
        carried = (values[cut:], times[cut:], start + cut)
    yield _merge(carried[0], carried[1], carried[2], policy)


def _merge(values: Real, times: Real, start: int, policy: Duplicates) -> tuple[Real, ...]:
    if len(times) == 0:
        return values, times, times
    firsts = np.flatnonzero(np.diff(times, prepend=-np.inf) > 0.0)
    lasts = np.append(firsts[1:], len(times)) - 1
    if policy == "mean":
        there = np.isfinite(values)
        counts = np.add.reduceat(there.astype(np.float64), firsts)
        sums = np.add.reduceat(np.where(there, values, 0.0), firsts)
        chosen = np.divide(sums, counts, out=np.full(len(firsts), np.nan), where=counts > 0.0)
    else:
        chosen = values[firsts if policy == "first" else lasts]
    return chosen, times[firsts], (start + firsts).astype(np.float64)
