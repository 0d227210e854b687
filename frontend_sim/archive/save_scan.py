"""A scan, while it goes on or when it is finished, becomes a record."""

from __future__ import annotations

import os
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, fields
from pathlib import Path
from typing import Protocol

from frontend_sim.archive.grid import grid_results
from frontend_sim.archive.provenance import document, refuse_changed, source_files
from frontend_sim.archive.reading_back import read_back
from frontend_sim.archive.room import check_room
from frontend_sim.archive.target import new_file, record_target
from frontend_sim.archive.writer import ScanWriter
from frontend_sim.measure.checks import Keeper, evaluated
from frontend_sim.measure.checks.impossible import refuse_impossible_checks
from frontend_sim.measure.result import Result
from frontend_sim.measure.scan import scan_report
from frontend_sim.scenario.channel_scenario import ChannelScenario
from frontend_sim.scenario.scan_scenario import ScanScenario
from frontend_sim.simulation import ScanRun, ScanSimulation
from frontend_sim.simulation.run import GridReport, RunBlock

Progress = Callable[[float], None]


class ScanSource(Protocol):
    """What the record of a scan is made from; ``frontend_sim.simulation.ScanSimulation`` is one."""

    @property
    def scenario(self) -> ScanScenario:
        """What is simulated."""

    @property
    def channels(self) -> Mapping[str, ChannelScenario]:
        """Name -> the channel as a scenario of its own."""

    @property
    def notes(self) -> tuple[str, ...]:
        """What was decided on the way, whole after the last block."""

    def notes_of(self, name: str) -> tuple[str, ...]:
        """Return what was decided on the way for one channel."""

    def grid_of(self, name: str) -> GridReport | None:
        """Return how good the grid of a channel was."""

    def blocks(self, progress: Progress | None = None) -> Iterable[tuple[str, RunBlock]]:
        """Run, and return the results block by block, each with its channel's name."""


def record_scan(
    simulation: ScanSource,
    path: str | os.PathLike[str],
    *,
    overwrite: bool = False,
    progress: Progress | None = None,
    results: Iterable[Result] = (),
    inputs: Iterable[Path] = (),
) -> Path:
    """Run a scan and store it as it goes on; parameters, result and errors as ``record_run``.

    ``results`` are rows about the scan as a whole; those on timing and crosstalk are added.
    """
    scenario = simulation.scenario
    prepared = simulation if isinstance(simulation, ScanSimulation) else None
    target = record_target(path, overwrite, [*scenario.files(), *inputs])
    refuse_impossible_checks(scenario, prepared=prepared)
    if prepared is not None:
        check_room(prepared, target)
    report = scan_report(scenario, prepared)
    keepers = {name: Keeper(channel) for name, channel in simulation.channels.items()}
    files = source_files(scenario)
    resolved = document(scenario, files, target.parent)
    with new_file(target, path, overwrite) as temporary:
        with ScanWriter(temporary, path, scenario, simulation.channels, resolved) as writer:
            for name, block in simulation.blocks(progress):
                writer.append(name, block)
                keepers[name].add(block)
            refuse_changed(files)
            told = {
                name: (simulation.notes_of(name), _rows(keeper, simulation, name))
                for name, keeper in keepers.items()
            }
            writer.finish(simulation.notes, [*report.results(), *results], told)
        read_back(temporary, path)
    return target


def _rows(keeper: Keeper, simulation: ScanSource, name: str) -> list[Result]:
    """Return the results of one channel."""
    grid = simulation.grid_of(name)
    return [*grid_results(grid), *evaluated(keeper, _Graded(grid))]


@dataclass(frozen=True)
class _Graded:
    """Where a run's checks look for the report on its grid."""

    grid: GridReport | None


@dataclass(frozen=True)
class FinishedScan:
    """A finished scan as the source of one block for each channel."""

    run: ScanRun

    @property
    def scenario(self) -> ScanScenario:
        """What was simulated."""
        return self.run.scenario

    @property
    def channels(self) -> Mapping[str, ChannelScenario]:
        """Name -> the channel as a scenario of its own."""
        scenario = self.run.scenario
        return {each.channel: each for each in scenario.channels(scenario.run_length())}

    @property
    def notes(self) -> tuple[str, ...]:
        """What was decided on the way."""
        return self.run.notes

    def notes_of(self, name: str) -> tuple[str, ...]:
        """Return what was decided on the way for one channel."""
        return self.run.channels[name].notes

    def grid_of(self, name: str) -> GridReport | None:
        """Return how good the grid of a channel was."""
        return self.run.channels[name].grid

    def blocks(self, progress: Progress | None = None) -> Iterable[tuple[str, RunBlock]]:
        """Return the arrays of each channel."""
        names = [field.name for field in fields(RunBlock) if field.name != "start"]
        for channel, run in self.run.channels.items():
            yield channel, RunBlock(0, **{name: getattr(run, name) for name in names})
        if progress is not None:
            progress(1.0)
