"""Evaluates how long an edge takes, and how late it is: at a point, and in the codes."""

from __future__ import annotations

import math

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.checks import words
from frontend_sim.measure.checks.answer import Answer, nearer
from frontend_sim.measure.checks.change import change_of
from frontend_sim.measure.checks.passage import first_passage, last_passage
from frontend_sim.measure.checks.places import stretch
from frontend_sim.measure.checks.rest import Rest
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.result import Bound, Result
from frontend_sim.scenario.checks.delay import DelayCheck
from frontend_sim.scenario.checks.latency import LatencyCheck
from frontend_sim.scenario.checks.rise_time import RiseTimeCheck

STEPS = "the engine's own steps, between conversions too"


def rise_time(check: RiseTimeCheck, subject: Subject) -> Answer:
    """Return the time between two shares of the way.

    Raises
    ------
    MeasureError
        As ``change_of`` does, or if the point does not come so far.
    """
    rest = rise_time_possible(check, subject)
    end = first_passage(subject, check.point, rest, check.upper)
    value = end - last_passage(subject, check.point, rest, check.lower, end)
    method = f"{check.lower:.4g} to {check.upper:.4g} of the way; {STEPS}"
    return _between(check, subject, value, method, end - value)


def rise_time_possible(check: RiseTimeCheck, subject: Subject) -> Rest:
    """Refuse what has no edge. Raises MeasureError as ``change_of`` does."""
    return change_of(subject, check.point, check.after, "an edge")


def delay(check: DelayCheck, subject: Subject) -> Answer:
    """Return the time from the event to a share of the way.

    Raises
    ------
    MeasureError
        As ``change_of`` does, or if the point does not come so far.
    """
    rest = delay_possible(check, subject)
    value = first_passage(subject, check.point, rest, check.share) - rest.since
    method = f"from the event at {words.time(rest.since)} to {check.share:.4g} of the way; {STEPS}"
    return _between(check, subject, value, method, rest.since)


def delay_possible(check: DelayCheck, subject: Subject) -> Rest:
    """Refuse what has no delay. Raises MeasureError as ``change_of`` does."""
    return change_of(subject, check.point, check.after, "a delay")


def latency(check: LatencyCheck, subject: Subject) -> Answer:
    """Return the time from the event to the first code that has gone a share of the way.

    Raises
    ------
    MeasureError
        As ``change_of`` does, or if no code comes so far.
    """
    rest = latency_possible(check, subject)
    times = subject.time
    counted = (times >= rest.since) & (times < rest.until)
    gone = (subject.voltage - rest.before) / rest.height
    there = np.flatnonzero(counted & (gone >= check.share))
    if len(there) == 0:
        raise MeasureError(
            f"no code goes {check.share:.0%} of the way before the run, or the rest, ends; "
            "lengthen simulation.duration, or let after name an earlier event"
        )
    value = float(times[there[0]]) - rest.since
    point = first_passage(subject, None, rest, check.share) - rest.since
    beside = (
        Result("delay of the pin", point, "s", method=STEPS),
        Result("from the pin to the code", value - point, "s", method="filter and wait"),
    )

    def advice() -> str:
        if value - point > 0.5 * value:
            return (
                f"raise adc.rate, or take a converter with a shorter filter: of the latency "
                f"{words.time(value - point)} pass behind the pin"
            )
        return _faster(subject, "at most", value, check.at_most)

    method = f"first code at {check.share:.4g} of the way, by its last look at the pin"
    seen = stretch(rest.since, rest.since + value)
    return Answer(value, "s", check.at_most, "at most", method, advice, beside, lambda: seen)


def latency_possible(check: LatencyCheck, subject: Subject) -> Rest:
    """Refuse what has no latency. Raises MeasureError as ``change_of`` does."""
    return change_of(subject, None, check.after, "a latency")


def _between(
    check: RiseTimeCheck | DelayCheck, subject: Subject, value: float, method: str, since: float
) -> Answer:
    """Return a time with the limit that it is nearer to, and what brings it there.

    Parameters
    ----------
    since : instant that it runs from [s]
    """

    def advice(side: Bound) -> str:
        limit = check.at_most if side == "at most" else check.at_least
        return _faster(subject, side, value, limit)

    limits = check.at_least, check.at_most
    return nearer(value, *limits, "s", method, advice, lambda: stretch(since, since + value))


def _faster(subject: Subject, side: Bound, value: float, limit: float | None) -> str:
    """Return which stage to make faster or slower: the one with the slowest pole."""
    slowest, longest = "", 0.0
    for section in subject.chain.sections:
        poles = [pole for block in section.blocks for pole in block.poles if pole.real < 0.0]
        constant = max((-1.0 / pole.real for pole in poles), default=0.0)
        if constant > longest:
            slowest, longest = section.name, constant
    way = "faster" if side == "at most" else "slower"
    if not slowest:
        return "the chain has no stage to make faster; slow or hasten the stimulus itself"
    by = ""
    if limit is not None and value > 0.0 and math.isfinite(limit):
        by = f", about {words.percent(value / limit)}"
    return f"make {slowest!r} {way}{by}: it has the longest time constant, {words.time(longest)}"
