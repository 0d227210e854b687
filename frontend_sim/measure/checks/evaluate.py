"""All checks of a scenario become verdicts."""

from __future__ import annotations

from collections.abc import Iterator

from frontend_sim.measure.checks.impossible import refuse_impossible
from frontend_sim.measure.checks.keeper import Keeper
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.checks.verdict import verdicts_on
from frontend_sim.measure.result import Result
from frontend_sim.simulation import Simulation
from frontend_sim.simulation.finished import Finished
from frontend_sim.simulation.stretches import refuse_part


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
    MeasureError
        If it is a record that keeps a part of its run; the verdicts of all of it are in it.
    """
    refuse_part(run, "a verdict")
    if not isinstance(run, Simulation):
        return tuple(_evaluated(Subject(run.scenario, run)))
    keeper = Keeper(run.scenario)
    refuse_impossible(run.scenario, prepared=run)
    for block in run.blocks():
        keeper.add(block)
    return evaluated(keeper, run)


def evaluated(keeper: Keeper, simulation: object) -> tuple[Result, ...]:
    """Hold what was kept of a run against the checks of its scenario.

    Checks that fail also say which key to change, and to what, which takes several further runs;
    ``verdicts_on`` leaves that out.

    Parameters
    ----------
    keeper : that saw all blocks
    simulation : what they came from
    """
    return tuple(_evaluated(subject_of_run(keeper, simulation)))


def subject_of_run(keeper: Keeper, simulation: object) -> Subject:
    """Return what was kept of a run for its checks to be made on; parameters as ``evaluated``."""
    prepared = simulation if isinstance(simulation, Simulation) else None
    finished = keeper.finished(getattr(simulation, "grid", None))
    return Subject(keeper.scenario, finished, prepared)


def _evaluated(subject: Subject) -> Iterator[Result]:
    """Return the verdicts; those that fail say what to change first, by the sensitivities."""
    from frontend_sim.measure.sensitivity.suggestion import advised

    return advised(subject.scenario, subject.run, tuple(verdicts_on(subject)))
