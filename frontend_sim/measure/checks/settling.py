"""Evaluates how long a signal takes to settle."""

from __future__ import annotations

import math

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.checks import words
from frontend_sim.measure.checks.answer import Answer
from frontend_sim.measure.checks.places import stretch
from frontend_sim.measure.checks.rest import rest_of
from frontend_sim.measure.checks.settled import ROUNDING, Settled, event_of, settled
from frontend_sim.measure.checks.speed import strongest_lever
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.result import Result
from frontend_sim.scenario.channel_scenario import ChannelScenario
from frontend_sim.scenario.checks.rules import beyond_end
from frontend_sim.scenario.checks.settling import SettlingCheck


def settling(check: SettlingCheck, subject: Subject) -> Answer:
    """Return how long a point takes to settle, against the time that is granted.

    On a linear chain whose stimulus rests, the last exit is that of the exact response, at any
    instant (see ``measure.response.decay``); elsewhere it is that of the conversions.
    """
    settling_possible(check, subject)
    found = settled(check, subject)
    return Answer(
        found.seconds,
        "s",
        check.before,
        "at most",
        found.method,
        lambda: _advice(check, found),
        tuple(_beside(check, subject, found)),
        lambda: stretch(found.since + check.before, found.exit),
    )


def settling_possible(check: SettlingCheck, subject: Subject) -> None:
    """Refuse a time that ends after the run, or after the next event of the stimulus.

    Raises
    ------
    MeasureError
        If it does; or if the stimulus rests in the whole run, so that any wait would do. In a scan
        a check may count for channels that rest beside those that do not.
    """
    rest = rest_of(subject, check.point, check.after)
    alone = not isinstance(subject.scenario, ChannelScenario)
    if rest is not None and not rest.begins and check.final is None and alone:
        raise MeasureError(
            f"the stimulus rests from 0 s to the end of the run at {words.time(subject.duration)}, "
            "so there is nothing to settle; let it change within the run, or let after name an "
            "instant"
        )
    since = event_of(check, rest)
    end = since + check.before
    if end > subject.duration * (1.0 + ROUNDING):
        raise MeasureError(beyond_end("before", end, subject.duration))
    if rest is not None and end > rest.until * (1.0 + ROUNDING):
        raise MeasureError(
            f"before grants the time from {words.time(since)} to {words.time(end)}, but the "
            f"stimulus changes again at {words.time(rest.until)}; grant less, or let after name "
            "the last event"
        )


def _beside(check: SettlingCheck, subject: Subject, found: Settled) -> list[Result]:
    lost = int(np.searchsorted(subject.time, found.exit)) - int(
        np.searchsorted(subject.time, found.since)
    )
    if found.exit > subject.time[-1]:
        lost += math.ceil((found.exit - float(subject.time[-1])) * subject.adc.true_rate) - 1
    rows = [
        Result("conversions to discard", float(lost), "conversions", method="after the event"),
        Result("final value", found.final, "V", method=found.ends),
        Result("band", found.band, "V", method="half its width"),
    ]
    if check.timer_clock is not None:
        ticks = math.ceil(found.seconds * check.timer_clock * (1.0 - ROUNDING))
        told = f"of {words.frequency(check.timer_clock)}, rounded up"
        rows.append(Result("timer ticks", float(ticks), "ticks", method=told))
    return rows


def _advice(check: SettlingCheck, found: Settled) -> str:
    wait = f"lengthen the wait to {words.wait(found.seconds)}"
    tail = found.tail
    if tail is None or found.seconds <= 0.0:
        return wait
    lever = strongest_lever(tail.chain, lambda chain: tail.leaves(found.band, chain))
    if lever is None or lever.power >= 0.0:
        return wait
    factor = lever.factor(check.before / found.seconds)
    return (
        f"{wait}, or make {lever.stage!r} faster by {words.percent(factor)} (shorter time "
        "constants, a higher corner)"
    )
