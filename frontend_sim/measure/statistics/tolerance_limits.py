"""Limits that most of what is made stays within, whatever the distribution."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import MeasureError
from frontend_sim.measure.statistics.pass_rate import refuse_no_share
from frontend_sim.quantities.counting import counted

Real = NDArray[np.float64]

Side = Literal["both", "low", "high"]


@dataclass(frozen=True)
class ToleranceLimits:
    """Two order statistics of a sample, and what they hold.

    Parameters
    ----------
    low, high : limits, in the unit of the values; infinite on a side that was not asked for
    coverage : share of all that could be drawn that lies within them [1]
    confidence : that at least this share does [1]; no less than was asked for
    left_out : how many values of the sample lie beyond them
    """

    low: float
    high: float
    coverage: float
    confidence: float
    left_out: int


def confidence_of(draws: int, coverage: float, blocks: int) -> float:
    """Return the confidence that a share of all lies between two values of a sample.

    The share between the order statistics number a and n + 1 - b has a beta distribution with
    parameters n + 1 - a - b and a + b, so that the confidence is P(X <= n - a - b) for a binomial
    X with n draws of probability ``coverage``. Source: Wilks 1941, "Determination of sample sizes
    for setting tolerance limits".

    Parameters
    ----------
    draws : n, size of the sample
    coverage : the share [1]
    blocks : a + b; 1 for the largest value as a limit to one side, 2 for smallest and largest
    """
    from scipy.special import bdtr

    if blocks > draws:
        return 0.0
    return float(bdtr(draws - blocks, draws, coverage))


def draws_needed(coverage: float = 0.95, confidence: float = 0.95, side: Side = "high") -> int:
    """Return the smallest sample whose extremes are tolerance limits: 59 to one side, 93 to both.

    Raises
    ------
    MeasureError
        If coverage or confidence is no share between 0 and 1.
    """
    refuse_no_share(coverage, "coverage")
    refuse_no_share(confidence, "confidence")
    blocks = _least_blocks(side)
    least, most = blocks, 2 * blocks
    while confidence_of(most, coverage, blocks) < confidence:
        least, most = most, 2 * most
    while most - least > 1:
        middle = (least + most) // 2
        if confidence_of(middle, coverage, blocks) < confidence:
            least = middle
        else:
            most = middle
    return least if confidence_of(least, coverage, blocks) >= confidence else most


def tolerance_limits(
    values: Real, coverage: float = 0.95, confidence: float = 0.95, side: Side = "both"
) -> ToleranceLimits:
    """Return distribution-free tolerance limits: as many extremes as possible are left out.

    Parameters
    ----------
    values : independent draws, shape (N,); infinite ones are allowed
    coverage : share of all that could be drawn that shall lie within [1]
    confidence : that it does [1]
    side : ``both``, or the only side with a limit

    Raises
    ------
    MeasureError
        If the sample is too small, which the message tells with the size needed, or holds NaN.
    """
    refuse_no_share(coverage, "coverage")
    refuse_no_share(confidence, "confidence")
    ordered = sorted_values(values)
    count, least = len(ordered), _least_blocks(side)
    if confidence_of(count, coverage, least) < confidence:
        raise MeasureError(
            f"{counted(count, 'draw gives', 'draws give')} no limit that holds {100 * coverage:g} "
            f"% with {100 * confidence:g} % confidence; {draws_needed(coverage, confidence, side)} "
            "do"
        )
    blocks = _most_blocks(count, coverage, confidence, least)
    if side == "both":
        below, above = blocks // 2, blocks - blocks // 2
    else:
        below, above = (blocks, 0) if side == "low" else (0, blocks)
    return ToleranceLimits(
        float(ordered[below - 1]) if below else -np.inf,
        float(ordered[count - above]) if above else np.inf,
        coverage,
        confidence_of(count, coverage, blocks),
        max(below - 1, 0) + max(above - 1, 0),
    )


def sorted_values(values: Real) -> Real:
    """Return values in increasing order. Raises MeasureError if there is none, or one is NaN."""
    ordered = np.sort(np.asarray(values, dtype=np.float64))
    if len(ordered) == 0:
        raise MeasureError("there is no value; a statistic needs at least one run that has it")
    if np.isnan(ordered[-1]):
        raise MeasureError(
            f"missing: {int(np.count_nonzero(np.isnan(ordered)))} of "
            f"{counted(len(ordered), 'value')}; leave out their runs, and say so"
        )
    return ordered


def _least_blocks(side: Side) -> int:
    return 2 if side == "both" else 1


def _most_blocks(count: int, coverage: float, confidence: float, least: int) -> int:
    """Return the largest number of blocks whose confidence suffices."""
    most = count
    while most > least:
        middle = (least + most + 1) // 2
        if confidence_of(count, coverage, middle) >= confidence:
            least = middle
        else:
            most = middle - 1
    return least
