"""The deviation of one limiter, as far as it is known and still needed."""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np

from frontend_sim.analog.cut import Place
from frontend_sim.analog.limits import Segments
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.pieces import Pieces
from frontend_sim.simulation.piecewise import ULPS as SNAPPED
from frontend_sim.simulation.piecewise import snapped
from frontend_sim.simulation.polygon import Polygon
from frontend_sim.stimulus.drive import Lines

ULPS = 8.0
"""An instant within this many units in the last place of a point of the grid is at the point."""

BESIDE, BESIDE_SHARE = 1e-9, 1e-13
"""An instant this near to a jump is beside it [steps, and share of the position in steps]."""


@dataclass(frozen=True, eq=False)
class Past:
    """What a limiter went over, from which it can go on to any instant of it.

    Parameters
    ----------
    pieces : in which it did
    before : deviation before the first piece
    d : deviation at the end of each piece, shape (S,)
    begun : deviation at the begin of the pieces that start with a jump, shape (J,)
    """

    pieces: Pieces
    before: float
    d: Real
    begun: Real

    def starts(self) -> Real:
        """Return when each piece begins, and u, v and d there after a jump, shape (4, S)."""
        segments = self.pieces.segments
        d = np.append(self.before, self.d[:-1])
        d[segments.jumps] = self.begun
        v = np.append(segments.linear_begin, segments.linear[:-1])
        begins = self.pieces.begins(np.arange(len(d)))
        begins[segments.jumps] = self.pieces.jumps
        return np.stack([begins, segments.begin, v, d])


@dataclass(frozen=True, eq=False)
class Signal:
    """A deviation: a part that lines join at the points of a grid, and a part that is held.

    Parameters
    ----------
    polygon, lines : the two parts; None has been zero all the time
    past : in parts, kept where the deviation is asked between the points of the grid
    """

    polygon: Polygon | None
    lines: Lines | None
    past: tuple[Past, ...] = ()

    def values(self, times: Real) -> Real:
        """Return both parts together at times, shape (K,)."""
        total = np.zeros(len(times))
        for part in (self.polygon, self.lines):
            if part is not None:
                total += part.values(times)
        return total

    def remembered(self, part: Past, keep: int) -> Signal:
        """Return the signal with one more part of the past, without those before a grid point."""
        parts = (*self.past, part)
        old = [past for past, later in pairwise(parts) if later.pieces.first > keep]
        return replace(self, past=(*old, part))

    def missed(self, place: Place, rate: float, instants: Real, u: Real, v: Real) -> Real:
        """Return what lines between the points of a grid miss at instants, shape (K,).

        The limiter goes on from the begin of the piece that an instant lies in, with its true input
        and linear answer at the instant, u and v. So it does at a point of the grid beside a jump:
        rounding may have u and v on the one side of it, and the held part on the other.
        """
        missed = np.zeros(len(instants))
        position = instants * rate
        asked = np.abs(position - np.rint(position)) > ULPS * np.spacing(position)
        if self.lines is not None:
            # As the answer to the held part has them.
            instants = snapped(instants, self.lines.breaks, SNAPPED * np.spacing(instants))
            near = (BESIDE + BESIDE_SHARE * position) / rate
            asked |= _to_nearest(instants, self.lines.breaks) <= near
        off = np.flatnonzero(asked)
        if len(off) == 0 or not self.past:
            return missed
        instants, u, v = instants[off], u[off], v[off]
        begins, *starts = np.concatenate([past.starts() for past in self.past], axis=1)
        at = np.maximum(np.searchsorted(begins, instants, side="right") - 1, 0)
        length = np.maximum(instants - begins[at], 0.0)
        first, linear, begun = (row[at] for row in starts)
        none = np.empty(0, np.int64)
        span = Segments(length, first, u, v, float(v[0]), none, np.stack([begun, linear]))
        _, d, _, _ = place.limiter.advance(place.limiter.start(float(u[0]), float(v[0])), span)
        missed[off] = d - self.values(instants)
        return missed


def _to_nearest(instants: Real, events: Real) -> Real:
    """Return how far the nearest event lies from each instant [s]."""
    after = np.minimum(np.searchsorted(events, instants), len(events) - 1)
    before = np.maximum(after - 1, 0)
    nearest: Real = np.minimum(np.abs(events[after] - instants), np.abs(events[before] - instants))
    return nearest
