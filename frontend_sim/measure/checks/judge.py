"""The verdicts of a scenario, run only as far as its checks ask for a run."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import MeasureError
from frontend_sim.measure.checks.impossible import refuse_impossible_checks
from frontend_sim.measure.checks.keeper import Keeper, Kept
from frontend_sim.measure.checks.subject import Real, Subject
from frontend_sim.measure.checks.verdict import verdicts_on
from frontend_sim.measure.result import Result
from frontend_sim.scenario.checks.rules import labels
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.scan_scenario import AnyScenario, ScanScenario
from frontend_sim.simulation import GridReport, ScanSimulation, Simulation


@dataclass(frozen=True, eq=False)
class RunWhenAsked:
    """A run that begins when one of its arrays is first asked for; names as in ``Run``.

    Parameters
    ----------
    simulation : what is run then
    most : a run of more conversions is refused; None for no limit
    """

    simulation: Simulation
    most: int | None = None

    @cached_property
    def _kept(self) -> Kept:
        if self.most is not None and self.simulation.count > self.most:
            raise MeasureError(f"the run has more than {self.most} conversions")
        keeper = Keeper(self.scenario)
        for block in self.simulation.blocks():
            keeper.add(block)
        return keeper.finished(self.simulation.grid)

    @property
    def scenario(self) -> Scenario:
        """What is simulated."""
        return self.simulation.scenario

    @property
    def time(self) -> Real:
        """Sampling instants, shape (K,) [s]."""
        return self._kept.time

    @property
    def pin(self) -> Real:
        """Exact analog values at these instants, shape (K,) [V]."""
        return self._kept.pin

    @property
    def held(self) -> Real:
        """Voltages of the sampling capacitor, shape (K,) [V]; empty without an input network."""
        return self._kept.held

    @property
    def codes(self) -> NDArray[np.int64]:
        """Codes, shape (K,) [counts]."""
        return self._kept.codes

    @property
    def voltage(self) -> Real:
        """The codes read back, shape (K,) [V]."""
        return self._kept.voltage

    @property
    def overrange(self) -> NDArray[np.bool_]:
        """Where the code was clipped, shape (K,)."""
        return self._kept.overrange

    @property
    def grid(self) -> GridReport | None:
        """How good a discrete model was; None in the exact mode."""
        return self._kept.grid


def subject_of(scenario: Scenario, most: int | None = None) -> Subject:
    """Return a scenario for its checks to be made on, run when one asks for its run.

    Parameters
    ----------
    most : a run of more conversions is refused; None for no limit

    Raises
    ------
    InputError
        If the scenario cannot be run.
    """
    simulation = Simulation(scenario)
    return Subject(scenario, RunWhenAsked(simulation, most), simulation)


def judge(scenario: AnyScenario) -> tuple[Result, ...]:
    """Return the verdicts of the checks of a scenario, in their order.

    They are those of ``evaluate_checks`` on its run; without a run where no check needs one. Of a
    scan they are those of its channels, named as ``check_names`` has them.

    Raises
    ------
    InputError
        If the scenario cannot be run.
    """
    if isinstance(scenario, ScanScenario):
        return _of_scan(scenario)
    return tuple(row for row in verdicts_on(subject_of(scenario)) if row.verdict != "none")


def check_names(scenario: AnyScenario) -> tuple[str, ...]:
    """Return the names of the checks as ``judge`` has them; of a scan ``channel: check``."""
    if not isinstance(scenario, ScanScenario):
        return labels(scenario.check)
    return tuple(
        f"{channel.channel}: {label}"
        for channel in scenario.channels(scenario.run_length())
        for label in labels(channel.check)
    )


def _of_scan(scenario: ScanScenario) -> tuple[Result, ...]:
    simulation = ScanSimulation(scenario)
    refuse_impossible_checks(scenario, prepared=simulation)
    keepers = {name: Keeper(channel) for name, channel in simulation.channels.items()}
    for name, block in simulation.blocks():
        keepers[name].add(block)
    found: list[Result] = []
    for name, keeper in keepers.items():
        subject = Subject(keeper.scenario, keeper.finished(simulation.grid_of(name)))
        rows = (row for row in verdicts_on(subject) if row.verdict != "none")
        found += [replace(row, name=f"{name}: {row.name}") for row in rows]
    return tuple(found)
