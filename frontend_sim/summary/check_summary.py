"""What a night says of one check."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from frontend_sim.archive.set_table import CheckColumn
from frontend_sim.errors import MeasureError
from frontend_sim.measure.statistics import (
    PassRate,
    Percentile,
    RankCorrelation,
    ToleranceLimits,
    corner_excess,
    draws_needed,
    pass_rate,
    tolerance_limits,
    worst_run,
)
from frontend_sim.measure.statistics.tolerance_limits import Side
from frontend_sim.summary.population import Population
from frontend_sim.summary.spread import cause_in, causes_of, percentiles_of

Real = NDArray[np.float64]
Flags = NDArray[np.bool_]

COVERAGE, CONFIDENCE = 0.95, 0.95
"""Of the tolerance limits."""

ROUNDING, NOISE = 1e-6, 1.0
"""How far between the corners a response may lie beyond them, as a share of their distance: by
rounding, and of what the codes of each run make with their noise."""


@dataclass(frozen=True, eq=False)
class CheckSummary:
    """One check over all runs of a night.

    Parameters
    ----------
    column : its values in all runs
    runs : how many have it;  fails : how many of them fail
    rate : share of the draws that hold, with its interval; None where nothing was drawn
    group : of draws that yield, percentiles and limits are those of, the worst of several; "" where
        there is but one
    worst : number of the run with the smallest margin
    percentiles : of the values, at ``SHARES``; with intervals where runs are draws. What has no
        value counts as the worst, for the limits too
    side : of those limits: where the check has its limit, ``both`` where runs met two
    limits : that hold 95 % of all that could be drawn, with 95 % confidence; None where there are
        too few draws
    draws_needed : for such limits
    causes : parameters by the rank correlation of the values with them, the strongest first
    warnings : corners that do not bound it
    """

    column: CheckColumn
    runs: int
    fails: int
    rate: PassRate | None
    group: str
    worst: int
    percentiles: tuple[Percentile, ...]
    side: Side
    limits: ToleranceLimits | None
    draws_needed: int
    causes: tuple[RankCorrelation, ...]
    warnings: tuple[str, ...]

    @property
    def name(self) -> str:
        """Name of the check."""
        return self.column.name

    @property
    def cause(self) -> RankCorrelation | None:
        """The strongest cause that chance does not explain; None where there is none."""
        return cause_in(self.causes)

    @property
    def unit(self) -> str:
        """Unit of its values."""
        return self.column.unit


def summarize_check(
    column: CheckColumn, population: Population, parameters: Mapping[str, Real], noisy: bool
) -> CheckSummary | None:
    """Return what a night says of a check, None where no run has it.

    Parameters
    ----------
    parameters : key -> number in each run, shape (R,)
    noisy : whether noise moves it from run to run
    """
    there = column.verdict != ""
    if not np.any(there):
        return None
    fails = column.verdict == "fails"
    group, drawn = population.sample(there, ~fails, column.margin)
    sampled, rate = int(np.count_nonzero(drawn)), None
    if sampled:
        rate = pass_rate(int(np.count_nonzero(drawn & ~fails)), sampled)
    margins = np.where(there, column.margin, np.inf)
    margins[there & np.isnan(column.margin)] = np.nan
    mine = there & population.drawn if sampled else there
    side = _side(column)
    # What has no value fails, as the worst of all would.
    known = np.where(np.isnan(column.value), -np.inf if side == "low" else np.inf, column.value)
    return CheckSummary(
        column,
        int(np.count_nonzero(there)),
        int(np.count_nonzero(there & fails)),
        rate,
        group,
        worst_run(margins),
        # Percentiles of draws where there are some: a grid has no distribution.
        percentiles_of(known[drawn if sampled else there]),
        side,
        _limits(known[drawn], side),
        draws_needed(COVERAGE, CONFIDENCE, side),
        causes_of(column.value, parameters, mine, sampled),
        tuple(_corner_warnings(column, population, parameters, noisy)),
    )


def _side(column: CheckColumn) -> Side:
    met = set(column.bounds[~np.isnan(column.margin)].tolist()) or {column.bound}
    if len(met) > 1:
        return "both"
    return "high" if met == {"at most"} else "low"


def _limits(values: Real, side: Side) -> ToleranceLimits | None:
    """Return the limits to the side that the check cares for, None where draws are too few."""
    try:
        return tolerance_limits(values, COVERAGE, CONFIDENCE, side)
    except MeasureError:
        return None


def _corner_warnings(
    column: CheckColumn, population: Population, parameters: Mapping[str, Real], noisy: bool
) -> Iterator[str]:
    for group in dict.fromkeys(population.group[population.corner].tolist()):
        corners = column.value[population.corner & (population.group == group)]
        between = column.value[population.within_corners(group, parameters)]
        known = corners[np.isfinite(corners)]
        if len(known) == 0 or len(between) == 0:
            continue
        spread = float(np.max(known) - np.min(known))
        size = max(spread, 1e-6 * float(np.max(np.abs(known))))
        found = corner_excess(corners, between, (NOISE if noisy else ROUNDING) * size)
        if found is not None:
            where = f"{group}: " if group else ""
            yield where + found.text(column.name, column.unit)
