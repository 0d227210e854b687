"""A source whose resistance depends on what it measures, on a capacitor."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.limits.limiter import Limiter, Segments, Touched, continuous
from frontend_sim.analog.limits.sensor_curve import ENDS, left


@dataclass(frozen=True, eq=False)
class VariablePole(Limiter):
    """A state that follows a curve of the input, at a rate that is a curve of the input too,

        dy/dt = r(u) (f(u) - y).

    Over a piece of length h the rate's integral z is taken by Simpson's rule, and f as a line in
    this integral: y is then exact wherever r is constant and f a line, stays between old and new
    value however stiff the piece is, and converges with the second order else,

        y1 = y0 exp(-z) + f0 (1 - exp(-z)) + (f1 - f0) (1 - (1 - exp(-z)) / z).

    Parameters
    ----------
    replaced : the one block of first order that is the model of small signals
    rate, function : r above 0 [1/s], and f, for arrays of inputs
    low, high : range of the input
    """

    replaced: range
    rate: Callable[[Real], Real]
    function: Callable[[Real], Real]
    low: float
    high: float
    limits = ENDS

    def start(self, u: float, v: float) -> Real:
        """Return the deviation, and the state itself, with the input at rest."""
        y = float(self.function(np.array([u]))[0])
        return np.array([y - v, y])

    def advance(self, state: Real, span: Segments) -> tuple[Real, Real, Real, Touched]:
        """Advance piece by piece, see ``Limiter``. The deviation never jumps, as y and v do not."""
        from frontend_sim.analog.limits.scan import follow_line

        ends = self.rate(span.begin) + self.rate(span.end)
        middle = self.rate(0.5 * (span.begin + span.end))
        z = span.length * (ends + 4.0 * middle) / 6.0
        y = np.empty(len(z))
        lines = self.function(span.begin), self.function(span.end)
        if span.apart.shape[1]:
            for s, begin in enumerate(span.apart.sum(axis=0)):
                follow_line(begin, z[s : s + 1], lines[0][s:], lines[1][s:], y[s : s + 1])
        else:
            follow_line(float(state[1]), z, *lines, y)
        deviation = y - span.linear
        after, before = np.array([deviation[-1], y[-1]]), continuous(state, deviation, span.jumps)
        return after, deviation, before, left(span, self.low, self.high)
