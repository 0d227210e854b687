"""The checks of a scenario that need no run: what the chain alone, or a few instants, answer."""

from __future__ import annotations

from typing import TYPE_CHECKING

from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.checks.table import EVALUATIONS
from frontend_sim.measure.checks.verdict import results_of
from frontend_sim.scenario.checks.rules import labels

if TYPE_CHECKING:
    from frontend_sim.measure.result import Result
    from frontend_sim.scenario.checks import AnyCheck
    from frontend_sim.scenario.model import Scenario

OF_A_RUN = ("grid-error",)
"""Kinds that read no array of a run, but what is known only after it."""


def checks_before_run(scenario: Scenario) -> tuple[Result, ...]:
    """Return the verdicts on the checks that no run is needed for.

    These are the checks on the chain (corner, rejection, alias attenuation), on noise by its
    budget, and on points of the chain at instants (level, droop, rise time, delay), which the
    engine tells without any conversion.

    Parameters
    ----------
    scenario : whose checks they are

    Returns
    -------
    For each such check its verdict, followed by what was found beside it.
    """
    subject = Subject(scenario)
    named = zip(scenario.check, labels(scenario.check), strict=True)
    return tuple(
        row
        for check, label in named
        if needs_no_run(check)
        for row in results_of(check, label, subject)
    )


def needs_no_run(check: AnyCheck) -> bool:
    """Return whether a check is answered by the scenario alone."""
    if getattr(check, "basis", None) == "budget":
        return True
    return not EVALUATIONS[check.kind].columns and check.kind not in OF_A_RUN
