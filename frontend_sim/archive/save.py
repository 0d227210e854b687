"""A run, while it goes on or when it is finished, becomes a record."""

from __future__ import annotations

import os
from collections.abc import Callable, Iterable
from dataclasses import dataclass, fields
from pathlib import Path
from typing import Any, Protocol

from frontend_sim.archive.grid import grid_results
from frontend_sim.archive.provenance import document, refuse_changed, source_files
from frontend_sim.archive.reading_back import read_back
from frontend_sim.archive.room import check_room
from frontend_sim.archive.save_scan import FinishedScan, ScanSource, record_scan
from frontend_sim.archive.target import new_file, record_target
from frontend_sim.archive.writer import Writer
from frontend_sim.measure.checks import Keeper, evaluated, refuse_impossible
from frontend_sim.measure.result import Result
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import ScanRun, ScanSimulation, Simulation
from frontend_sim.simulation.run import GridReport, Run, RunBlock

Progress = Callable[[float], None]


class Source(Protocol):
    """What a record is made from; ``frontend_sim.simulation.Simulation`` is one."""

    @property
    def scenario(self) -> Scenario:
        """What is simulated."""

    @property
    def notes(self) -> tuple[str, ...]:
        """What was decided on the way, whole after the last block."""

    @property
    def grid(self) -> GridReport | None:
        """How good a discrete model was, known after the last block."""

    def blocks(self, progress: Progress | None = None) -> Iterable[RunBlock]:
        """Run, and return the results block by block."""


def record_run(
    simulation: Source | ScanSource,
    path: str | os.PathLike[str],
    *,
    overwrite: bool = False,
    progress: Progress | None = None,
    results: Iterable[Result] = (),
    inputs: Iterable[Path] = (),
) -> Path:
    """Run a simulation and store it as it goes on; memory is bounded by its block.

    The checks of the scenario are evaluated, and their verdicts are stored. They alone need more
    memory: up to 33 bytes for each conversion, see ``measure.checks.Keeper``.

    The record is written to a temporary name in the same directory, read back whole, and renamed:
    it exists complete or not at all.

    Parameters
    ----------
    simulation : what to run
    path : where the record goes
    overwrite : replace a record that is there; anything else is never replaced
    progress : called with the share that is done, from 0 to 1
    results : further rows of ``/measure`` and ``/check``, read after the last block, so that a
        generator can compute them from it
    inputs : further files that must not be replaced, for instance the scenario's; the files of
        the stimulus are known

    Returns
    -------
    The path of the record, links followed.

    Raises
    ------
    OutputError
        If the record cannot be written there, or the disk is too small for it.
    InputError
        If the scenario cannot be run, no run of it could answer one of its checks, or a file of
        the stimulus changes meanwhile.
    """
    if isinstance(simulation, (ScanSimulation, FinishedScan)):
        more: dict[str, Any] = {"overwrite": overwrite, "progress": progress, "inputs": inputs}
        return record_scan(simulation, path, results=results, **more)
    assert isinstance(simulation.scenario, Scenario)  # the source of one channel
    scenario = simulation.scenario
    prepared = simulation if isinstance(simulation, Simulation) else None
    target = record_target(path, overwrite, [*scenario.files(), *inputs])
    refuse_impossible(scenario, prepared=prepared)
    if prepared is not None:
        check_room(prepared, target)
    keeper, files = Keeper(scenario), source_files(scenario)
    resolved = document(scenario, files, target.parent)
    with new_file(target, path, overwrite) as temporary:
        with Writer(temporary, path, scenario, resolved) as writer:
            for block in simulation.blocks(progress):
                writer.append(block)
                keeper.add(block)
            refuse_changed(files)
            checked = evaluated(keeper, simulation)
            rows = [*grid_results(simulation.grid), *checked, *results]
            writer.finish(simulation.notes, rows)
        read_back(temporary, path)
    return target


def save_record(
    run: Run | ScanRun,
    path: str | os.PathLike[str],
    *,
    overwrite: bool = False,
    results: Iterable[Result] = (),
    inputs: Iterable[Path] = (),
) -> Path:
    """Store a finished run; parameters, result and errors are those of ``record_run``."""
    source = FinishedScan(run) if isinstance(run, ScanRun) else _Finished(run)
    return record_run(source, path, overwrite=overwrite, results=results, inputs=inputs)


@dataclass(frozen=True)
class _Finished:
    """A finished run as the source of one block."""

    run: Run

    @property
    def scenario(self) -> Scenario:
        return self.run.scenario

    @property
    def notes(self) -> tuple[str, ...]:
        return self.run.notes

    @property
    def grid(self) -> GridReport | None:
        return self.run.grid

    def blocks(self, progress: Progress | None = None) -> Iterable[RunBlock]:
        names = (field.name for field in fields(RunBlock) if field.name != "start")
        yield RunBlock(0, **{name: getattr(self.run, name) for name in names})
        if progress is not None:
            progress(1.0)
