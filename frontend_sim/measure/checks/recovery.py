"""Evaluates how long a signal is wrong after an overload."""

from __future__ import annotations

import numpy as np

from frontend_sim.analog.stages.curved_sensor import CurvedSensor
from frontend_sim.errors import MeasureError
from frontend_sim.measure.aliasing.error import Response
from frontend_sim.measure.checks import words
from frontend_sim.measure.checks.answer import Answer
from frontend_sim.measure.checks.places import stretch
from frontend_sim.measure.checks.subject import Real, Subject
from frontend_sim.measure.result import Result
from frontend_sim.quantities import Limit
from frontend_sim.scenario.checks.recovery import RecoveryCheck


def recovery(check: RecoveryCheck, subject: Subject) -> Answer:
    """Return the time from the end of the overload to the last conversion that is wrong.

    Raises
    ------
    MeasureError
        If there is no overload, or the run ends before the point is right again.
    """
    recovery_possible(check, subject)
    limit = check.within
    assert isinstance(limit, Limit)  # its field reads one
    band = float(limit) * limit.scale(subject.adc.lsb, subject.whole)
    free = unlimited(subject, None)
    since = _end_of_overload(check, subject, free)
    own = free if check.point is None else unlimited(subject, check.point)
    wrong = np.abs(subject.at_conversions(check.point) - own) > band
    wrong = wrong | subject.overrange
    if wrong[-1] or since >= subject.time[-1]:
        raise MeasureError(
            "it has not recovered when the run ends, at "
            f"{words.time(float(subject.time[-1]))}; lengthen simulation.duration, or widen within"
        )
    last = np.flatnonzero(wrong & (subject.time > since))
    value = float(subject.time[last[-1]]) - since if len(last) else 0.0
    lost, told = int(np.count_nonzero(wrong)), "by the pin" if check.after is None else "as given"
    beside = (
        Result("overload ends", since, "s", method=told),
        Result("conversions lost", float(lost), "conversions", method="over the whole run"),
    )
    method = "conversions against the same chain without limits (nothing is known between them)"
    late = stretch(since + check.at_most, since + value)
    return Answer(
        value, "s", check.at_most, "at most", method, lambda: _advice(value), beside, lambda: late
    )


def recovery_possible(check: RecoveryCheck, subject: Subject) -> None:
    """Refuse a sensor with a curve, whose limits have no other side. Raises MeasureError."""
    curved = [s for s in subject.scenario.chain if isinstance(s, CurvedSensor)]
    if curved:
        raise MeasureError(
            "the chain begins with a sensor that has a curve, and no straight line tells what it "
            "would give without limits; check the settling from the end of the overload instead, "
            "with after"
        )


def unlimited(subject: Subject, point: str | None) -> Real:
    """Return a point at the conversions, as it would be without any limit, shape (K,) [V]."""
    chain, number = subject.chain, subject.point(point)
    response = Response(chain, number, subject.scenario.simulation.initial)
    return response.to(subject.drives, subject.time) + float(chain.offset[number])


def _end_of_overload(check: RecoveryCheck, subject: Subject, free: Real) -> float:
    if check.after is not None:
        return check.after
    adc = subject.adc
    beyond = np.flatnonzero((free < adc.low) | (free > adc.high))
    if len(beyond) == 0:
        raise MeasureError(
            "nothing overloads the converter: the pin would stay within its range; let after name "
            "the end of an overload inside the chain"
        )
    return float(subject.time[beyond[-1]])


def _advice(value: float) -> str:
    return (
        f"discard {words.wait(value)} after an overload, clamp the signal before the slowest "
        "filter, or give the stage that limits more range"
    )
