"""Where in time a check fails."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from frontend_sim.measure.checks.rest import Rest
from frontend_sim.measure.checks.subject import Real, Subject

NOWHERE: Real = np.empty((0, 2))
"""The place of a check that asks the circuit, not the run."""


def nowhere() -> Real:
    """Return ``NOWHERE``."""
    return NOWHERE


def instants(times: Real | float) -> Real:
    """Return some instants [s] as stretches of no length, shape (N, 2)."""
    each = np.atleast_1d(times)
    return np.column_stack([each, each])


def stretch(start: float, stop: float) -> Real:
    """Return one stretch of time, shape (1, 2) [s]."""
    return np.array([[start, stop]])


def beyond(times: Real, excess: Real) -> Real:
    """Return the conversions that lie beyond a limit, else the one that is nearest to it.

    Parameters
    ----------
    times : of the conversions, at least one, shape (K,) [s]
    excess : how far each lies beyond, shape (K,)
    """
    over: NDArray[np.int64] = np.flatnonzero(excess > 0.0)
    return instants(times[over] if len(over) else times[np.argmax(excess)])


def peaks(quantity: str, times: Real, error: Real, limit: float) -> Callable[[], Real] | None:
    """Return what tells where an error lies beyond a limit; None where its rms counts, not a peak.

    Parameters
    ----------
    quantity : "peak" or "rms"
    times : of the conversions, shape (K,) [s]
    error : with its sign, shape (K,);  limit : in its unit
    """
    if quantity != "peak":
        return None
    return lambda: beyond(times, np.abs(error) - limit)


def excursion(
    subject: Subject, point: str | None, rest: Rest, excess: Callable[[Real], Real]
) -> Real:
    """Return the event before a rest, and the conversions after it that lie beyond a limit.

    Parameters
    ----------
    point : of the chain; None for the converter's pin
    rest : that follows the event
    excess : how far values of the point lie beyond
    """
    counted = (subject.time >= rest.since) & (subject.time < rest.until)
    found = instants(rest.since)
    if not np.any(counted):
        return found
    far = excess(subject.at_conversions(point)[counted])
    return np.concatenate([found, beyond(subject.time[counted], far)])
