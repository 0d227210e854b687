"""Two diodes behind a resistor, which hold a node between two voltages."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.limits.limiter import Limiter, Segments, Touched, continuous


@dataclass(frozen=True, eq=False)
class DiodeClamp(Limiter):
    """A capacitor C behind a resistor R, with a diode to each of two levels,

        C dy/dt = (u - y) / R - max(y - high, 0) / R_d + max(low - y, 0) / R_d.

    Each diode is an ideal switch in series with a voltage, which ``low`` and ``high`` include, and
    with a resistance R_d. Without R_d the node is held at the level for just as long as current
    flows into the diode.

    Parameters
    ----------
    rate : 1 / (R C) [rad/s];  low, high : [V]
    ratio : R / R_d, infinite for a diode without resistance [1]
    """

    replaced: range
    rate: float
    ratio: float
    low: float
    high: float
    limits = ("its upper clamp", "its lower clamp")

    def start(self, u: float, v: float) -> Real:
        """Return the deviation of a node at rest, where the currents balance."""
        beyond = min(max(v, self.low), self.high) - v
        d = beyond * (1.0 - 1.0 / (1.0 + self.ratio))
        return np.array([d, v + d])

    def advance(self, state: Real, span: Segments) -> tuple[Real, Real, Real, Touched]:
        """Advance event by event; the deviation never jumps, since y and v are states."""
        from frontend_sim.analog.limits.kernels import clamp, closed_loop

        touched, deviation = Touched.none(4), np.empty(len(span.length))
        at = (float(state[0]), float(state[1]), span.linear_begin)
        parts = (*at, span.length, span.begin, span.end, span.linear, span.apart)
        told = (deviation, touched.time, touched.piece, touched.since)
        if math.isinf(self.ratio):
            limits = (self.rate, 1.0, math.inf, math.inf, self.low, self.high)
            ends = closed_loop(*parts, *limits, *told)
        else:
            ends = clamp(*parts, self.rate, self.ratio, self.low, self.high, *told)
        diodes = Touched(touched.time[:2], touched.piece[:2], touched.since[:2])
        return np.array(ends), deviation, continuous(state, deviation, span.jumps), diodes
