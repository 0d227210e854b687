"""Evaluates how many conversions are clipped."""

from __future__ import annotations

import numpy as np

from frontend_sim.measure.checks.answer import Answer
from frontend_sim.measure.checks.headroom import advice
from frontend_sim.measure.checks.places import instants
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.result import Result
from frontend_sim.scenario.checks.clipping import ClippingCheck


def clipping(check: ClippingCheck, subject: Subject) -> Answer:
    """Return the share of the conversions whose code was clipped at an end of the range."""
    first = subject.first_after(check.after)
    clipped = subject.overrange[first:]
    count = int(np.count_nonzero(clipped))
    beside = (Result("clipped conversions", float(count), "conversions", method="overrange flags"),)
    return Answer(
        count / len(clipped),
        "1",
        check.at_most,
        "at most",
        "overrange flags of the converter",
        lambda: advice(subject, subject.pin[first:], 0.0),
        beside,
        lambda: instants(subject.time[first:][clipped]),
    )
