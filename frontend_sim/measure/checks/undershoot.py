"""Evaluates how far a signal first goes the wrong way."""

from __future__ import annotations

import math

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.checks.answer import Answer, in_volts, scaled
from frontend_sim.measure.checks.change import change_of
from frontend_sim.measure.checks.places import excursion
from frontend_sim.measure.checks.subject import Real, Subject
from frontend_sim.scenario.checks.undershoot import UndershootCheck

ADVICE = (
    "look for a stage with a zero in the right half plane or one that couples the edge around the "
    "filter, and slow the edges of the stimulus"
)


def undershoot(check: UndershootCheck, subject: Subject) -> Answer:
    """Return the largest excursion behind the value before the event, away from the final one.

    On a linear chain it is that of the exact response, between conversions too.

    Raises
    ------
    MeasureError
        As ``change_of`` does, or if no conversion tells.
    """
    rest = change_of(subject, check.point, check.after, "an undershoot")
    sign = math.copysign(1.0, rest.height)
    if rest.tail is not None:
        volts = max(rest.tail.furthest(-sign) - abs(rest.height), 0.0)
        method = "turning points of the exact response"
    else:
        times, values = subject.time, subject.at_conversions(check.point)
        seen = values[(times >= rest.since) & (times < rest.until)]
        if len(seen) == 0:
            raise MeasureError("no conversion falls between the event and the next one")
        volts = max(float(np.max(sign * (rest.before - seen))), 0.0)
        method = "furthest conversion (nothing is known between them)"
    value, unit = scaled(check.at_most, volts, subject.adc.lsb, abs(rest.height))
    most = in_volts(check.at_most, subject.adc.lsb, abs(rest.height))

    def where() -> Real:
        back = rest.before
        return excursion(subject, check.point, rest, lambda seen: sign * (back - seen) - most)

    limit = float(check.at_most)
    return Answer(value, unit, limit, "at most", method, lambda: ADVICE, where=where)


def undershoot_possible(check: UndershootCheck, subject: Subject) -> None:
    """Refuse what has no undershoot. Raises MeasureError as ``change_of`` does."""
    change_of(subject, check.point, check.after, "an undershoot")
