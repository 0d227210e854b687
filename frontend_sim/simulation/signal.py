"""The deviation of one limiter, as far as it is known and still needed."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.cut import Place
from frontend_sim.analog.limits import Segments
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.polygon import Polygon
from frontend_sim.stimulus.drive import Lines


@dataclass(frozen=True, eq=False)
class Past:
    """Where the limiter stood at the begin of each of its pieces, after a jump if there was one.

    Parameters
    ----------
    begins : shape (S,) [s];  u : input;  v : linear answer;  d : deviation
    """

    begins: Real
    u: Real
    v: Real
    d: Real

    def grown(self, more: Past, keep: float) -> Past:
        """Return the past with more pieces, and without those that end before a time [s]."""
        drop = max(int(np.searchsorted(self.begins, keep, side="right")) - 1, 0)
        return Past(
            np.append(self.begins[drop:], more.begins),
            np.append(self.u[drop:], more.u),
            np.append(self.v[drop:], more.v),
            np.append(self.d[drop:], more.d),
        )


NO_PAST = Past(np.empty(0), np.empty(0), np.empty(0), np.empty(0))


@dataclass(frozen=True, eq=False)
class Signal:
    """A deviation: a part that lines join at the points of a grid, and a part that is held.

    Parameters
    ----------
    polygon, lines : the two parts; None has been zero all the time
    past : kept where the deviation is asked between the points of the grid
    """

    polygon: Polygon | None
    lines: Lines | None
    past: Past

    def values(self, times: Real) -> Real:
        """Return both parts together at times, shape (K,)."""
        total = np.zeros(len(times))
        for part in (self.polygon, self.lines):
            if part is not None:
                total += part.values(times)
        return total

    def missed(self, place: Place, instants: Real, u: Real, v: Real) -> Real:
        """Return what lines between the points of the grid miss at instants, shape (K,).

        The limiter goes on from the begin of the piece that an instant lies in, with its true input
        and linear answer there, u and v.
        """
        past = self.past
        at = np.maximum(np.searchsorted(past.begins, instants, side="right") - 1, 0)
        length = np.maximum(instants - past.begins[at], 0.0)
        apart = np.stack([past.d[at], past.v[at]])
        none = np.empty(0, np.int64)
        span = Segments(length, past.u[at], u, v, float(v[0]), none, apart)
        _, d, _, _ = place.limiter.advance(place.limiter.start(float(u[0]), float(v[0])), span)
        return d - self.values(instants)
