"""Where in time the checks of a run fail."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from frontend_sim.errors import InputError
from frontend_sim.measure.checks.places import NOWHERE, stretch
from frontend_sim.measure.checks.subject import Real, Subject
from frontend_sim.measure.checks.table import EVALUATIONS

if TYPE_CHECKING:
    from frontend_sim.scenario.checks import AnyCheck


def failures_in(subject: Subject) -> Real:
    """Return where in time the checks of a run fail, shape (N, 2) [s].

    A check that fails at some conversions fails there, and one that asks the circuit alone
    nowhere. One that makes its number from all conversions together fails at all of them, and so
    does one that cannot be told.
    """
    found = [_failure(check, subject) for check in subject.scenario.check]
    spans: Real = np.concatenate([NOWHERE, *found])
    return spans


def extent_of(subject: Subject) -> tuple[float, float]:
    """Return the first and the last instant of a run [s].

    Jitter moves the first conversion before its beginning, a delay the last one behind its end.
    """
    time = subject.time
    return float(np.min(time, initial=0.0)), float(np.max(time, initial=subject.duration))


def _failure(check: AnyCheck, subject: Subject) -> Real:
    """Return where a check fails, ``NOWHERE`` also if it holds."""
    whole = stretch(getattr(check, "after", None) or 0.0, subject.duration)
    evaluation = EVALUATIONS[check.kind]
    try:
        answer = evaluation.measure(check, subject)
        if answer.holds:
            return NOWHERE
        if answer.where is not None:
            return answer.where()
    except InputError:
        return whole
    return whole if evaluation.columns else NOWHERE
