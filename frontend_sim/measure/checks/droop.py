"""Evaluates how far the top of a pulse sinks."""

from __future__ import annotations

import math

import numpy as np

from frontend_sim.analog.section import Section
from frontend_sim.errors import MeasureError, ModelError
from frontend_sim.measure.checks import words
from frontend_sim.measure.checks.answer import Answer
from frontend_sim.measure.checks.places import stretch
from frontend_sim.measure.checks.rest import before_the_run
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.result import Result
from frontend_sim.measure.transition.droop import droop_of
from frontend_sim.scenario.checks.droop import DroopCheck


def droop(check: DroopCheck, subject: Subject) -> Answer:
    """Return the droop between two instants on the top of a pulse.

    Raises
    ------
    MeasureError
        If the pulse has no height, or the chain no value before the run.
    """
    values = subject.at_instants(check.point, [check.start, check.stop])
    behind = float(np.nextafter(check.stop, np.inf))
    base = _baseline(check, subject)
    found = droop_of([check.start, check.stop], values, check.start, behind, base)
    value = abs(found.droop)
    return Answer(
        value,
        "1",
        check.at_most,
        "at most",
        "values at the two instants by the engine's own steps; 1 - exp(-t/T) behind a high pass",
        lambda: _advice(check, subject, found.droop),
        (Result("tilt", found.tilt, "V/s", method="line between the two instants"),),
        lambda: stretch(check.start, check.stop),
    )


def _baseline(check: DroopCheck, subject: Subject) -> float:
    if check.baseline is not None:
        return check.baseline
    try:
        return before_the_run(subject, subject.chain.points[subject.point(check.point)])
    except ModelError as error:
        raise MeasureError(f"no value before the run to count from: {error}; give baseline") from (
            error
        )


def _advice(check: DroopCheck, subject: Subject, found: float) -> str:
    if not 0.0 < found < 1.0 or check.at_most == 0.0:
        return "shorten the pulse, or couple it directly, without a high pass"
    factor = math.log1p(-found) / math.log1p(-check.at_most)
    blocking = next((part.name for part in subject.chain.sections if _blocks_dc(part)), None)
    what = "the longest time constant" if blocking is None else f"the time constant of {blocking!r}"
    return f"lengthen {what} by {words.percent(factor)} (a lower corner of the high pass)"


def _blocks_dc(part: Section) -> bool:
    return any(
        block.order > 0 and abs(complex(block.response(np.zeros(1, complex))[0])) == 0.0
        for block in part.blocks
        if not np.any(block.poles == 0.0)
    )
