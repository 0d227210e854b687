"""A scenario run again, for the numbers that a comparison asks for."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

import numpy as np

from frontend_sim.measure.checks import Keeper, subject_of_run, verdicts_on
from frontend_sim.measure.result import Result
from frontend_sim.measure.scan import scan_results
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.scan_scenario import AnyScenario, ScanScenario
from frontend_sim.simulation import ScanSimulation, Simulation
from frontend_sim.simulation.run import RunBlock

PIN = "pin, mean"
CODES = "codes, mean"
"""Measures that every run has [LSB]."""


def run_again(scenario: AnyScenario) -> tuple[Result, ...]:
    """Run a scenario; return the means of pin and codes, and the results of all checks.

    Of a scan those of each channel, with its name in front, then what is told of the whole.

    Raises
    ------
    InputError
        If the scenario cannot be run.
    """
    if isinstance(scenario, ScanScenario):
        return tuple(_of_scan(scenario))
    simulation, kept = Simulation(scenario), _Kept(scenario)
    for block in simulation.blocks():
        kept.add(block)
    return tuple(kept.results(simulation))


def named(channel: str, name: str) -> str:
    """Return what a signal, a measure or a check of one channel is called in the whole scan."""
    return f"{channel}: {name}"


def _of_scan(scan: ScanScenario) -> Iterator[Result]:
    simulation = ScanSimulation(scan)
    kept = {name: _Kept(channel) for name, channel in simulation.channels.items()}
    for name, block in simulation.blocks():
        kept[name].add(block)
    for name, each in kept.items():
        for row in each.results(simulation.simulation(name)):
            yield replace(row, name=named(name, row.name))
    yield from scan_results(scan)


class _Kept:
    """What is kept of a run, or of one channel of a scan, block by block."""

    def __init__(self, scenario: Scenario) -> None:
        self._keeper, self._lsb = Keeper(scenario), scenario.adc.lsb
        self._sums, self._count = np.zeros(2), 0

    def add(self, block: RunBlock) -> None:
        self._keeper.add(block)
        self._sums += np.sum(block.pin), np.sum(block.voltage)
        self._count += len(block.time)

    def results(self, simulation: Simulation) -> Iterator[Result]:
        for name, total in zip((PIN, CODES), self._sums.tolist(), strict=True):
            mean = total / (self._count * self._lsb) if self._count else None
            yield Result(name, mean, "LSB")
        # Advice by sensitivities would take several further runs for each check that fails.
        yield from verdicts_on(subject_of_run(self._keeper, simulation))
