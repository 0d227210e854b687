"""Along a uniform row of instants: the exact way for generators, many instants at once."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.analog.exponential import expm1, joined
from frontend_sim.simulation import interval_kernels, kernels
from frontend_sim.simulation.kernels import Index, Real
from frontend_sim.simulation.path import State
from frontend_sim.simulation.piecewise import MOST_NODES, PiecewisePath
from frontend_sim.simulation.row_nodes import RowNodes
from frontend_sim.stimulus.drive import PiecewiseDrive

ROW = 32
"""Most instants between two at which the generator's state is set anew."""

MOST_TURNS = 1000.0
"""Most radians that a generator goes without being set anew: its rounding adds up over them."""

MOST_ALONE = 6000.0
"""The same over a single interval, where nothing adds up: about ``FRESH`` cycles of a sine."""

ROUNDED = 16.0
"""An instant so many units in the last place before t = 0 may be one at t = 0."""


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

    and the step from row to row is one more matrix. An event cuts its row: what is left of it
    begins at the instant behind the event, and the way from instant to event to instant is that of
    ``PiecewisePath``.

    Parameters
    ----------
    exact : the same, for any instants
    rate : [Hz];  delay : [s];  lead : the first k
    row : instants of a row, R
    spread : shape (p, n + m, R)
    steps : what 1 to R steps add to x, from x and g, by columns, shape (R, n + m, n)
    """

    exact: PiecewisePath
    rate: float
    delay: float
    lead: int
    row: int
    spread: Real
    steps: Real

    @classmethod
    def of(cls, exact: PiecewisePath, interval: float, row: int = ROW, origin: float = 0.0) -> Self:
        """Prepare the path for instants ``interval`` apart from an origin on [s].

        The outputs' delay is taken off them.
        """
        outputs, n = exact.outputs, len(exact.initial)
        steps = expm1(exact.table.system * interval)[None]
        while len(steps) < row:
            steps = np.concatenate([steps, joined(steps[-1], steps)])
        now = np.concatenate([outputs.c, np.outer(outputs.d, exact.drive.readout)], axis=1)
        spread = np.concatenate([now[None], now + now @ steps[:-1]])
        rate, delay = 1.0 / interval, outputs.delay - origin
        lead = max(math.floor(delay * rate) - 1, 0)
        # What is asked for first was rounded in another way, and must not lie before row 0.
        while lead / rate - delay < -ROUNDED * np.spacing(outputs.delay):
            lead += 1
        spread = np.ascontiguousarray(spread.transpose(1, 2, 0))
        return cls(
            exact, rate, delay, lead, row, spread, np.ascontiguousarray(steps[:, :n].swapaxes(1, 2))
        )

    def start(self) -> State:
        """Return the state at the first instant of row 0."""
        first = self._instants(np.zeros(1, np.int64))
        return State(self.exact.advance(self.exact.start(), 0, first)[0].x, 0.0)

    def _instants(self, numbers: Index) -> Real:
        """Return when instants of some numbers are, counted from the first one not below 0 [s]."""
        return np.maximum((self.lead + numbers) / self.rate - self.delay, 0.0)

    def advance(
        self, state: State, number: int, instants: Real, drive: PiecewiseDrive | None = None
    ) -> tuple[State, Real]:
        """Advance through instants number ``number`` and on, see ``Path``.

        The state is that at the first instant of the row that the next instant belongs to, so a
        row that is cut is computed again from its begin. Many rows are taken at once while the
        events in them are few, so that memory is bounded.
        """
        drive, size = drive or self.exact.drive, self.row
        number -= self.lead
        stop = number + len(instants)
        first, last, kept = number // size, -(-stop // size), stop // size
        begins = np.arange(first, last + 1) * size
        times = self._instants(begins)
        # An event that is at an instant but for rounding counts in both rows that meet there.
        late = times + self.exact.slack(times)
        events = drive.events(float(times[0]), float(late[-1]))
        begun, ended = (np.searchsorted(events, t, side="right") for t in (times, late))
        y = np.empty((len(self.spread), (last - first) * size))
        x, whole, at = state.x, state.x, 0
        while at < last - first:
            most = int(np.searchsorted(ended, begun[at] + MOST_NODES, side="right")) - 1
            until = max(most, at + 1)
            inside = slice(at, until + 1)
            part = y[:, at * size : until * size]
            states = self._rows(x, begins[inside], events[begun[at] : ended[until]], drive, part)
            if first + at <= kept <= first + until:
                whole = states[kept - first - at]
            x, at = states[-1], until
        offset = number - first * size
        return State(whole.copy(), float(kept)), y[:, offset : offset + len(instants)]

    def rested(self, state: State, number: int, instants: Real) -> State:
        """Return the state after instants at which all was zero, see ``Path``."""
        return State(state.x, float((number - self.lead + len(instants)) // self.row))

    def _rows(self, x: Real, begins: Index, events: Real, drive: PiecewiseDrive, y: Real) -> Real:
        """Fill in the outputs of some rows; return x at their begins, and at the end of the last.

        Parameters
        ----------
        x : at the begin of the first;  begins : numbers of these instants
        """
        nodes = self._nodes(begins, events)
        steps = np.diff(nodes.times), nodes.counts, self.steps
        z = self.exact.table.march(x, drive.states(nodes.times), *steps)
        whole = z[nodes.rows]
        kernels.spread(whole[:-1], self.spread, y)
        if len(nodes.others):
            parts = z[nodes.others], nodes.first, nodes.last
            interval_kernels.spread_parts(*parts, self.spread, y)
        return whole[:, : len(x)]

    def _nodes(self, begins: Index, events: Real) -> RowNodes:
        if len(events) == 0:
            return RowNodes.whole(begins, self._instants(begins))
        nearest = np.rint((events + self.delay) * self.rate).astype(np.int64) - self.lead
        slack = self.exact.slack(self._instants(nearest))
        return RowNodes.cut(begins, events, nearest, self._instants, slack)
