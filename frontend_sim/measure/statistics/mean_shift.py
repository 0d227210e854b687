"""Whether two noisy series differ in the mean by more than their noise."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]

BATCHES = 32
"""Batches that a series in time is cut into."""

FEWEST = 8
"""With fewer values the noise of a mean is too uncertain to be told from a shift."""


@dataclass(frozen=True)
class Shift:
    """A difference of means and how much of it noise can be.

    Parameters
    ----------
    mean : mean of the differences, in their unit
    error : its standard error; NaN where there are too few values to tell
    freedom : degrees of freedom of the standard error
    count : how many differences
    """

    mean: float
    error: float
    freedom: int
    count: int

    def probability(self, tolerance: float = 0.0) -> float:
        """Return how probable as large a mean is by chance, if the true one is within a tolerance.

        Two-sided, by Student's distribution: 1 where it cannot be told, 0 where the differences
        are all equal and beyond.
        """
        from scipy.special import stdtr

        excess = abs(self.mean) - tolerance
        if math.isnan(self.error) or excess <= 0.0:
            return 1.0
        if self.error == 0.0:
            return 0.0
        return min(1.0, float(2.0 * stdtr(self.freedom, -excess / self.error)))

    def visible(self, level: float) -> float:
        """Return the smallest shift that would be told from noise at a level of false alarms [1].

        It is seen every second time; infinite where nothing can be told.
        """
        from scipy.special import stdtrit

        if math.isnan(self.error):
            return math.inf
        return self.error * float(stdtrit(self.freedom, 1.0 - 0.5 * level)) if self.error else 0.0


def independent_shift(differences: Real) -> Shift:
    """Return the mean shift of paired differences that are independent of one another.

    Parameters
    ----------
    differences : one for each pair, such as the runs of two nights, shape (N,)
    """
    rows = np.asarray(differences, dtype=np.float64)
    count = len(rows)
    mean = float(np.mean(rows)) if count else math.nan
    if count < FEWEST:
        return Shift(mean, math.nan, max(count - 1, 0), count)
    return Shift(mean, float(np.std(rows, ddof=1)) / math.sqrt(count), count - 1, count)


def series_shift(differences: Real, batches: int = BATCHES) -> Shift:
    """Return the mean shift of differences in order of time, whose noise may be coloured.

    Neighbours in time are alike where noise is slow, and the usual standard error is then far too
    small. The series is cut into batches whose means are nearly independent, as long as the noise
    forgets within one of them (batch means; Conway 1963, from memory). What correlation is left
    between neighbouring batches, r, widens the error by sqrt((1 + r) / (1 - r)).

    Parameters
    ----------
    differences : in order of time, shape (K,)
    batches : how many; fewer where the series is short
    """
    rows = np.asarray(differences, dtype=np.float64)
    count = len(rows)
    used = min(batches, count // FEWEST if count >= 2 * FEWEST * FEWEST else FEWEST)
    if count < FEWEST:
        return independent_shift(rows)
    means = np.array([np.mean(batch) for batch in np.array_split(rows, used)])
    error = float(np.std(means, ddof=1)) / math.sqrt(used)
    wider = _widening(means)
    # Batches that are alike count as fewer, for the error as for its own uncertainty.
    freedom = max(int(used / wider**2) - 1, 1)
    return Shift(float(np.mean(rows)), error * wider, freedom, count)


def _widening(means: Real) -> float:
    """Return by how much neighbours that are alike widen the error of their mean."""
    centred = means - np.mean(means)
    whole = float(centred @ centred)
    if whole == 0.0:
        return 1.0
    # The estimate is low by about 1 / n for means without correlation.
    alike = float(centred[1:] @ centred[:-1]) / whole + 1.0 / len(means)
    alike = min(max(alike, 0.0), 0.9)
    return math.sqrt((1.0 + alike) / (1.0 - alike))
