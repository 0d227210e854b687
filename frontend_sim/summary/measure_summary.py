"""What a night says of one measure, which is held against nothing."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from frontend_sim.archive.set_table import SetTable
from frontend_sim.measure.statistics import Percentile, RankCorrelation
from frontend_sim.summary.population import Population
from frontend_sim.summary.spread import cause_in, causes_of, percentiles_of, spreads

Real = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class MeasureSummary:
    """One measure over all runs of a night.

    Parameters
    ----------
    name, unit : of the measure
    values : in each run, NaN where it has none, shape (R,)
    runs : how many have it
    lowest, highest : numbers of the runs with the extremes
    group : of draws that percentiles are those of; "" where there is but one, or none
    percentiles : at ``SHARES``; with intervals where runs are draws
    causes : parameters by the rank correlation of the values with them, the strongest first
    """

    name: str
    unit: str
    values: Real
    runs: int
    lowest: int
    highest: int
    group: str
    percentiles: tuple[Percentile, ...]
    causes: tuple[RankCorrelation, ...]

    @property
    def cause(self) -> RankCorrelation | None:
        """The strongest cause that chance does not explain; None where there is none."""
        return cause_in(self.causes)

    @property
    def spreads(self) -> bool:
        """Whether the values differ by more than rounding."""
        return spreads(self.values[~np.isnan(self.values)])


def measure_summaries(
    table: SetTable, population: Population, parameters: Mapping[str, Real]
) -> Iterator[MeasureSummary]:
    """Return what a night says of each measure that is no check and has a value in some run.

    Parameters
    ----------
    parameters : key -> number in each run, shape (R,)
    """
    units = {column.of: column.unit for column in table.columns if column.role == "value"}
    for name, values in table.measures.items():
        there = ~np.isnan(values)
        if not np.any(there):
            continue
        # Nothing holds or fails, so that the first of several groups stands for all.
        group, drawn = population.sample(there, there, np.zeros(len(values)))
        sampled = int(np.count_nonzero(drawn))
        mine = there & population.drawn if sampled else there
        yield MeasureSummary(
            name,
            units[name],
            values,
            int(np.count_nonzero(there)),
            int(np.nanargmin(values)),
            int(np.nanargmax(values)),
            group,
            percentiles_of(values[drawn if sampled else there]),
            causes_of(values, parameters, mine, sampled),
        )
