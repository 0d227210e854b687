"""When a stimulus changes its course."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.stimulus.drive import PiecewiseDrive

JUST_BEFORE = 1e-12
"""An instant this share of its time earlier is before an event, whatever was rounded."""

NO_CHANGE = 1e-12
"""A change by less than this share is rounding."""

WINDOWS = 1024.0
"""A run is searched for events in windows, the first this share of it, each twice the one before.
"""


def last_change(drives: Sequence[PiecewiseDrive], stop: float, from_rest: bool) -> float | None:
    """Return when a stimulus last changes its course in [0, stop), None if it never does [s].

    Parameters
    ----------
    from_rest : whether the chain was at rest before, so that t = 0 is a change in any case
    """
    window, end = stop / WINDOWS, math.nextafter(stop, 0.0)
    while end > 0.0:
        begin = max(end - window, 0.0)
        found = changes(drives, begin, end, from_rest)
        if len(found):
            return float(found[-1])
        end, window = begin, 2.0 * window
    return None


def next_change(drives: Sequence[PiecewiseDrive], start: float, stop: float) -> float:
    """Return when a stimulus next changes its course in (start, stop), infinity if never [s]."""
    window, begin = stop / WINDOWS, start
    while begin < stop:
        end = min(begin + window, math.nextafter(stop, 0.0))
        found = changes(drives, begin, end, False)
        found = found[found > start]
        if len(found):
            return float(found[0])
        begin, window = begin + window, 2.0 * window
    return math.inf


def changes(drives: Sequence[PiecewiseDrive], start: float, stop: float, from_rest: bool) -> Real:
    """Return the times in (start, stop] at which a stimulus changes its course [s].

    t = 0 belongs to a stretch that starts there: what the signal was before is another.
    """
    at_once = np.zeros(1 if start == 0.0 else 0)
    found = [at_once] if from_rest else [np.empty(0)]
    for drive in drives:
        times = np.concatenate([at_once, drive.events(start, stop)])
        if len(times) == 0:
            continue
        earlier = np.where(times > 0.0, times * (1.0 - JUST_BEFORE), -1.0)
        states, before = drive.states(times), drive.states(np.maximum(earlier, 0.0))
        moves, moved = states @ drive.generator.T, before @ drive.generator.T
        moved[times == 0.0] = 0.0  # Before t = 0 there is one value.
        size = np.maximum(np.abs(states), np.abs(before)).sum(axis=1)
        rate = np.maximum(np.abs(moves), np.abs(moved)).sum(axis=1)
        jumps = np.abs(states @ drive.readout - drive.values(earlier)) > NO_CHANGE * size
        turns = np.abs(moves - moved).sum(axis=1) > 1e3 * NO_CHANGE * rate
        found.append(times[jumps | turns])
    return np.unique(np.concatenate(found))
