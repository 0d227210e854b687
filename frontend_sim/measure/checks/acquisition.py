"""Evaluates how well the sampling capacitor settles."""

from __future__ import annotations

from functools import partial

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.acquisition import Acquisition, time_needed
from frontend_sim.measure.checks import words
from frontend_sim.measure.checks.answer import Answer
from frontend_sim.measure.checks.places import beyond, nowhere
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.scenario.checks.acquisition import AcquisitionCheck
from frontend_sim.simulation.switched import switched_input

METHODS = {
    "run": "largest distance of the held voltage from the pin without its load",
    "step": "exponential of the closed network over one acquisition",
    "steady": "fixed point of the alternating network",
}


def acquisition(check: AcquisitionCheck, subject: Subject) -> Answer:
    """Return the largest error of acquisition [LSB]."""
    known = _known(subject)
    where = nowhere
    if check.of == "run":
        first = subject.first_after(check.after)
        error = np.abs(subject.held[first:] - subject.pin[first:]) / subject.adc.lsb
        value = float(np.max(error))
        where = partial(beyond, subject.time[first:], error - check.at_most)
    else:
        value = known.step_error if check.of == "step" else known.steady_error
    return Answer(
        value,
        "LSB",
        check.at_most,
        "at most",
        METHODS[check.of],
        lambda: _advice(subject, known, check.at_most),
        where=where,
    )


def acquisition_possible(check: AcquisitionCheck, subject: Subject) -> None:
    """Raise MeasureError where the converter has no input network."""
    _known(subject)


def _known(subject: Subject) -> Acquisition:
    found = Acquisition.of(subject.scenario)
    if found is None:
        raise MeasureError(
            "the converter has no input network; give [adc.input] with its switch_resistance, "
            "sampling_capacitance and acquisition_time, or take the check out"
        )
    return found


def _advice(subject: Subject, known: Acquisition, limit: float) -> str:
    """Return how long an acquisition has to be, and whether there is room for it."""
    found = switched_input(subject.scenario)
    assert found is not None
    needed = time_needed(found.network, known.step, limit * found.adc.lsb)
    closest = found.adc.pattern.closest
    if needed is None or needed >= closest:
        return (
            "no acquisition_time within the conversion period is enough for the largest step: "
            "lower adc.rate or adc.input.source_resistance, or put a buffer before the pin"
        )
    if needed > known.time:
        return (
            f"raise adc.input.acquisition_time from {words.time(known.time)} to "
            f"{words.wait(needed)}, which is enough for the largest step"
        )
    return (
        "the largest step settles in time, so it is what the source does meanwhile: its filter "
        "lags behind the signal, or charge of many conversions adds up; lower "
        "adc.input.source_resistance"
    )
