"""Gaps between irregular time stamps."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from frontend_sim.stimulus.recording.series import BLOCK
from frontend_sim.stimulus.recording.store import Stored

FAR = 3.0
"""A gap of more than this many usual intervals is told in the notes."""


@dataclass(frozen=True)
class Gaps:
    """What was found.

    Parameters
    ----------
    usual : median interval, of at most a million of them [s]
    largest : largest interval [s];  largest_at : position of the point at its end
    far : number of intervals longer than ``FAR`` usual ones
    """

    usual: float
    largest: float
    largest_at: int
    far: int


def find_gaps(times: Stored, first: int, last: int) -> Gaps:
    """Look at all intervals between time stamps first to last - 1."""
    usual = _usual_interval(times, first, last)
    largest, largest_at, far = 0.0, first, 0
    for start in range(first, last - 1, BLOCK):
        steps = np.diff(times.read(start, min(start + BLOCK + 1, last)))
        far += int(np.count_nonzero(steps > FAR * usual))
        at = int(np.argmax(steps))
        if steps[at] > largest:
            largest, largest_at = float(steps[at]), start + at + 1
    return Gaps(usual, largest, largest_at, far)


def _usual_interval(times: Stored, first: int, last: int) -> float:
    count = last - first
    pieces = max(count // BLOCK, 1)
    each = max(BLOCK // pieces, 2)
    starts = range(first, last - 1, max(count // pieces, 1))
    parts = [np.diff(times.read(start, min(start + each, last))) for start in starts]
    return float(np.median(np.concatenate(parts))) if parts else 0.0
