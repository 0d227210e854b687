"""When a point of the chain has settled: its last exit from the band, never the first entry."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.checks import words
from frontend_sim.measure.checks.rest import Rest, rest_of
from frontend_sim.measure.checks.subject import Real, Subject
from frontend_sim.measure.checks.tail import Tail
from frontend_sim.measure.transition.settling import sampled_settling
from frontend_sim.quantities import Limit
from frontend_sim.scenario.checks.settling import SettlingCheck

RETURNS = 1e-9
"""A change below this share of the largest excursion counts as none."""

ROUNDING = 1e-9
"""Ticks are not rounded up for this share of their number, and bands not exceeded by it."""

PROVEN = (
    "last exit of the exact response from the band; a bound on the sum of its modes shows that "
    "nothing follows while the stimulus rests"
)
SAMPLED = "last exit of the conversions from the band (nothing is known between them)"
AS_GIVEN = "as given"
AT_REST = "where the chain ends while the stimulus rests"
LAST = "last conversion; the run goes on for as long again as it took to settle"


@dataclass(frozen=True)
class Settled:
    """When a point of the chain has settled.

    Parameters
    ----------
    since : instant of the event [s]
    final : value that the band lies around;  band : half its width [V]
    exit : instant at which the point leaves the band for the last time [s]
    method : how it was found;  ends : how the final value was
    tail : the exact way there, where it is known
    """

    since: float
    final: float
    band: float
    exit: float
    method: str
    ends: str
    tail: Tail | None = None

    @property
    def seconds(self) -> float:
        """Time from the event to the last exit [s]."""
        return max(self.exit - self.since, 0.0)


def settled(check: SettlingCheck, subject: Subject) -> Settled:
    """Return when a point of the chain has settled.

    Raises
    ------
    MeasureError
        If the run ends before it can be told.
    """
    rest = rest_of(subject, check.point, check.after)
    since = event_of(check, rest)
    times, values = _stretch(check, subject, since, rest)
    if rest is not None and rest.tail is not None and check.final is None:
        band = _band(check, subject, rest.height, lambda: _largest(rest.tail))
        exit_ = since + rest.tail.leaves(band)
        # Codes come from the conversions: none of them may tell otherwise.
        outside = times[np.abs(values - rest.final) > band * (1.0 + ROUNDING) + _grain(subject)]
        latest = max(float(outside[-1]), exit_) if len(outside) else exit_
        return Settled(since, rest.final, band, latest, PROVEN, AT_REST, rest.tail)
    if len(times) == 0:
        raise MeasureError(
            f"no conversion follows the event at {words.time(since)} before the next one, or the "
            "end of the run; lengthen simulation.duration, or raise adc.rate"
        )
    final, ends = _final(check, rest, values)
    height = rest.height if rest is not None else final - float(values[0])
    band = _band(check, subject, height, lambda: float(np.max(np.abs(values - final))))
    sampled = sampled_settling(times, values, final, band, since)
    exit_ = since if sampled.last_outside is None else since + sampled.settled
    if ends == LAST and exit_ - since > float(times[-1]) - exit_:
        raise MeasureError(
            f"it has not settled: it leaves the band around its last value until "
            f"{words.time(exit_ - since)} after the event, and the run ends after "
            f"{words.time(float(times[-1]) - since)}; widen the band, lengthen "
            "simulation.duration, or give final"
        )
    return Settled(since, final, band, exit_, SAMPLED, ends)


def proven_time(check: SettlingCheck, subject: Subject) -> float | None:
    """Return the time from the event to the last exit of the exact response [s], without a run.

    Returns
    -------
    None where the exact response is not known, or the check tells a final value of its own.

    Raises
    ------
    MeasureError
        If the point does not move.
    """
    rest = rest_of(subject, check.point, check.after)
    if rest is None or rest.tail is None or check.final is not None:
        return None
    return rest.tail.leaves(_band(check, subject, rest.height, lambda: _largest(rest.tail)))


def event_of(check: SettlingCheck, rest: Rest | None) -> float:
    """Return the instant that the time runs from [s]."""
    if check.after is not None:
        return check.after
    return 0.0 if rest is None else rest.since


def _stretch(
    check: SettlingCheck, subject: Subject, since: float, rest: Rest | None
) -> tuple[Real, Real]:
    """Return instants and values of the conversions from the event to the next one, if any."""
    until = math.inf if rest is None else rest.until
    first, last = np.searchsorted(subject.time, [since, until])
    return subject.time[first:last], subject.at_conversions(check.point)[first:last]


def _final(check: SettlingCheck, rest: Rest | None, values: Real) -> tuple[float, str]:
    if check.final is not None:
        return check.final, AS_GIVEN
    if rest is not None:
        return rest.final, AT_REST
    return float(values[-1]), LAST


def _band(
    check: SettlingCheck, subject: Subject, height: float, largest: Callable[[], float]
) -> float:
    """Return half the width of the band [V]."""
    limit = check.within
    assert isinstance(limit, Limit)  # its field reads one
    whole = abs(height)
    if limit.unit == "1":
        most = largest()
        whole = whole if whole > RETURNS * most else most
        if whole == 0.0:
            raise MeasureError(
                "the point does not move, so a share of its change is nothing; give within in LSB "
                "or V, or an event in the stimulus"
            )
    return float(limit) * limit.scale(subject.adc.lsb, whole)


def _largest(tail: Tail | None) -> float:
    assert tail is not None
    return max(tail.furthest(1.0), tail.furthest(-1.0), abs(tail.departure))


def _grain(subject: Subject) -> float:
    """Return what rounding may add to a voltage [V]."""
    return 1e-12 * max(abs(subject.adc.low), abs(subject.adc.high))
