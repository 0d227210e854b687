"""A sensor, or any other part, whose output is a curve of its input."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.limits.limiter import Limiter, Segments, Touched
from frontend_sim.errors import ModelError


@dataclass(frozen=True, eq=False)
class StaticMap(Limiter):
    """A curve y = f(u) in place of a gain G, which is its slope at some working point.

    Parameters
    ----------
    replaced : the one block without states that is the gain
    gain : G, the gain of that block; any value is right, the slope at the working point is best
    function : f, for arrays of inputs; it must not depend on anything but its argument
    """

    replaced: range
    gain: float
    function: Callable[[Real], Real]

    def start(self, u: float, v: float) -> Real:
        """Return the deviation at rest."""
        return self._deviation(np.array([u]))

    def advance(self, state: Real, span: Segments) -> tuple[Real, Real, Real, Touched]:
        """Take the curve at every end, see ``Limiter``."""
        deviation = self._deviation(span.end)
        before = self._deviation(span.begin[span.jumps])
        return deviation[-1:], deviation, before, Touched.none(0)

    def _deviation(self, u: Real) -> Real:
        y = np.asarray(self.function(u), dtype=np.float64)
        if not np.all(np.isfinite(y)):
            wrong = u[~np.isfinite(y)][0]
            raise ModelError(f"the curve gives no finite output for an input of {wrong:g}")
        return y - self.gain * u
