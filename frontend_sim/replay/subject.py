"""A scenario on its way through one run: of one channel, or a scan of several."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any, Protocol

from frontend_sim.archive.grid import grid_results
from frontend_sim.archive.writer import ScanWriter, Writer
from frontend_sim.measure.checks import Keeper, evaluated, refuse_impossible
from frontend_sim.measure.checks.scan import refuse_impossible_checks
from frontend_sim.measure.result import Result
from frontend_sim.measure.scan import scan_report
from frontend_sim.scenario import AnyScenario, ScanScenario
from frontend_sim.simulation import GridReport, RunBlock, ScanSimulation, Simulation
from frontend_sim.simulation.together import together as side_by_side

Part = tuple[str, RunBlock]
"""A block, and the channel that it belongs to; "" where there is one only."""


class Subject(Protocol):
    """A scenario made ready to run once."""

    def parts(self) -> Iterator[Part]:
        """Run, and return the results part by part."""

    def results(self) -> tuple[Result, ...]:
        """Return measures and verdicts, after the last part."""

    def notes(self) -> tuple[str, ...]:
        """Return what was decided on the way, after the last part."""

    def write(
        self, file: Path, path: object, resolved: dict[str, Any], parts: Iterable[Part]
    ) -> None:
        """Write the record of the run.

        Parameters
        ----------
        file : that does not exist
        path : what messages call it
        resolved : see ``provenance.document``
        parts : of the run; ``parts()`` itself, or what it gave
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

    def parts(self) -> Iterator[Part]:
        for block in self.simulation.blocks():
            self._keeper.add(block)
            yield "", block

    def results(self) -> tuple[Result, ...]:
        if self._results is None:
            # Advice by sensitivities would take several further runs for each that fails.
            checked = evaluated(self._keeper, self.simulation, sensitivities=False)
            self._results = (*grid_results(self.simulation.grid), *checked)
        return self._results

    def notes(self) -> tuple[str, ...]:
        return self.simulation.notes

    def write(
        self, file: Path, path: object, resolved: dict[str, Any], parts: Iterable[Part]
    ) -> None:
        with Writer(file, path, self.simulation.scenario, resolved) as writer:
            for _, block in parts:
                writer.append(block)
            writer.finish(self.notes(), self.results())


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

    def parts(self) -> Iterator[Part]:
        for name, block in self._simulation.blocks():
            self._keepers[name].add(block)
            yield name, block

    def _of_channels(self) -> dict[str, list[Result]]:
        if self._told is None:
            self._told = {}
            for name, keeper in self._keepers.items():
                grid = self._simulation.grid_of(name)
                checked = evaluated(keeper, _Graded(grid), sensitivities=False)
                self._told[name] = [*grid_results(grid), *checked]
        return self._told

    def results(self) -> tuple[Result, ...]:
        of_channels = [
            replace(row, name=f"{name}: {row.name}")
            for name, rows in self._of_channels().items()
            for row in rows
        ]
        return (*self._report.results(), *of_channels)

    def notes(self) -> tuple[str, ...]:
        return self._simulation.notes

    def write(
        self, file: Path, path: object, resolved: dict[str, Any], parts: Iterable[Part]
    ) -> None:
        simulation = self._simulation
        with ScanWriter(file, path, simulation.scenario, simulation.channels, resolved) as writer:
            for name, block in parts:
                writer.append(name, block)
            told = {
                name: (simulation.notes_of(name), rows)
                for name, rows in self._of_channels().items()
            }
            writer.finish(self.notes(), self._report.results(), told)
