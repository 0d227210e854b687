"""A sensor whose output is a curve of its input over some range."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.limits.limiter import Segments, Touched
from frontend_sim.analog.limits.static_map import StaticMap

ENDS = ("the upper end of its range", "the lower end of its range")


@dataclass(frozen=True, eq=False)
class SensorCurve(StaticMap):
    """A curve that holds over a range of its input; how long the range was left is told.

    Parameters
    ----------
    low, high : ends of the range
    """

    low: float
    high: float
    limits = ENDS

    def advance(self, state: Real, span: Segments) -> tuple[Real, Real, Real, Touched]:
        """Take the curve at every end, see ``Limiter``."""
        state, deviation, before, _ = super().advance(state, span)
        return state, deviation, before, left(span, self.low, self.high)


def left(span: Segments, low: float, high: float) -> Touched:
    """Return how long the input was above and below a range, and when first."""
    above = _over(span.length, span.begin - high, span.end - high)
    below = _over(span.length, low - span.begin, low - span.end)
    times, pieces, since = zip(above, below, strict=True)
    return Touched(np.array(times), np.array(pieces, dtype=np.int64), np.array(since))


def _over(length: Real, begin: Real, end: Real) -> tuple[float, int, float]:
    """Return how long lines are above zero, which piece is first, and how far into it."""
    over = np.flatnonzero((begin > 0.0) | (end > 0.0))
    if len(over) == 0:
        return 0.0, -1, 0.0
    length, begin, end = length[over], begin[over], end[over]
    crosses = (begin > 0.0) != (end > 0.0)
    rise = np.where(crosses, np.abs(end - begin), 1.0)
    share = np.where(crosses, np.maximum(begin, end) / rise, 1.0)
    since = length[0] * (1.0 - share[0]) if end[0] > begin[0] else 0.0
    return float(np.sum(share * length)), int(over[0]), float(since)
