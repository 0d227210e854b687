"""From event to event: the exact way for drives whose generator is known in closed form."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, Self

import numpy as np

from frontend_sim.analog.chain import Chain
from frontend_sim.analog.exponential import augmented
from frontend_sim.simulation import kernels
from frontend_sim.simulation.intervals import IntervalTable
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.path import Outputs, State
from frontend_sim.stimulus.drive import PiecewiseDrive

ULPS = 4.0
"""An event within this many units in the last place of an instant belongs to the instant."""
FEW = 64
"""Instants that are taken at first, until it is known how many events lie between them."""
MOST_NODES = 1 << 17
"""Nodes in hand at once, about; more instants are taken at a time while there are fewer."""


@dataclass(frozen=True, eq=False)
class PiecewisePath:
    """The chain advances over the intervals between instants and events, whichever comes next.

    At every node the generator's state is set anew from its closed form, so its rounding never
    adds up; the cost is per node, and no grid exists.
    """

    drive: PiecewiseDrive
    outputs: Outputs
    table: IntervalTable
    initial: Real

    @classmethod
    def of(
        cls,
        chain: Chain,
        drive: PiecewiseDrive,
        outputs: Outputs,
        initial: Literal["settled", "rest"],
        longest: float,
    ) -> Self:
        """Prepare the path; ``longest`` is the longest interval between instants [s]."""
        system = augmented(chain.a, chain.b, drive.generator, drive.readout)
        x = chain.settled(drive.initial) if initial == "settled" else np.zeros(chain.order)
        return cls(drive, outputs, IntervalTable.of(system, longest), x)

    def start(self) -> State:
        """Return the state at t = 0."""
        return State(self.initial, 0.0)

    def advance(
        self, state: State, number: int, instants: Real, drive: PiecewiseDrive | None = None
    ) -> tuple[State, Real]:
        """Advance through instants, see ``Path``.

        They are taken a few at a time where there are many events between them, so that memory is
        bounded by the nodes in hand.
        """
        drive = drive or self.drive
        y = np.empty((len(self.outputs.d), len(instants)))
        done, few = 0, FEW
        while done < len(instants):
            part = slice(done, done + few)
            state, nodes = self._piece(state, drive, instants[part], y[:, part])
            few = min(2 * few, len(instants)) if nodes < MOST_NODES else max(few // 2, 1)
            done = part.stop
        return state, y

    def _piece(
        self, state: State, drive: PiecewiseDrive, instants: Real, y: Real
    ) -> tuple[State, int]:
        """Advance through instants, fill in their outputs, and return the number of nodes."""
        slack = self.slack(instants)
        events = drive.events(state.node, float(instants[-1] + slack[-1]))
        instants = snapped(instants, events, slack)
        nodes = np.union1d(instants, events)
        nodes = _refreshed(nodes[nodes > state.node], state.node, drive.fresh)
        g = drive.states(np.concatenate([[state.node], nodes]))
        n = len(state.x)
        z = self.table.march(state.x, g, np.diff(nodes, prepend=state.node))
        at = np.searchsorted(nodes, instants, side="right")
        values = np.empty_like(y)
        kernels.readout(z[at, :n], g[at] @ drive.readout, self.outputs.c, self.outputs.d, values)
        y[:] = values
        node = float(nodes[-1]) if len(nodes) else state.node
        return State(z[-1, :n].copy(), node), len(nodes)

    def slack(self, instants: Real) -> Real:
        """Return within which time an event is at an instant [s]."""
        return ULPS * np.spacing(instants + self.outputs.delay)

    def rested(self, state: State, number: int, instants: Real) -> State:
        """Return the state after instants at which all was zero, see ``Path``."""
        return State(state.x, max(state.node, float(instants[-1])))


def snapped(instants: Real, events: Real, slack: Real) -> Real:
    """Move an instant that differs from an event by rounding only onto the event.

    Instants behind a delay carry the rounding of the undelayed ones, which the slack counts in.
    """
    if len(events) == 0:
        return instants
    after = np.clip(np.searchsorted(events, instants), 0, len(events) - 1)
    before = np.maximum(after - 1, 0)
    result = np.where(np.abs(events[after] - instants) <= slack, events[after], instants)
    return np.where(np.abs(events[before] - instants) <= slack, events[before], result)


def _refreshed(nodes: Real, start: float, fresh: float) -> Real:
    """Put nodes into intervals longer than ``fresh``, ever denser towards their end.

    There the generator's state is set anew; the chain forgets what was lost long before the end.
    """
    if not np.isfinite(fresh) or len(nodes) == 0:
        return nodes
    begins = np.concatenate([[start], nodes[:-1]])
    longest = float(np.max(nodes - begins))
    if longest <= fresh:
        return nodes
    back = fresh * (2.0 ** np.arange(1, int(np.log2(longest / fresh)) + 2) - 1.0)
    long = np.flatnonzero(nodes - begins > fresh)
    added = nodes[long, None] - back[None, :]
    return np.union1d(nodes, added[added > begins[long, None]])
