"""Which pairs of values of two keys pass."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

from frontend_sim.errors import InputError
from frontend_sim.scenario.scan_scenario import AnyScenario
from frontend_sim.solve.corners import Corners
from frontend_sim.solve.trial import Bench, Trial, named_checks
from frontend_sim.solve.varied import Varied

POINTS = 15
"""Values of each key."""

MOST_CELLS = 10_000
"""A map of more pairs is refused."""


@dataclass(frozen=True)
class PassMap:
    """The verdict on each pair of values of two keys.

    Parameters
    ----------
    first, second : the keys, along the columns and along the rows
    columns, rows : their values, in SI
    cells : row by row; None where it was interrupted before
    checks : names of those that count; empty for all
    corners : whether all corners of the tolerances were looked at
    runs : how many scenarios were judged
    """

    first: Varied
    second: Varied
    columns: tuple[float, ...]
    rows: tuple[float, ...]
    cells: tuple[tuple[Trial | None, ...], ...]
    checks: tuple[str, ...]
    corners: bool
    runs: int

    @property
    def complete(self) -> bool:
        """Whether every pair was tried."""
        return all(cell is not None for row in self.cells for cell in row)

    @property
    def passing(self) -> int:
        """How many pairs pass."""
        return sum(cell is not None and cell.passes for row in self.cells for cell in row)

    @property
    def tried(self) -> int:
        """How many pairs were tried."""
        return sum(cell is not None for row in self.cells for cell in row)

    def ranges(self, row: int) -> tuple[tuple[float, float], ...]:
        """Return the ranges of values of the first key that pass in a row, as tried, in SI."""
        found: list[tuple[float, float]] = []
        before = False
        for value, cell in zip(self.columns, self.cells[row], strict=True):
            passes = cell is not None and cell.passes
            if passes:
                found = [*found[:-1], (found[-1][0], value)] if before else [*found, (value, value)]
            before = passes
        return tuple(found)

    def stoppers(self, row: int) -> tuple[str, ...]:
        """Return what decides on the pairs of a row that fail, in the order of the columns."""
        failing = (cell for cell in self.cells[row] if cell is not None and not cell.passes)
        return tuple(dict.fromkeys(stopper(cell) for cell in failing))

    def as_dict(self) -> dict[str, Any]:
        """Return plain data for JSON, in SI; None where a pair was not tried."""
        return {
            "columns": _axis(self.first, self.columns),
            "rows": _axis(self.second, self.rows),
            "passes": [[None if c is None else c.passes for c in row] for row in self.cells],
            "score": [[_score(c) for c in row] for row in self.cells],
            "decides": [[None if c is None else stopper(c) for c in row] for row in self.cells],
            "checks": list(self.checks),
            "corners": self.corners,
            "complete": self.complete,
            "runs": self.runs,
        }


def stopper(trial: Trial) -> str:
    """Return what decides on a pair: the name of a check, or that it cannot be run."""
    return trial.decides if trial.results else "cannot be run"


def _axis(key: Varied, values: Sequence[float]) -> dict[str, Any]:
    return {"key": key.key, "unit": key.symbol or "1", "values": list(values)}


def _score(trial: Trial | None) -> float | None:
    return None if trial is None or not math.isfinite(trial.score) else trial.score


class Mapper:
    """Tries all pairs of values of two keys.

    Parameters
    ----------
    scenario : with its checks
    first, second : keys with their domains, along the columns and along the rows
    checks, corners : as for ``Solver``
    points : values of each key, at most

    Raises
    ------
    InputError
        If the keys are the same, there is nothing to check, or too many pairs.
    """

    def __init__(
        self,
        scenario: AnyScenario,
        first: Varied,
        second: Varied,
        *,
        checks: Sequence[str] = (),
        corners: bool = False,
        points: int = POINTS,
    ) -> None:
        """Lay out the pairs; nothing is run yet."""
        if first.key == second.key:
            raise InputError(f"{first.key} is given twice; a map takes two different keys")
        if points < 2 or points**2 > MOST_CELLS:
            most = math.isqrt(MOST_CELLS)
            raise InputError(f"a map takes from 2 to {most} points of each key; given {points}")
        self.first, self.second = first, second
        self.columns, self.rows = first.domain.spread(points), second.domain.spread(points)
        wide = corners or first.of_tolerance or second.of_tolerance
        self.bench = Bench(scenario, (first, second), named_checks(scenario, checks), wide)
        self._corners = 1
        if wide:
            widest = second.placed(first.placed(scenario, self.columns[-1]), self.rows[-1])
            self._corners = Corners.of(widest).count

    @property
    def most_runs(self) -> int:
        """How many scenarios are judged at most."""
        return len(self.columns) * len(self.rows) * self._corners

    def run(self, progress: Callable[[float], None] | None = None) -> PassMap:
        """Try all pairs, and return the map; ``progress`` takes the share that is done."""
        done, whole = 0, len(self.columns) * len(self.rows)
        for row in self.rows:
            for column in self.columns:
                self.bench.trial(column, row)
                done += 1
                if progress is not None:
                    progress(done / whole)
        return self.found()

    def found(self) -> PassMap:
        """Return what is known so far: all of it after ``run``, less after an interruption."""
        trials = self.bench.trials
        cells = tuple(
            tuple(trials.get((column, row)) for column in self.columns) for row in self.rows
        )
        bench = self.bench
        return PassMap(
            self.first, self.second, self.columns, self.rows, cells, bench.checks, bench.corners,
            bench.runs,
        )  # fmt: skip


def pass_map(
    scenario: AnyScenario,
    first: Varied,
    second: Varied,
    *,
    checks: Sequence[str] = (),
    corners: bool = False,
    points: int = POINTS,
    progress: Callable[[float], None] | None = None,
) -> PassMap:
    """Return which pairs of values of two keys pass the checks of a scenario.

    Parameters
    ----------
    first, second : see ``frontend_sim.solve.varied``
    checks, corners, points, progress : see ``Mapper``

    Raises
    ------
    InputError
        As ``Mapper`` does.
    """
    mapper = Mapper(scenario, first, second, checks=checks, corners=corners, points=points)
    return mapper.run(progress)
