"""One check becomes a verdict."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

from frontend_sim.errors import InputError
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.checks.table import EVALUATIONS
from frontend_sim.measure.result import Result
from frontend_sim.scenario.checks.rules import labels

if TYPE_CHECKING:
    from frontend_sim.scenario.checks import AnyCheck


def verdicts_on(subject: Subject) -> Iterator[Result]:
    """Return the verdict on each check, followed by what was found beside it."""
    checks = subject.scenario.check
    for check, label in zip(checks, labels(checks), strict=True):
        yield from results_of(check, label, subject)


def verdict_on(subject: Subject, position: int) -> Result:
    """Return the verdict on one check; positions count from 0."""
    checks = subject.scenario.check
    return results_of(checks[position], labels(checks)[position], subject)[0]


def results_of(check: AnyCheck, label: str, subject: Subject) -> tuple[Result, ...]:
    """Return the verdict on one check and what was found beside it, under a name."""
    try:
        return EVALUATIONS[check.kind].measure(check, subject).results(label)
    except InputError as error:
        return (Result(label, None, verdict="fails", method=f"cannot be told: {error}"),)
