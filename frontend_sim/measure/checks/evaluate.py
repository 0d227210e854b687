"""All checks of a scenario become verdicts."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

from frontend_sim.errors import InputError, MeasureError, ModelError, ScenarioError
from frontend_sim.measure.checks.keeper import Keeper
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.checks.table import EVALUATIONS
from frontend_sim.measure.result import Result
from frontend_sim.scenario.check import problem_of
from frontend_sim.scenario.checks.rules import labels
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import Simulation
from frontend_sim.simulation.finished import Finished

if TYPE_CHECKING:
    from frontend_sim.scenario.checks import AnyCheck


def evaluate_checks(run: Finished | Simulation) -> tuple[Result, ...]:
    """Hold a run against the checks of its scenario.

    A check that the run cannot answer fails, and its method says why: nothing passes in silence.

    Parameters
    ----------
    run : a ``Run``, an open ``Record``, or a ``Simulation``, which is then run

    Returns
    -------
    For each check its verdict, followed by the measures that were found beside it, without one.

    Raises
    ------
    ScenarioError
        If no run of the scenario could answer a check, see ``refuse_impossible``.
    """
    if not isinstance(run, Simulation):
        return tuple(_evaluated(Subject(run.scenario, run)))
    keeper = Keeper(run.scenario)
    refuse_impossible(run.scenario, prepared=run)
    for block in run.blocks():
        keeper.add(block)
    return evaluated(keeper, run)


def evaluated(keeper: Keeper, simulation: object, sensitivities: bool = True) -> tuple[Result, ...]:
    """Hold what was kept of a run against the checks of its scenario.

    Parameters
    ----------
    keeper : that saw all blocks
    simulation : what they came from
    sensitivities : whether checks that fail also say which key to change, and to what, which
        takes several further runs
    """
    prepared = simulation if isinstance(simulation, Simulation) else None
    finished = keeper.finished(getattr(simulation, "grid", None))
    subject = Subject(keeper.scenario, finished, prepared)
    return tuple(_evaluated(subject) if sensitivities else verdicts_on(subject))


def refuse_impossible(
    scenario: Scenario, name: str = "", prepared: Simulation | None = None
) -> None:
    """Refuse checks that no run of the scenario could answer, before it is run.

    Parameters
    ----------
    name : what the scenario is called in messages
    prepared : the simulation, where there is one already

    Raises
    ------
    ScenarioError
        If there is one; ``problems`` lists them with key and line.
    """
    if not scenario.check:
        return
    subject = Subject(scenario, prepared=prepared)
    problems = []
    for position, check in enumerate(scenario.check):
        possible = EVALUATIONS[check.kind].possible
        if possible is None:
            continue
        try:
            possible(check, subject)
        except (MeasureError, ModelError) as error:
            problems.append(problem_of(scenario, ("check", position), str(error)))
    if problems:
        raise ScenarioError(problems, name)


def verdicts_on(subject: Subject) -> Iterator[Result]:
    """Return the verdict on each check, followed by what was found beside it."""
    checks = subject.scenario.check
    for check, label in zip(checks, labels(checks), strict=True):
        yield from results_of(check, label, subject)


def verdict_on(subject: Subject, position: int) -> Result:
    """Return the verdict on one check; positions count from 0."""
    checks = subject.scenario.check
    return results_of(checks[position], labels(checks)[position], subject)[0]


def _evaluated(subject: Subject) -> Iterator[Result]:
    """Return the verdicts; those that fail say what to change first, by the sensitivities."""
    from frontend_sim.measure.sensitivity.suggestion import advised

    return advised(subject.scenario, subject.run, tuple(verdicts_on(subject)))


def results_of(check: AnyCheck, label: str, subject: Subject) -> tuple[Result, ...]:
    """Return the verdict on one check and what was found beside it, under a name."""
    try:
        return EVALUATIONS[check.kind].measure(check, subject).results(label)
    except InputError as error:
        return (Result(label, None, verdict="fails", method=f"cannot be told: {error}"),)
