"""The numbers whose sensitivities are asked for: what the checks of a scenario measure."""

from __future__ import annotations

import math

from frontend_sim.errors import InputError
from frontend_sim.measure.checks.judge import judge, subject_of
from frontend_sim.measure.checks.settled import proven_time
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.checks.verdict import verdict_on
from frontend_sim.measure.result import Result
from frontend_sim.scenario.checks.settling import SettlingCheck
from frontend_sim.scenario.scan_scenario import AnyScenario, ScanScenario


def numbers_of(scenario: AnyScenario, most: int | None = None) -> tuple[float | None, ...]:
    """Return what each check of a scenario measures, None where it cannot be told.

    Where the chain alone tells it, no run is made; nothing random differs between two calls.

    Parameters
    ----------
    most : a run of more conversions is not made; None for no limit

    Raises
    ------
    InputError
        If the scenario cannot be run.
    """
    if isinstance(scenario, ScanScenario):
        return tuple(row.value for row in judge(scenario))
    subject = subject_of(scenario, most)
    return tuple(number_of(subject, position) for position in range(len(scenario.check)))


def number_of(subject: Subject, position: int) -> float | None:
    """Return what one check measures, without a run if it can be."""
    check = subject.scenario.check[position]
    if isinstance(check, SettlingCheck):
        try:
            exact = proven_time(check, subject)
        except InputError:
            exact = None
        if exact is not None:
            return exact
    return verdict_on(subject, position).value


def ratio_power(result: Result) -> float | None:
    """Return d(ln ratio) / d(value): of a level in dB or in bits that of the ratio it stands for.

    Returns
    -------
    None where the value is zero, or there is none.
    """
    if result.unit == "dB":
        return math.log(10.0) / 20.0
    if result.unit == "bit":
        return math.log(2.0)
    if result.value is None or result.value == 0.0 or not math.isfinite(result.value):
        return None
    return 1.0 / result.value
