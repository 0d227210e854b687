"""What many runs say together: yield, limits, percentiles, causes. Functions of arrays alone."""

from frontend_sim.measure.statistics.corner_bounds import (
    CornerExcess,
    corner_excess,
    turning_parameters,
)
from frontend_sim.measure.statistics.flips import flip_probability
from frontend_sim.measure.statistics.mean_shift import Shift, independent_shift, series_shift
from frontend_sim.measure.statistics.pass_rate import PassRate, pass_rate
from frontend_sim.measure.statistics.percentile import Percentile, percentile
from frontend_sim.measure.statistics.rank_correlation import RankCorrelation, rank_correlations
from frontend_sim.measure.statistics.stability import (
    Stability,
    block_size,
    numerical_tolerance,
    stability,
    tight_enough,
)
from frontend_sim.measure.statistics.tolerance_limits import (
    ToleranceLimits,
    confidence_of,
    draws_needed,
    tolerance_limits,
)
from frontend_sim.measure.statistics.worst_run import worst_order, worst_run

__all__ = [
    "CornerExcess",
    "PassRate",
    "Percentile",
    "RankCorrelation",
    "Shift",
    "Stability",
    "ToleranceLimits",
    "block_size",
    "confidence_of",
    "corner_excess",
    "draws_needed",
    "flip_probability",
    "independent_shift",
    "numerical_tolerance",
    "pass_rate",
    "percentile",
    "rank_correlations",
    "series_shift",
    "stability",
    "tight_enough",
    "tolerance_limits",
    "turning_parameters",
    "worst_order",
    "worst_run",
]
