"""An output that follows at once, but no faster than its slew rate."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.limits.limiter import Limiter, Segments, Touched

NAMES = ("its upper rail", "its lower rail", "its slew rate upwards", "its slew rate downwards")


@dataclass(frozen=True, eq=False)
class SlewFollower(Limiter):
    """An ideal gain whose output moves towards its end as fast as it may, and then stays on it,

        y -> clip(G u, low, high),    -down <= dy/dt <= up.

    It is the limit of ``ClosedLoop`` for a bandwidth without bound.

    Parameters
    ----------
    gain : G [1];  up, down : [V/s];  low, high : [V]
    """

    replaced: range
    gain: float
    up: float
    down: float
    low: float
    high: float
    limits = NAMES

    def start(self, u: float, v: float) -> Real:
        """Return the deviation and the output of a follower at rest."""
        y = min(max(v, self.low), self.high)
        return np.array([y - v, y])

    def advance(self, state: Real, span: Segments) -> tuple[Real, Real, Real, Touched]:
        """Advance event by event; y is continuous, so where G u jumps the deviation does."""
        from frontend_sim.analog.limits.kernels import follow

        touched, y = Touched.none(4), np.empty(len(span.length) + 1)
        y[0] = state[1]
        limits = (self.gain, self.up, self.down, self.low, self.high)
        told = (touched.time, touched.piece, touched.since)
        follow(span.length, span.begin, span.end, span.apart, *limits, y, *told)
        deviation = y[1:] - self.gain * span.end
        before = y[span.jumps] - self.gain * span.begin[span.jumps]
        return np.array([deviation[-1], y[-1]]), deviation, before, touched
