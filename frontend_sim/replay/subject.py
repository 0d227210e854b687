"""A scenario on its way through one run: of one channel, or a scan of several."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from io import BytesIO
from typing import Any, Protocol

import numpy as np

from frontend_sim.archive.grid import grid_results
from frontend_sim.archive.room import Room
from frontend_sim.archive.writer import ScanWriter, Writer
from frontend_sim.measure.checks import (
    Keeper,
    extent_of,
    failures_in,
    refuse_impossible,
    subject_of_run,
    verdicts_on,
)
from frontend_sim.measure.checks.impossible import refuse_impossible_checks
from frontend_sim.measure.checks.subject import Subject as CheckedRun
from frontend_sim.measure.result import Result
from frontend_sim.measure.scan import scan_report
from frontend_sim.scenario import AnyScenario, ScanScenario
from frontend_sim.simulation import GridReport, RunBlock, ScanSimulation, Simulation
from frontend_sim.simulation.stretches import Stretches
from frontend_sim.simulation.together import together as side_by_side

Part = tuple[str, RunBlock]
"""A block, and the channel that it belongs to; "" where there is one only."""

AROUND = 100
"""Conversions that are kept before and behind what fails, where nothing else is said."""


class Subject(Protocol):
    """A scenario made ready to run once."""

    def room(self) -> Room:
        """Return what the run takes."""

    def parts(self) -> Iterator[Part]:
        """Run, and return the results part by part."""

    def results(self) -> tuple[Result, ...]:
        """Return measures and verdicts, after the last part."""

    def notes(self) -> tuple[str, ...]:
        """Return what was decided on the way, after the last part."""

    def failures(self, around: float | None) -> Stretches:
        """Return the stretches in which checks fail, after the last part.

        Parameters
        ----------
        around : what they have before and behind that [s]; None for that of ``AROUND`` conversions
        """

    def record(
        self,
        name: str,
        resolved: dict[str, Any],
        parts: Iterable[Part],
        stretches: Stretches | None = None,
    ) -> bytes:
        """Return the record of the run, as its file will have it.

        Parameters
        ----------
        name : what messages call it
        resolved : see ``provenance.document``
        parts : of the run; ``parts()`` itself, or what it gave
        stretches : what of it is kept; None for all of it
        """


def subject_of(scenario: AnyScenario) -> Subject:
    """Return a scenario made ready to run. Raises InputError if it cannot be run."""
    return _Scan(scenario) if isinstance(scenario, ScanScenario) else _Single(scenario)


def together(subjects: Sequence[Subject]) -> None:
    """Let those that can take one pass over their recording; what they give is the same."""
    side_by_side([each.simulation for each in subjects if isinstance(each, _Single)])


class _Single:
    """One chain and its converter."""

    def __init__(self, scenario: Any) -> None:
        self.simulation = Simulation(scenario)
        refuse_impossible(scenario, prepared=self.simulation)
        self._keeper = Keeper(scenario)
        self._results: tuple[Result, ...] | None = None

    def room(self) -> Room:
        return Room.of(self.simulation)

    def parts(self) -> Iterator[Part]:
        for block in self.simulation.blocks():
            self._keeper.add(block)
            yield "", block

    def results(self) -> tuple[Result, ...]:
        if self._results is None:
            # Advice by sensitivities would take several further runs for each that fails.
            checked = verdicts_on(self._subject)
            self._results = (*grid_results(self.simulation.grid), *checked)
        return self._results

    @cached_property
    def _subject(self) -> CheckedRun:
        return subject_of_run(self._keeper, self.simulation)

    def notes(self) -> tuple[str, ...]:
        return self.simulation.notes

    def failures(self, around: float | None) -> Stretches:
        width = AROUND / self.simulation.scenario.adc.true_rate if around is None else around
        return Stretches.about(failures_in(self._subject), width, extent_of(self._subject))

    def record(
        self,
        name: str,
        resolved: dict[str, Any],
        parts: Iterable[Part],
        stretches: Stretches | None = None,
    ) -> bytes:
        memory, scenario = BytesIO(), self.simulation.scenario
        with Writer(memory, name, scenario, resolved, stretches) as writer:
            for _, block in parts:
                writer.append(block)
            writer.finish(self.notes(), self.results())
        return memory.getvalue()


@dataclass(frozen=True)
class _Graded:
    """Where the checks of a channel look for the report on its grid."""

    grid: GridReport | None


class _Scan:
    """Several channels and one converter."""

    def __init__(self, scenario: ScanScenario) -> None:
        self._simulation = ScanSimulation(scenario)
        refuse_impossible_checks(scenario, prepared=self._simulation)
        self._report = scan_report(scenario, self._simulation)
        channels = self._simulation.channels
        self._keepers = {name: Keeper(channel) for name, channel in channels.items()}
        self._told: dict[str, list[Result]] | None = None

    def room(self) -> Room:
        return Room.of(self._simulation)

    def parts(self) -> Iterator[Part]:
        for name, block in self._simulation.blocks():
            self._keepers[name].add(block)
            yield name, block

    def _of_channels(self) -> dict[str, list[Result]]:
        if self._told is None:
            self._told = {}
            for name, subject in self._subjects.items():
                grid = self._simulation.grid_of(name)
                self._told[name] = [*grid_results(grid), *verdicts_on(subject)]
        return self._told

    @cached_property
    def _subjects(self) -> dict[str, CheckedRun]:
        return {
            name: subject_of_run(keeper, _Graded(self._simulation.grid_of(name)))
            for name, keeper in self._keepers.items()
        }

    def failures(self, around: float | None) -> Stretches:
        # Of all channels the same stretches: what one shows may come from another.
        subjects = self._subjects.values()
        slowest = min(subject.adc.true_rate for subject in subjects)
        spans = np.concatenate([failures_in(subject) for subject in subjects])
        begins, ends = zip(*map(extent_of, subjects), strict=True)
        width = AROUND / slowest if around is None else around
        return Stretches.about(spans, width, (min(begins), max(ends)))

    def results(self) -> tuple[Result, ...]:
        of_channels = [
            replace(row, name=f"{name}: {row.name}")
            for name, rows in self._of_channels().items()
            for row in rows
        ]
        return (*self._report.results(), *of_channels)

    def notes(self) -> tuple[str, ...]:
        return self._simulation.notes

    def record(
        self,
        name: str,
        resolved: dict[str, Any],
        parts: Iterable[Part],
        stretches: Stretches | None = None,
    ) -> bytes:
        simulation, memory = self._simulation, BytesIO()
        scenario, channels = simulation.scenario, simulation.channels
        with ScanWriter(memory, name, scenario, channels, resolved, stretches) as writer:
            for channel, block in parts:
                writer.append(channel, block)
            told = {
                channel: (simulation.notes_of(channel), rows)
                for channel, rows in self._of_channels().items()
            }
            writer.finish(self.notes(), self._report.results(), told)
        return memory.getvalue()
