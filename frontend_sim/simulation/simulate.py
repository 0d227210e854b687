"""One call from a scenario to its arrays, whether it has one channel or several."""

from __future__ import annotations

from typing import overload

from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.scan_scenario import ScanScenario
from frontend_sim.simulation.engine import BLOCK, Progress, Simulation
from frontend_sim.simulation.run import Run
from frontend_sim.simulation.scan import ScanRun, simulate_scan


@overload
def simulate(scenario: Scenario, progress: Progress | None = None, block: int = BLOCK) -> Run: ...


@overload
def simulate(
    scenario: ScanScenario,
    progress: Progress | None = None,
    block: int = BLOCK,
    discarded: bool = False,
) -> ScanRun: ...


@overload
def simulate(
    scenario: Scenario | ScanScenario, progress: Progress | None = None, block: int = BLOCK
) -> Run | ScanRun: ...


def simulate(
    scenario: Scenario | ScanScenario,
    progress: Progress | None = None,
    block: int = BLOCK,
    discarded: bool = False,
) -> Run | ScanRun:
    """Run a scenario and return its arrays; those of a scan are in ``channels[name]``.

    Parameters
    ----------
    scenario : what to simulate
    progress : called with the share that is done, from 0 to 1
    block : instants of one channel computed at once; it bounds memory and never changes a result
    discarded : of a scan, whether to keep the conversions as well that it throws away

    Raises
    ------
    InputError
        If the scenario cannot be run, see ``Simulation`` and ``ScanSimulation``.
    """
    if isinstance(scenario, ScanScenario):
        return simulate_scan(scenario, progress, discarded)
    simulation = Simulation(scenario, block, progress)
    blocks = list(simulation.blocks(progress))
    return Run.of(scenario, blocks, simulation.grid, simulation.notes)
