"""Evaluates where the pass band ends."""

from __future__ import annotations

import math

from frontend_sim.analog.chain import Chain
from frontend_sim.errors import MeasureError
from frontend_sim.measure.checks import words
from frontend_sim.measure.checks.answer import Answer, nearer
from frontend_sim.measure.checks.speed import strongest_lever
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.response.gain import corners_of, largest_gain
from frontend_sim.measure.response.step_response import StepResponse
from frontend_sim.measure.result import Bound
from frontend_sim.scenario.checks.corner import CornerCheck


def corner(check: CornerCheck, subject: Subject) -> Answer:
    """Return the outermost corner on one side: 0 or infinity where the band does not end there.

    Raises
    ------
    MeasureError
        If the chain passes nothing, or has no largest gain.
    """
    upper = check.side == "upper"
    value = _corner(subject.response, upper)

    def advice(side: Bound) -> str:
        limit = check.at_most if side == "at most" else check.at_least
        assert limit is not None
        if not 0.0 < value < math.inf:
            kind = "low" if upper else "high"
            return f"put in a {kind} pass with its corner at {words.frequency(limit)}"
        lever = strongest_lever(subject.chain, lambda chain: _of_chain(chain, upper))
        way = "lower" if side == "at most" else "raise"
        if lever is None:
            return f"{way} the corner of the filter by {words.percent(limit / value)}"
        factor = words.percent(lever.factor(limit / value))
        return f"{way} the corner of {lever.stage!r} by {factor}"

    method = "|H| = |H|max / sqrt(2), outermost crossing"
    return nearer(value, check.at_least, check.at_most, "Hz", method, advice)


def _of_chain(chain: Chain, upper: bool) -> float:
    return _corner(StepResponse.of(chain), upper)


def _corner(response: StepResponse, upper: bool) -> float:
    largest = largest_gain(response)
    if not 0.0 < largest.value < math.inf:
        raise MeasureError(
            f"the largest gain of the chain is {largest.value:g}, so it has no -3 dB corner; "
            "correct the chain"
        )
    corners = corners_of(response, largest)
    if upper:
        ends = bool(corners) and corners[-1].side == "upper"
        return corners[-1].frequency if ends else math.inf
    ends = bool(corners) and corners[0].side == "lower"
    return corners[0].frequency if ends else 0.0
