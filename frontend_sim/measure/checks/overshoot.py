"""Evaluates how far a signal goes beyond its final value."""

from __future__ import annotations

import math

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.checks.answer import Answer, in_volts, scaled
from frontend_sim.measure.checks.change import change_of
from frontend_sim.measure.checks.places import excursion
from frontend_sim.measure.checks.subject import Real, Subject
from frontend_sim.measure.response.pole import poles_of
from frontend_sim.scenario.checks.overshoot import OvershootCheck


def overshoot(check: OvershootCheck, subject: Subject) -> Answer:
    """Return the largest excursion beyond the final value, in the direction of the change.

    On a linear chain it is that of the exact response, between conversions too.

    Raises
    ------
    MeasureError
        If the stimulus does not rest, or the point returns to where it was.
    """
    rest = change_of(subject, check.point, check.after, "an overshoot")
    sign = math.copysign(1.0, rest.height)
    if rest.tail is not None:
        volts, method = rest.tail.furthest(sign), "turning points of the exact response"
    else:
        times, values = subject.time, subject.at_conversions(check.point)
        seen = values[(times >= rest.since) & (times < rest.until)]
        if len(seen) == 0:
            raise MeasureError("no conversion falls between the event and the next one")
        volts = max(float(np.max(sign * (seen - rest.final))), 0.0)
        method = "furthest conversion (nothing is known between them)"
    value, unit = scaled(check.at_most, volts, subject.adc.lsb, abs(rest.height))
    most = in_volts(check.at_most, subject.adc.lsb, abs(rest.height))

    def where() -> Real:
        return excursion(subject, check.point, rest, lambda seen: sign * (seen - rest.final) - most)

    limit = float(check.at_most)
    return Answer(value, unit, limit, "at most", method, lambda: advice(subject), where=where)


def overshoot_possible(check: OvershootCheck, subject: Subject) -> None:
    """Refuse what has no overshoot. Raises MeasureError as ``change_of`` does."""
    change_of(subject, check.point, check.after, "an overshoot")


def advice(subject: Subject) -> str:
    """Return which stage to damp first."""
    poles = [pole for pole in poles_of(subject.chain) if pole.quality_factor is not None]
    worst = max(poles, key=lambda pole: pole.quality_factor or 0.0, default=None)
    if worst is None or (worst.quality_factor or 0.0) <= 0.5:
        return "slow the edges of the stimulus, or lower the corner of the last stage"
    return (
        f"give {worst.stage!r} more damping: its poles have a quality factor of "
        f"{worst.quality_factor:.3g} at {worst.natural_frequency:.4g} Hz"
    )
