"""A night in numbers."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from frontend_sim.archive.set_table import SetTable
from frontend_sim.measure.checks.quiet import quiet_checks
from frontend_sim.measure.statistics import PassRate, pass_rate
from frontend_sim.quantities.counting import counted, share_of
from frontend_sim.summary.check_summary import CheckSummary, summarize_check
from frontend_sim.summary.measure_summary import MeasureSummary, measure_summaries
from frontend_sim.summary.population import Population

Real = NDArray[np.float64]

HOLDS, FAILS, INCOMPLETE = 0, 1, 3
"""Exit statuses."""


@dataclass(frozen=True, eq=False)
class NightSummary:
    """What a replayed set says.

    Parameters
    ----------
    table : of the set
    population : its runs by their kind
    counts : verdict -> runs
    rate : share of the draws in which every check holds, with its interval; None without draws
    group : of draws that the yield is that of, the worst of several; "" where there is but one
    checks : one after the other, those with failures first
    measures : that are no checks, one after the other
    errors : name and reason of each run that gave no result
    warnings : what a reader must know before believing the rest
    """

    table: SetTable
    population: Population
    counts: Counter[str]
    rate: PassRate | None
    group: str
    checks: tuple[CheckSummary, ...]
    measures: tuple[MeasureSummary, ...]
    errors: tuple[tuple[str, str], ...]
    warnings: tuple[str, ...]

    @property
    def runs(self) -> int:
        """Number of runs that the table has."""
        return len(self.table.names)

    @property
    def status(self) -> int:
        """Exit status: 3 a run is missing or gave no result, else 1 a check fails, 0 all hold."""
        if self.errors or not self.table.complete:
            return INCOMPLETE
        return FAILS if self.counts["fails"] else HOLDS

    def parameters_of(self, run: int) -> dict[str, float | str]:
        """Return the varied keys of a run, without those that have their nominal value there."""
        found: dict[str, float | str] = {}
        for key, values in self.table.parameters.items():
            value = values[run].item()
            if value != "" and value == value:
                found[key] = value
        return found

    def unit_of(self, key: str) -> str:
        """Return the unit of a varied key, in SI; "" for text."""
        columns = self.table.columns
        return next((c.unit for c in columns if c.role == "parameter" and c.of == key), "")


def summarize(table: SetTable) -> NightSummary:
    """Return what a replayed set says."""
    population = Population.of(table.names)
    verdicts = table.verdicts
    counts = Counter(verdicts.tolist())
    held = verdicts == "holds"
    numbers = numeric_parameters(table)
    quiet = quiet_checks(table.base_values)
    found = (
        summarize_check(column, population, numbers, column.name not in quiet)
        for column in table.checks
    )
    checks = sorted((each for each in found if each is not None), key=lambda each: -each.fails)
    # Between groups that hold as often decides the check that fails the most.
    margin = checks[0].column.margin if checks else np.zeros(len(verdicts))
    group, drawn = population.sample(verdicts != "none", held, margin)
    rate = None
    if np.any(drawn):
        rate = pass_rate(int(np.count_nonzero(held[drawn])), int(np.count_nonzero(drawn)))
    failed = np.flatnonzero(verdicts == "error")
    told = table.texts("error")
    errors = tuple((table.names[run], str(told[run])) for run in failed.tolist())
    return NightSummary(
        table, population, counts, rate, group, tuple(checks),
        tuple(measure_summaries(table, population, numbers)), errors,
        tuple(_warnings(table, checks, len(errors))),
    )  # fmt: skip


def numeric_parameters(table: SetTable) -> dict[str, Real]:
    """Return the varied keys that hold numbers: key -> its value in each run, shape (R,)."""
    found = {}
    for key, values in table.parameters.items():
        if values.dtype.kind == "f":
            found[key] = np.asarray(values, dtype=np.float64)
    return found


def _warnings(table: SetTable, checks: list[CheckSummary], errors: int) -> Iterator[str]:
    missing = table.planned - len(table.names)
    if missing:
        share = share_of(missing, table.planned, "run")
        yield f"missing: {share}; the next replay goes on from there"
    elif not table.complete and not errors:
        yield "stopped before it knew whether this is all; the next replay goes on from there"
    if errors:
        share = share_of(errors, table.planned, "run")
        yield f"no result from {share}, which counts as not holding"
    few: dict[tuple[int, int], list[str]] = {}
    for check in checks:
        yield from check.warnings
        if check.rate is not None and check.limits is None:
            few.setdefault((check.rate.total, check.draws_needed), []).append(check.name)
    for (drawn, needed), names in few.items():
        yield (
            f"{', '.join(names)}: {counted(drawn, 'draw is', 'draws are')} too few for a limit "
            f"that holds 95 % with 95 % confidence; {needed} do"
        )
