"""Evaluates how well the chain keeps out what the conversion rate would fold."""

from __future__ import annotations

import math

from frontend_sim.measure.checks import attenuation, words
from frontend_sim.measure.checks.answer import Answer
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.result import Result
from frontend_sim.measure.spectrum.folding import folded
from frontend_sim.scenario.checks.alias_attenuation import AliasAttenuationCheck


def alias_attenuation(check: AliasAttenuationCheck, subject: Subject) -> Answer:
    """Return the least attenuation of what folds: one frequency, or all from some one on.

    Raises
    ------
    MeasureError
        If the gain that it counts from is zero or infinite.
    """
    rate = subject.adc.true_rate
    if check.frequency is not None:
        low, high = check.frequency, check.frequency
    else:
        low, high = (0.5 * rate if check.band is None else rate - check.band), math.inf
    frequencies = attenuation.band(subject, low, high)
    found = attenuation.least_attenuation(subject, frequencies, check.against)
    where = f"at {words.frequency(found.frequency)}"
    if not math.isfinite(found.frequency):
        where = "at high frequencies"
    beside: tuple[Result, ...] = ()
    if math.isfinite(found.frequency):
        lands = folded(found.frequency, rate)
        beside = (Result("folds to", lands, "Hz", method=f"|f - rate round(f / rate)| {where}"),)
    return Answer(
        found.level,
        "dB",
        check.at_least,
        "at least",
        f"|H| of the chain from {words.frequency(low)} on; least {where}"
        if high > low
        else "|H| of the chain",
        lambda: attenuation.advice(
            subject, found, check.at_least, "raise the order of the filter or the conversion rate"
        ),
        beside,
    )
