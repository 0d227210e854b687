"""A percentile of what could be drawn, and where it surely lies."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from frontend_sim.measure.statistics.pass_rate import refuse_no_share
from frontend_sim.measure.statistics.tolerance_limits import sorted_values

Real = NDArray[np.float64]


@dataclass(frozen=True)
class Percentile:
    """An estimate of a percentile with its interval.

    Parameters
    ----------
    share : of all draws that lie below [1]
    value : the estimate, in the unit of the values
    low, high : interval; infinite where the sample is too small to bound it on that side
    confidence : that the interval contains it [1]; no less than was asked for
    """

    share: float
    value: float
    low: float
    high: float
    confidence: float


def percentile(values: Real, share: float, confidence: float = 0.95) -> Percentile:
    """Return a percentile with a distribution-free interval between two order statistics.

    The number of draws below the true percentile is binomial, whatever the distribution, so the
    order statistics number l and u bound it with probability P(l <= X < u). Each side misses at
    most half of what is missing; a side on which even the extreme of the sample misses more is
    open. Source: David and Nagaraja 2003, *Order Statistics*, 7.1 (from memory). The estimate
    is that of ``numpy.quantile``.

    Parameters
    ----------
    values : independent draws, shape (N,)
    share : of draws below, 0.5 for the median [1]
    confidence : that the interval contains the true percentile [1]

    Raises
    ------
    MeasureError
        If there is no value, one is NaN, or a share is none.
    """
    from scipy.special import bdtr

    refuse_no_share(share, "share")
    refuse_no_share(confidence, "confidence")
    ordered = sorted_values(values)
    count = len(ordered)
    below = bdtr(np.arange(count, dtype=np.float64), count, share)  # P(X <= k)
    missed = 0.5 * (1.0 - confidence)
    # The l-th value lies above the percentile if fewer than l draws lie below it.
    lower = int(np.searchsorted(below, missed, side="right"))
    upper = int(np.searchsorted(below, 1.0 - missed, side="left")) + 1
    low = float(ordered[lower - 1]) if lower >= 1 else -np.inf
    high = float(ordered[upper - 1]) if upper <= count else np.inf
    left = float(below[lower - 1]) if lower >= 1 else 0.0
    right = 1.0 - float(below[upper - 1]) if upper <= count else 0.0
    return Percentile(share, _estimate(ordered, share), low, high, 1.0 - left - right)


def _estimate(ordered: Real, share: float) -> float:
    """Interpolate linearly, infinite values kept."""
    position = share * (len(ordered) - 1)
    first = int(position)
    start, end = ordered[first], ordered[min(first + 1, len(ordered) - 1)]
    rest = position - first
    if rest == 0.0 or start == end or np.isneginf(start):
        return float(start)
    return float(start + rest * (end - start))
