"""A sampling capacitor that visits one input after the other: what it holds, from visit to visit.

It knows no scenario and no stimulus: signals come as arrays.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Self

import numpy as np

from frontend_sim.analog.exponential import expm1
from frontend_sim.simulation import switched_kernels
from frontend_sim.simulation.intervals import IntervalTable
from frontend_sim.simulation.kernels import Index, Real
from frontend_sim.simulation.switched_network import SwitchedNetwork

_Tables = tuple[Index, Real, Real, Real, Real, Real, Real, Real, Real]


@dataclass(frozen=True, eq=False)
class MemoryState:
    """What is left of earlier visits.

    Parameters
    ----------
    q : in the port of each channel, shape (N, n)
    held : voltage of the sampling capacitor [V]
    last : when each channel was left, shape (N,) [s]
    """

    q: Real
    held: float
    last: Real


@dataclass(frozen=True, eq=False)
class Visits:
    """Some acquisitions in a row, and the signals that they see.

    Parameters
    ----------
    channel : number of the channel, shape (K,)
    instants : of sampling, increasing, shape (K,) [s]
    ended : z of the channel with its switch closed for ever, at the instants, shape (K, n + 1);
        the port's states first, the capacitor last, unused ones between them zero
    begun : the same when the switch closes, shape (K, n + 1)
    pin : voltage of a pin whose switch never closes, when the switch closes, shape (K,) [V]
    """

    channel: Index
    instants: Real
    ended: Real
    begun: Real
    pin: Real


@dataclass(frozen=True, eq=False)
class SwitchedMemory:
    """One sampling capacitor and N inputs that it is connected to in turn.

    Parameters
    ----------
    networks : one for each channel, all with the same sampling capacitor
    acquisition : how long the switch is closed before each instant [s]
    starts : (m, c, p): a capacitor has m · previous + c + p · pin when the switch closes
    longest : the longest time between two visits of a channel [s]
    usual : times between two visits of a channel that come often, for speed alone [s]
    """

    networks: tuple[SwitchedNetwork, ...]
    acquisition: float
    starts: tuple[float, float, float]
    longest: float
    usual: tuple[float, ...] = ()

    @classmethod
    def of(
        cls,
        networks: Sequence[SwitchedNetwork],
        acquisition: float,
        starts: tuple[float, float, float],
        longest: float,
        usual: Sequence[float] = (),
    ) -> Self:
        """Make the memory."""
        return cls(tuple(networks), float(acquisition), starts, float(longest), tuple(usual))

    @property
    def width(self) -> int:
        """Number of states n of the largest port."""
        return max(network.port.order for network in self.networks)

    def state(self, held: float, last: Real) -> MemoryState:
        """Return a state in which ports have forgotten earlier visits."""
        return MemoryState(np.zeros((len(self.networks), self.width)), held, last)

    def rows(self, channel: int, states: Real) -> Real:
        """Return z of one channel, shape (order, K), as ``Visits`` takes it, shape (K, n + 1)."""
        order = self.networks[channel].port.order
        wide = np.zeros((states.shape[1], self.width + 1))
        wide[:, :order] = states[:-1].T
        wide[:, -1] = states[-1]
        return wide

    def at_rest(self, channel: int) -> Real:
        """Return z of one channel for a source that rests at one volt, shape (n + 1,)."""
        network = self.networks[channel]
        settled = np.append(network.share, 1.0)[:, None]
        return np.asarray(self.rows(channel, settled)[0])

    def advance(self, state: MemoryState, visits: Visits) -> tuple[MemoryState, Real, Real]:
        """Return the state behind some visits, what is held at each instant, shape (K,) [V], and
        how far each acquisition has moved the capacitor, shape (K,) [V].
        """
        q, last = state.q.copy(), state.last.copy()
        held, moved = np.empty(len(visits.instants)), np.empty(len(visits.instants))
        s = switched_kernels.acquire(
            q,
            float(state.held),
            last,
            visits.channel,
            visits.instants,
            self.acquisition,
            np.ascontiguousarray(visits.ended),
            np.ascontiguousarray(visits.begun),
            np.ascontiguousarray(visits.pin),
            *self._tables,
            np.array(self.starts),
            held,
            moved,
            np.empty((2, self.width + 1)),
        )
        return MemoryState(q, float(s), last), held, moved

    @cached_property
    def _tables(self) -> _Tables:
        """Return order, c, b, closed, system, unit, table, usual and steps of all channels.

        They are as the loop has them. Two channels alike share no memory, but a scan has few.
        """
        count, n = len(self.networks), self.width
        order = np.array([network.port.order for network in self.networks], np.int64)
        c, b = np.zeros((count, n)), np.zeros((count, n))
        closed, system = np.zeros((count, n + 1, n + 1)), np.zeros((count, n, n))
        unit = np.ones(count)
        tables = [IntervalTable.of(network.port.a, self.longest) for network in self.networks]
        gaps = [interval - self.acquisition for interval in self.usual]
        usual = np.tile(np.array(gaps, np.float64), (count, 1))
        steps = np.zeros((count, len(gaps), n, n))
        levels = max(table.table.shape[0] for table in tables)
        table = np.zeros((count, levels, tables[0].table.shape[1], n, n))
        for i, (network, own) in enumerate(zip(self.networks, tables, strict=True)):
            m = network.port.order
            c[i, :m], b[i, :m] = network.port.c, network.share
            place = [*range(m), n]
            closed[np.ix_([i], place, place)] = expm1(network.closed * self.acquisition)
            system[i, :m, :m], unit[i] = own.columns, own.unit
            table[i, : len(own.table), :, :m, :m] = own.table
            for g, gap in enumerate(usual[i]):
                steps[i, g, :m, :m] = expm1(network.port.a * gap).T
        return order, c, b, closed, system, unit, table, usual, steps
