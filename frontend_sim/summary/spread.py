"""How values spread over the runs of a night, and which parameters they follow."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from frontend_sim.measure.statistics import (
    Percentile,
    RankCorrelation,
    percentile,
    rank_correlations,
)

Real = NDArray[np.float64]
Flags = NDArray[np.bool_]

SHARES = (0.05, 0.5, 0.95)
"""Percentiles that are told."""

SIGNIFICANT = 0.05
"""A cause that chance explains more often is none."""

ALIKE = 1e-9
"""Relative spread that is rounding."""


def percentiles_of(values: Real) -> tuple[Percentile, ...]:
    """Return the percentiles at ``SHARES``, each with its interval; none where there is no value.

    Parameters
    ----------
    values : NaN where a run has none
    """
    known = values[~np.isnan(values)]
    return tuple(percentile(known, share) for share in SHARES) if len(known) else ()


def causes_of(
    values: Real, parameters: Mapping[str, Real], mine: Flags, draws: int
) -> tuple[RankCorrelation, ...]:
    """Return the parameters by the rank correlation of values with them, the strongest first.

    Parameters
    ----------
    values : shape (R,)
    parameters : key -> number in each run, shape (R,)
    mine : the runs that count, shape (R,)
    draws : of one group, as those of several do not become more by groups; 0 where none was drawn
    """
    if not spreads(values[mine]):
        return ()
    ranked = {key: row[mine] for key, row in parameters.items()}
    return rank_correlations(ranked, values[mine], draws or None)


def cause_in(causes: tuple[RankCorrelation, ...]) -> RankCorrelation | None:
    """Return the strongest cause that chance does not explain; None where there is none."""
    first = causes[0] if causes else None
    return first if first is not None and first.probability < SIGNIFICANT else None


def spreads(values: Real) -> bool:
    """Return whether values differ by more than rounding, whose ranks say nothing."""
    known = values[np.isfinite(values)]
    if len(known) < len(values) or len(known) == 0:
        return len(values) > 0
    return bool(np.ptp(known) > ALIKE * np.max(np.abs(known)))
