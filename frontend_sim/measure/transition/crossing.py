"""When samples pass a level of their transition."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.transition.levels import Transition


@dataclass(frozen=True)
class Crossing:
    """A level is passed between two samples.

    Parameters
    ----------
    time : where the line between the two samples passes it, an estimate [s]
    earliest, latest : times of the two samples; that much is known [s]
    """

    time: float
    earliest: float
    latest: float


def first_crossing(transition: Transition, share: float) -> Crossing:
    """Return the first time at which a share of the way is done.

    Parameters
    ----------
    share : 0.5 for half the way, between 0 and 1 [1]

    Raises
    ------
    MeasureError
        If no sample has come so far, or the first one is already there.
    """
    there = np.flatnonzero(transition.progress >= share)
    if len(there) == 0 or there[0] == 0:
        what = "starts beyond" if len(there) else "never reaches"
        raise MeasureError(
            f"the record {what} {share:.0%} of the way from {transition.initial:.6g} to "
            f"{transition.final:.6g}; it must hold the whole transition, or state its levels"
        )
    return _between(transition, int(there[0]) - 1, share)


def last_crossing_before(transition: Transition, share: float, latest: float) -> Crossing:
    """Return the last time up to a sample at ``latest`` [s] at which a share of the way is passed.

    Raises
    ------
    MeasureError
        If every sample until then has come further.
    """
    below = np.flatnonzero((transition.progress < share) & (transition.times <= latest))
    if len(below) == 0:
        raise MeasureError(
            f"the record starts beyond {share:.0%} of the way from {transition.initial:.6g} to "
            f"{transition.final:.6g}; it must begin before the transition"
        )
    return _between(transition, int(below[-1]), share)


def _between(transition: Transition, left: int, share: float) -> Crossing:
    (before, after), (low, high) = (
        row[left : left + 2] for row in (transition.times, transition.progress)
    )
    time = before + (after - before) * (share - low) / (high - low)
    return Crossing(float(time), float(before), float(after))
