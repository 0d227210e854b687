"""Measures that noise moves, judged over several seeds."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import replace

import numpy as np

from frontend_sim.comparison.again import run_again
from frontend_sim.comparison.results import ResultDifference
from frontend_sim.comparison.series import judged
from frontend_sim.errors import InputError
from frontend_sim.measure.statistics import independent_shift
from frontend_sim.measure.statistics.mean_shift import FEWEST
from frontend_sim.quantities.counting import counted
from frontend_sim.randomness import stream
from frontend_sim.scenario.scan_scenario import AnyScenario


def over_seeds(
    first: AnyScenario,
    second: AnyScenario,
    results: Sequence[ResultDifference],
    seeds: int,
    level: float,
    progress: Callable[[float], None] | None = None,
) -> tuple[ResultDifference, ...]:
    """Judge results that could not be judged on one run each, by running both again.

    Both run with the same seeds, so that what noise does to both alike drops out of the
    difference; its mean over the seeds is held against its standard error.

    Parameters
    ----------
    seeds : how many; at least eight
    level : rate of false alarms that is accepted for all of them together [1]

    Raises
    ------
    InputError
        If there are too few seeds, or a scenario cannot be run.
    """
    if seeds < FEWEST:
        told = counted(seeds, "seed is", "seeds are")
        raise InputError(f"{told} too few to tell noise from a change; take {FEWEST}")
    open_ones = [row.name for row in results if row.finding == "not judged"]
    if not open_ones:
        return tuple(results)
    advance = progress or (lambda share: None)
    differences: dict[str, list[float]] = {name: [] for name in open_ones}
    for number in range(seeds):
        seed = stream(first.seed, "comparison", number)[1] % 2**63
        one, other = (_values(scenario, seed) for scenario in (first, second))
        for name, found in differences.items():
            found.append(other.get(name, math.nan) - one.get(name, math.nan))
        advance((number + 1) / seeds)
    share = level / len(open_ones)
    return tuple(
        _judged(row, differences[row.name], share) if row.name in differences else row
        for row in results
    )


def _values(scenario: AnyScenario, seed: int) -> dict[str, float]:
    found = run_again(scenario.model_copy(update={"seed": seed}))
    return {row.name: math.nan if row.value is None else row.value for row in found}


def _judged(row: ResultDifference, differences: list[float], level: float) -> ResultDifference:
    known = np.array([value for value in differences if math.isfinite(value)])
    shift = independent_shift(known)
    if len(known) < FEWEST:
        return replace(row, shift=shift)
    return replace(row, shift=shift, finding=judged(shift, row.tolerance, level))
