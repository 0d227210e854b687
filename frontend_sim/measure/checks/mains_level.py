"""Evaluates mains hum in the codes."""

from __future__ import annotations

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.checks import words
from frontend_sim.measure.checks.answer import Answer, scaled
from frontend_sim.measure.checks.still import standing
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.level import decibel
from frontend_sim.measure.mains.search import mains_levels
from frontend_sim.measure.result import Result
from frontend_sim.measure.spectrum.window import WINDOWS
from frontend_sim.scenario.checks.mains_level import MainsLevelCheck


def mains_level(check: MainsLevelCheck, subject: Subject) -> Answer:
    """Return the peak value of the strongest of mains and its harmonics in the codes.

    Raises
    ------
    MeasureError
        If the record is too short, or a harmonic lies above half the rate.
    """
    found = mains_levels(
        subject.voltage[subject.first_after(check.after) :],
        subject.adc.true_rate,
        mains=check.frequency,
        deviation=check.deviation,
        harmonics=check.harmonics,
    )
    worst = int(np.argmax(found.amplitude))
    volts = float(found.amplitude[worst])
    value, unit = scaled(check.at_most, volts, subject.adc.lsb, subject.whole)
    limit, where = float(check.at_most), float(found.frequency[worst])
    beside = tuple(
        Result(f"level at {f:.6g} Hz", float(a), "V", method="peak value")
        for f, a in zip(found.frequency, found.amplitude, strict=True)
    )

    def advice() -> str:
        return (
            f"attenuate {where:.6g} Hz by {decibel(value / limit):.1f} dB more: a notch, a lower "
            "corner, or an average over whole periods"
        )

    method = f"least squares under a Hann window; strongest at {where:.6g} Hz"
    method += standing(subject, check.after)
    return Answer(value, unit, limit, "at most", method, advice, beside)


def mains_possible(check: MainsLevelCheck, subject: Subject) -> None:
    """Refuse harmonics above half the rate, and a run that is too short.

    Raises
    ------
    MeasureError
        If either is so.
    """
    half = 0.5 * subject.adc.true_rate
    highest = check.harmonics * check.frequency * (1.0 + check.deviation)
    if highest >= half:
        raise MeasureError(
            f"harmonic {check.harmonics} reaches {words.frequency(highest)}, at or above half the "
            f"conversion rate, {words.frequency(half)}; ask for fewer, or raise adc.rate"
        )
    lowest, span = check.frequency * (1.0 - check.deviation), subject.duration - check.after
    least = WINDOWS["hann"].half_width / lowest
    if span < least:
        raise MeasureError(
            f"{words.time(max(span, 0.0))} of run tell no {words.frequency(check.frequency)} from "
            f"the offset; it takes at least {words.time(least)}: lengthen simulation.duration"
        )
