"""When a point of the chain passes a share of its way, at any instant, not only at conversions."""

from __future__ import annotations

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.checks import words
from frontend_sim.measure.checks.rest import Rest
from frontend_sim.measure.checks.subject import Real, Subject

POINTS = 2001
"""Instants in the first look at the way, half of them closer and closer to the event."""

CLOSEST = 1e-7
"""The first of them, as a share of the stretch."""

NARROWER = 65
"""Instants in each closer look at a passage."""

ROUNDS = 6
"""Closer looks; each is 64 times as close, until the rounding of time is reached."""


def first_passage(subject: Subject, point: str | None, rest: Rest, share: float) -> float:
    """Return the first instant at which a point has gone a share of its way [s].

    Parameters
    ----------
    point : of the chain; None for the converter's pin
    rest : that follows the event
    share : of the way from before the event to the end, between 0 and 1

    Raises
    ------
    MeasureError
        If the point does not come so far before the next event, or the end of the run.
    """
    times = _times(subject, rest, share)
    gone = _gone(subject, point, rest, times)
    there = np.flatnonzero(gone >= share)
    if len(there) == 0:
        raise MeasureError(
            f"the point does not go {share:.0%} of its way before {words.time(float(times[-1]))}; "
            "lengthen simulation.duration, or let after name the last event"
        )
    if there[0] == 0:
        return rest.since
    low, high = times[there[0] - 1], times[there[0]]
    for _ in range(ROUNDS):
        times = np.linspace(low, high, NARROWER)
        past = np.flatnonzero(_gone(subject, point, rest, times) >= share)
        first = int(past[0]) if len(past) else NARROWER - 1
        low, high = times[max(first - 1, 0)], times[first]
    return float(high)


def last_passage(
    subject: Subject, point: str | None, rest: Rest, share: float, latest: float
) -> float:
    """Return the last instant before another at which a share of the way is passed [s].

    Parameters
    ----------
    latest : the other instant [s]
    """
    times = _times(subject, rest, share)
    times = np.append(times[times < latest], latest)
    gone = _gone(subject, point, rest, times)
    before = np.flatnonzero(gone < share)
    if len(before) == 0:
        return rest.since
    last = min(int(before[-1]), len(times) - 2)
    low, high = times[last], times[last + 1]
    for _ in range(ROUNDS):
        times = np.linspace(low, high, NARROWER)
        behind = np.flatnonzero(_gone(subject, point, rest, times) < share)
        last = int(behind[-1]) if len(behind) else 0
        low, high = times[last], times[min(last + 1, NARROWER - 1)]
    return float(high)


def _times(subject: Subject, rest: Rest, share: float) -> Real:
    """Return instants after an event that show the way, as long as it takes."""
    stop = min(rest.until, subject.duration)
    if rest.tail is not None:
        # Once it stays within what is left of the way, the share has been passed.
        stop = min(stop, rest.since + 1.001 * rest.tail.leaves((1.0 - share) * abs(rest.height)))
    span = stop - rest.since
    if span <= 0.0:
        return np.array([rest.since])
    close = np.geomspace(CLOSEST * span, span, POINTS // 2)
    return np.unique(np.concatenate([rest.since + close, np.linspace(rest.since, stop, POINTS)]))


def _gone(subject: Subject, point: str | None, rest: Rest, times: Real) -> Real:
    inside = np.minimum(times, subject.duration)
    values = subject.at_instants(point, list(inside))
    return np.asarray((values - rest.before) / rest.height)
