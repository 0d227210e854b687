"""Evaluates how well a frequency and its harmonics are kept out."""

from __future__ import annotations

import numpy as np

from frontend_sim.measure.checks import attenuation, words
from frontend_sim.measure.checks.answer import Answer
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.scenario.checks.rejection import RejectionCheck


def rejection(check: RejectionCheck, subject: Subject) -> Answer:
    """Return the least attenuation over the band of each harmonic.

    Raises
    ------
    MeasureError
        If the gain that it counts from is zero or infinite.
    """
    bands = [
        attenuation.band(
            subject,
            order * check.frequency * (1.0 - check.deviation),
            order * check.frequency * (1.0 + check.deviation),
        )
        for order in range(1, check.harmonics + 1)
    ]
    found = attenuation.least_attenuation(subject, np.concatenate(bands), check.against)
    method = f"|H| of the chain; least at {words.frequency(found.frequency)}"
    return Answer(
        found.level,
        "dB",
        check.at_least,
        "at least",
        method,
        lambda: attenuation.advice(subject, found, check.at_least, "raise its order, add a notch"),
    )
