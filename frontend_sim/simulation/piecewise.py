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
        return cls(drive, outputs, IntervalTable.of(system, chain.order, longest), x)

    def start(self) -> State:
        """Return the state at t = 0."""
        return State(self.initial, 0.0)

    def advance(
        self, state: State, number: int, instants: Real, drive: PiecewiseDrive | None = None
    ) -> tuple[State, Real]:
        """Advance through instants, see ``Path``."""
        drive = drive or self.drive
        events = drive.events(state.node, float(instants[-1]) * (1.0 + 1e-15))
        instants = _snapped(instants, events)
        nodes = np.union1d(instants, events)
        nodes = nodes[nodes > state.node]
        g = drive.states(np.concatenate([[state.node], nodes]))
        steps = np.diff(nodes, prepend=state.node)
        x = state.x.copy()
        states = np.empty((len(nodes) + 1, len(x)))
        states[0] = x
        self._march(x, g, steps, states[1:])
        at = np.searchsorted(nodes, instants, side="right")
        y = np.empty((len(self.outputs.d), len(instants)))
        u = g[at] @ self.drive.readout
        kernels.readout(states[at], u, self.outputs.c, self.outputs.d, y)
        return State(x, float(nodes[-1]) if len(nodes) else state.node), y

    def rested(self, state: State, number: int, instants: Real) -> State:
        """Return the state after instants at which all was zero, see ``Path``."""
        return State(state.x, max(state.node, float(instants[-1])))

    def _march(self, x: Real, g: Real, steps: Real, states: Real) -> None:
        if len(x) and len(steps):
            table = self.table
            kernels.march(x, g, steps, table.unit, table.system, table.table, table.stop, states)


def _snapped(instants: Real, events: Real) -> Real:
    """Move an instant that differs from an event by rounding only onto the event."""
    if len(events) == 0:
        return instants
    after = np.clip(np.searchsorted(events, instants), 0, len(events) - 1)
    before = np.maximum(after - 1, 0)
    slack = ULPS * np.spacing(np.maximum(instants, np.finfo(np.float64).tiny))
    result = np.where(np.abs(events[after] - instants) <= slack, events[after], instants)
    return np.where(np.abs(events[before] - instants) <= slack, events[before], result)
