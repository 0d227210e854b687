"""A sensor whose output is a curve of its input over some range."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.limits.limiter import Limiter, Segments, Touched

ENDS = ("the upper end of its range", "the lower end of its range")


@dataclass(frozen=True, eq=False)
class SensorCurve(Limiter):
    """A curve y = f(u) in place of a gain G, its slope at the operating point.

    Parameters
    ----------
    replaced : the one block without states that is the gain
    gain : G; any value is right in a run
    function : f, for arrays of inputs; it must not depend on anything but its argument
    low, high : range of the sensor; how long it was left is told
    """

    replaced: range
    gain: float
    function: Callable[[Real], Real]
    low: float
    high: float
    limits = ENDS

    def start(self, u: float, v: float) -> Real:
        """Return the deviation at rest."""
        return self._deviation(np.array([u]))

    def advance(self, state: Real, span: Segments) -> tuple[Real, Real, Real, Touched]:
        """Take the curve at every end, see ``Limiter``."""
        deviation = self._deviation(span.end)
        before = self._deviation(span.begin[span.jumps])
        return deviation[-1:], deviation, before, left(span, self.low, self.high)

    def _deviation(self, u: Real) -> Real:
        return self.function(u) - self.gain * u


def left(span: Segments, low: float, high: float) -> Touched:
    """Return how long the input was above and below a range, and when first."""
    above = _over(span.length, span.begin - high, span.end - high)
    below = _over(span.length, low - span.begin, low - span.end)
    times, pieces, since = zip(above, below, strict=True)
    return Touched(np.array(times), np.array(pieces, dtype=np.int64), np.array(since))


def _over(length: Real, begin: Real, end: Real) -> tuple[float, int, float]:
    """Return how long lines from ``begin`` to ``end`` are above zero; the first piece, and since."""
    over = np.flatnonzero((begin > 0.0) | (end > 0.0))
    if len(over) == 0:
        return 0.0, -1, 0.0
    length, begin, end = length[over], begin[over], end[over]
    crosses = (begin > 0.0) != (end > 0.0)
    rise = np.where(crosses, np.abs(end - begin), 1.0)
    share = np.where(crosses, np.maximum(begin, end) / rise, 1.0)
    since = length[0] * (1.0 - share[0]) if end[0] > begin[0] else 0.0
    return float(np.sum(share * length)), int(over[0]), float(since)
