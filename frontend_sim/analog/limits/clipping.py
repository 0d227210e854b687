"""An output that is cut off at two levels."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.limits.limiter import Limiter, Segments, Touched


@dataclass(frozen=True, eq=False)
class Clipping(Limiter):
    """An ideal gain between two levels, beyond which little or nothing of its slope is left,

        y = clip(G u, low, high) + residue (G u - clip(G u, low, high)).

    Parameters
    ----------
    gain : G [1];  low, high : [V]
    residue : share of the slope beyond the levels, 0 for a rail [1]
    limits : names of the two levels
    """

    replaced: range
    gain: float
    low: float
    high: float
    residue: float = 0.0
    limits: tuple[str, ...] = ("its upper rail", "its lower rail")

    def start(self, u: float, v: float) -> Real:
        """Return the deviation at rest."""
        return self._deviation(np.array([v]))

    def advance(self, state: Real, span: Segments) -> tuple[Real, Real, Real, Touched]:
        """Cut each end off, see ``Limiter``."""
        from frontend_sim.analog.limits.kernels import cut_off

        touched, deviation = Touched.none(2), np.empty(len(span.length))
        told = (touched.time, touched.piece, touched.since)
        limits = (self.gain, self.low, self.high, self.residue)
        cut_off(span.length, span.begin, span.end, *limits, deviation, *told)
        before = self._deviation(self.gain * span.begin[span.jumps])
        return deviation[-1:], deviation, before, touched

    def _deviation(self, v: Real) -> Real:
        return (1.0 - self.residue) * (np.clip(v, self.low, self.high) - v)
