"""Along a uniform row of instants: the exact way for generators, many instants at once."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.analog.exponential import expm1, joined
from frontend_sim.simulation import kernels
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.path import State
from frontend_sim.simulation.piecewise import PiecewisePath
from frontend_sim.stimulus.drive import PiecewiseDrive

ROW = 32
"""Most instants between two at which the generator's state is set anew."""

MOST_TURNS = 1000.0
"""Most radians that a generator goes without being set anew: its rounding adds up over them."""


MOST_ALONE = 6000.0
"""The same over a single interval, where nothing adds up: about ``FRESH`` cycles of a sine."""


def row_length(fastest: float, interval: float) -> int:
    """Return how many instants make a row, a power of two up to ROW; 0 if even one turns too far.

    Parameters
    ----------
    fastest : largest rate of the generator [rad/s];  interval : between instants [s]
    """
    row = ROW
    while row and fastest * interval * row >= MOST_TURNS:
        row //= 2
    return row or int(fastest * interval < MOST_ALONE)


@dataclass(frozen=True, eq=False)
class RowPath:
    """The chain and a generator over the instants k / rate - delay, from the first one not below 0.

    Within a row without events the outputs are fixed combinations of the states at its begin,

        y[k] = [c, d r] exp(M k h) [x; g],

    and the step from row to row is one more matrix. A row with an event goes from node to node.

    Parameters
    ----------
    exact : the same, for any instants
    rate : [Hz];  delay : [s];  lead : the first k
    row : instants of a row, R
    spread : shape (p, n + m, R)
    step, feed : from x and from g at the begin of a row to x at the begin of the next, less the
        identity, shapes (n, n) and (n, m)
    """

    exact: PiecewisePath
    rate: float
    delay: float
    lead: int
    row: int
    spread: Real
    step: Real
    feed: Real

    @classmethod
    def of(cls, exact: PiecewisePath, interval: float, row: int = ROW, origin: float = 0.0) -> Self:
        """Prepare the path for instants ``interval`` apart from an origin on [s].

        The outputs' delay is taken off them.
        """
        system, outputs, drive = exact.table.system, exact.outputs, exact.drive
        n = len(exact.initial)
        direct = np.outer(outputs.d, drive.readout)
        e = expm1(system * interval)
        spread = np.concatenate([outputs.c, direct], axis=1)[None]
        while len(spread) < row:
            spread = np.concatenate([spread, spread + spread @ e])
            e = joined(e, e)
        step, feed = np.ascontiguousarray(e[:n, :n]), np.ascontiguousarray(e[:n, n:])
        rate, delay = 1.0 / interval, outputs.delay - origin
        lead = max(math.floor(delay * rate) - 1, 0)
        while lead / rate - delay < 0.0:
            lead += 1
        spread = np.ascontiguousarray(spread.transpose(1, 2, 0))
        return cls(exact, rate, delay, lead, row, spread, step, feed)

    def start(self) -> State:
        """Return the state at the first instant of row 0."""
        first = self._instants(0, 1)
        return State(self.exact.advance(self.exact.start(), 0, first)[0].x, 0.0)

    def _instants(self, first: int, last: int) -> Real:
        """Return the first instants of rows ``first`` to ``last`` - 1 [s]."""
        return (self.lead + np.arange(first, last) * self.row) / self.rate - self.delay

    def advance(
        self, state: State, number: int, instants: Real, drive: PiecewiseDrive | None = None
    ) -> tuple[State, Real]:
        """Advance through instants number ``number`` and on, see ``Path``.

        The state is that at the first instant of the row that the next instant belongs to, so a
        row that is cut is computed again from its begin.
        """
        drive, size = drive or self.exact.drive, self.row
        number -= self.lead
        stop = number + len(instants)
        first, last = number // size, -(-stop // size)
        begins = self._instants(first, last + 1)
        g = drive.states(begins[:-1])
        y = np.empty((len(self.spread), (last - first) * size))
        x, kept = state.x.copy(), state.x
        whole = stop // size - first
        eventful = _rows_with(drive.events(float(begins[0]), float(begins[-1])), begins)
        at = 0
        while at < last - first:
            until = int(eventful[0]) if len(eventful) else last - first
            # The row of the next instant is where the state stays.
            until = min(until, whole) if at < whole else until
            if until > at:
                self._clean(x, g[at:until], y[:, at * size : until * size])
            else:
                most = (whole if at < whole else last - first) - at
                many = min(_in_a_row(eventful), most)
                until, eventful = at + many, eventful[many:]
                self._eventful(x, first + at, y[:, at * size : until * size], drive)
            at = until
            if at == whole:
                kept = x.copy()
        offset = number - first * size
        return State(kept, float(whole + first)), y[:, offset : offset + len(instants)]

    def rested(self, state: State, number: int, instants: Real) -> State:
        """Return the state after instants at which all was zero, see ``Path``."""
        return State(state.x, float((number - self.lead + len(instants)) // self.row))

    def _clean(self, x: Real, g: Real, y: Real) -> None:
        """Fill in the outputs of rows without events, and advance x to the begin of the next."""
        n = len(x)
        z = np.empty((len(g) + 1, n + g.shape[1]))
        states, sums = np.empty((len(g), n)), np.empty((len(g), n))
        z[:-1, n:] = g
        z[0, :n] = x
        kernels.mix(self.feed, g, sums)
        which = np.zeros(len(g), np.int64)
        kernels.recur(x, self.step[None], self.exact.table.stop, which, sums, states)
        z[1:, :n] = states
        kernels.spread(z[:-1], self.spread, y)

    def _eventful(self, x: Real, row: int, y: Real, drive: PiecewiseDrive) -> None:
        """Go through some rows from node to node."""
        number = self.lead + row * self.row
        instants = np.arange(number, number + y.shape[1] + 1) / self.rate - self.delay
        # As the end of the row before may have been moved, so that no cut of time shows.
        instants[:1] = self.exact.at_events(instants[:1], drive)
        state, values = self.exact.advance(State(x, float(instants[0])), 0, instants, drive)
        y[:] = values[:, :-1]
        x[:] = state.x


def _in_a_row(rows: Real) -> int:
    """Return how many rows follow each other without one between them, from the first one on."""
    apart = np.flatnonzero(np.diff(rows) > 1)
    return int(apart[0]) + 1 if len(apart) else len(rows)


def _rows_with(events: Real, begins: Real) -> Real:
    """Return which rows hold an event between their first instant and that of the next row."""
    inside = events[(events > begins[0]) & (events < begins[-1])]
    row = np.searchsorted(begins, inside, side="left") - 1
    # An event at the very begin of a row changes nothing before it.
    return np.unique(row[inside < begins[row + 1]])
