"""The confidence interval of an rms value."""

from __future__ import annotations

import math
from dataclasses import dataclass

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import share


@dataclass(frozen=True)
class Interval:
    """A range that holds the true value with a stated confidence.

    Parameters
    ----------
    low, high : ends of the range
    confidence : share of such ranges that hold the true value [1]
    """

    low: float
    high: float
    confidence: float


def rms_interval(rms: float, count: int, confidence: float = 0.95) -> Interval:
    """Return the confidence interval of the rms of independent normal noise,

        rms sqrt( (N - 1) / X(1 - q) ) ... rms sqrt( (N - 1) / X(q) ),    q = (1 - confidence) / 2,

    X the quantiles of the chi-square distribution with N - 1 degrees of freedom. Noise whose
    samples are correlated (drift, 1/f, a filter below the rate) is known less well than this.
    Source: any statistics textbook (from memory).

    Parameters
    ----------
    rms : standard deviation about the mean of the samples [V]
    count : samples, N, at least 2

    Raises
    ------
    MeasureError
        If there are fewer than 2 samples, or the confidence is not between 0 and 1.
    """
    from scipy.special import chdtri

    if count < 2:
        raise MeasureError(f"an interval of the rms needs at least 2 samples, not {count}")
    tail = 0.5 * (1.0 - share(confidence, "the confidence"))
    degrees = count - 1.0
    # chdtri takes the probability above the quantile.
    upper, lower = float(chdtri(degrees, tail)), float(chdtri(degrees, 1.0 - tail))
    return Interval(rms * math.sqrt(degrees / upper), rms * math.sqrt(degrees / lower), confidence)
