"""Rise time and delay of a transition."""

from __future__ import annotations

from dataclasses import dataclass

from numpy.typing import ArrayLike

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import finite
from frontend_sim.measure.transition.crossing import first_crossing, last_crossing_before
from frontend_sim.measure.transition.levels import Transition


@dataclass(frozen=True)
class Duration:
    """A time read from samples, between whose instants nothing is known.

    Parameters
    ----------
    value : with straight lines between the samples, an estimate [s]
    least, most : bounds, if the signal passes no level unseen, forth and back between two samples
        [s]
    """

    value: float
    least: float
    most: float


def rise_time(
    times: ArrayLike,
    values: ArrayLike,
    *,
    initial: float | None = None,
    final: float | None = None,
    low: float = 0.1,
    high: float = 0.9,
) -> Duration:
    """Return the time from 10 % to 90 % of the way; a fall counts like a rise.

    From the last passage of the lower level before the first passage of the upper one. Source: the
    transition duration of IEEE 181 (from memory).

    Parameters
    ----------
    times : increasing, shape (N,) [s]
    values : shape (N,) [V]
    initial, final : levels [V]; left out, the first and the last sample
    low, high : shares of the way [1]

    Raises
    ------
    MeasureError
        If the record does not hold both passages, or the shares are out of order.
    """
    if not 0.0 < low < high < 1.0:
        raise MeasureError(f"shares of the way must rise between 0 and 1, not {low:g} to {high:g}")
    transition = Transition.of(times, values, initial, final)
    upper = first_crossing(transition, high)
    lower = last_crossing_before(transition, low, upper.earliest)
    least = max(upper.earliest - lower.latest, 0.0)
    return Duration(upper.time - lower.time, least, upper.latest - lower.earliest)


def delay(
    times: ArrayLike,
    values: ArrayLike,
    start: float,
    *,
    initial: float | None = None,
    final: float | None = None,
    share: float = 0.5,
) -> Duration:
    """Return the time from an event until half the way is first done.

    Parameters
    ----------
    times : increasing, shape (N,) [s]
    values : shape (N,) [V]
    start : instant of the event [s]
    initial, final : levels [V]; left out, the first and the last sample
    share : of the way [1]

    Raises
    ------
    MeasureError
        If the record does not hold the passage.
    """
    if not 0.0 < share < 1.0:
        raise MeasureError(f"the share of the way must lie between 0 and 1, not {share!r}")
    found = first_crossing(Transition.of(times, values, initial, final), share)
    begin = finite(start, "the start")
    return Duration(found.time - begin, found.earliest - begin, found.latest - begin)
