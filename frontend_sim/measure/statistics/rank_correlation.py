"""Which parameter explains the spread of a measure: correlation of ranks."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]

FEWEST = 4
"""With fewer runs no correlation of ranks is significant."""


@dataclass(frozen=True)
class RankCorrelation:
    """How far a measure follows a parameter.

    Parameters
    ----------
    parameter : its name
    coefficient : Spearman's, from -1 to 1 [1]
    probability : that chance alone gives as much, corrected for the number of parameters [1]
    runs : how many have both
    """

    parameter: str
    coefficient: float
    probability: float
    runs: int

    @property
    def share(self) -> float:
        """Share of the variance of the ranks that goes with the parameter [1]."""
        return self.coefficient**2


def rank_correlations(
    parameters: Mapping[str, Real], measure: Real, independent: int | None = None
) -> tuple[RankCorrelation, ...]:
    """Return the correlation of a measure with each parameter, the strongest first.

    Spearman's coefficient is the correlation of the ranks, equal values at their average rank:
    it sees any response that rises or falls all the way, and none that turns. Its probability is
    that of Student's t = r sqrt((n - 2) / (1 - r^2)) with n - 2 degrees of freedom, two-sided
    (Kendall and Gibbons 1990, *Rank Correlation Methods*, from memory), and no less than 2 / n!,
    that of two rows in one order; then corrected for the number of parameters by Holm's procedure
    (Holm 1979), so that of many parameters without any influence one is called significant in 5 %
    of nights, not in most.

    Parameters
    ----------
    parameters : name -> value in each run, shape (N,); what does not vary is left out
    measure : value in each run, shape (N,); runs in which one of the two is NaN do not count
    independent : how many of the runs are independent of each other, where they are fewer than N
    """
    found = [
        entry
        for name, values in parameters.items()
        if (entry := _correlation(name, np.asarray(values), np.asarray(measure), independent))
        is not None
    ]
    found.sort(key=lambda entry: entry.probability)
    corrected, worst = [], 0.0
    for position, entry in enumerate(found):
        worst = max(worst, min(1.0, (len(found) - position) * entry.probability))
        corrected.append(RankCorrelation(entry.parameter, entry.coefficient, worst, entry.runs))
    return tuple(sorted(corrected, key=lambda entry: -abs(entry.coefficient)))


def _correlation(
    name: str, values: Real, measure: Real, independent: int | None
) -> RankCorrelation | None:
    from scipy.special import stdtr
    from scipy.stats import rankdata

    there = ~(np.isnan(values) | np.isnan(measure))
    count = int(np.count_nonzero(there))
    sure = count if independent is None else min(count, independent)
    if sure < FEWEST:
        return None
    first, second = values[there], measure[there]
    if np.all(first == first[0]) or np.all(second == second[0]):
        return None
    one, other = (rankdata(row) - 0.5 * (count + 1) for row in (first, second))
    coefficient = float(one @ other / np.sqrt((one @ one) * (other @ other)))
    coefficient = min(max(coefficient, -1.0), 1.0)
    rest = (1.0 - coefficient) * (1.0 + coefficient)
    student = abs(coefficient) * np.sqrt((sure - 2) / rest) if rest > 0.0 else np.inf
    # Of sure! orders, all as likely by chance, two at the least are as strong: one each way.
    rarest = 2.0 * math.exp(-math.lgamma(sure + 1.0))
    probability = max(float(2.0 * stdtr(sure - 2, -student)), rarest)
    return RankCorrelation(name, coefficient, probability, count)
