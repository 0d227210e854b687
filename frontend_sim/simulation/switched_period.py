"""A scan that repeats for ever: its fixed point, and what channels do to each other in it."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from frontend_sim.simulation.kernels import Index, Real
from frontend_sim.simulation.switched_memory import MemoryState, SwitchedMemory, Visits


@dataclass(frozen=True, eq=False)
class Period:
    """The visits of one period of a scan.

    Parameters
    ----------
    channel : which is visited, shape (K,)
    instants : of sampling within the period, increasing, shape (K,) [s]
    length : of the period [s]
    """

    channel: Index
    instants: Real
    length: float


def settled_state(memory: SwitchedMemory, period: Period, levels: Real) -> MemoryState:
    """Return the state just before a period, after the scan has gone on for ever.

    Over one period the state x = [q; held] becomes M x + G u + h with u the levels, which rest;
    the fixed point solves (I - M) x = G u + h. Columns of M are found by sending unit states
    through the period itself.

    Parameters
    ----------
    levels : voltages of the sources, shape (N,) [V]
    """
    used = _used(memory, period)
    size = int(np.count_nonzero(used)) + 1
    none = np.zeros(len(levels))

    def after(packed: Real, levels: Real) -> Real:
        state, _ = _through(memory, period, _unpacked(memory, period, used, packed), levels)
        return np.append(state.q[used], state.held)

    constant = after(np.zeros(size), none)
    matrix = np.column_stack([after(unit, none) - constant for unit in np.eye(size)])
    driven = after(np.zeros(size), levels)
    fixed = np.asarray(np.linalg.solve(np.eye(size) - matrix, driven), np.float64)
    return _unpacked(memory, period, used, fixed)


def settled_voltages(memory: SwitchedMemory, period: Period, levels: Real) -> Real:
    """Return what each visit of a period holds in the end, shape (K,) [V]; see above."""
    state = settled_state(memory, period, levels)
    return _through(memory, period, state, levels)[1]


def memory_matrix(memory: SwitchedMemory, period: Period) -> Real:
    """Return d held / d source of each visit and channel in the fixed point, shape (K, N) [1].

    Row k holds 1 - sum of the errors at the visited channel itself, and beside it the share of
    every other channel (the aggressor) that visit k (the victim) converts.
    """
    count = len(memory.networks)
    none = settled_voltages(memory, period, np.zeros(count))
    columns = [settled_voltages(memory, period, unit) - none for unit in np.eye(count)]
    return np.column_stack(columns)


def constant_visits(memory: SwitchedMemory, channel: Index, instants: Real, levels: Real) -> Visits:
    """Return visits to sources that rest at levels, shape (N,) [V]."""
    rest = np.stack([memory.at_rest(i) for i in range(len(memory.networks))])
    z = rest[channel] * levels[channel][:, None]
    return Visits(channel, instants, z, z, levels[channel])


def shifted(state: MemoryState, time: float) -> MemoryState:
    """Return the state with its times moved by ``time`` [s]."""
    return replace(state, last=state.last + time)


def _last(memory: SwitchedMemory, period: Period) -> Real:
    """Return when each channel was visited last before the period; long ago if never."""
    last = np.full(len(memory.networks), period.instants[0] - period.length)
    for channel, instant in zip(period.channel, period.instants, strict=True):
        last[channel] = instant - period.length
    return last


def _through(
    memory: SwitchedMemory, period: Period, state: MemoryState, levels: Real
) -> tuple[MemoryState, Real]:
    """Return the state behind a period, and what its visits hold."""
    visits = constant_visits(memory, period.channel, period.instants, levels)
    after, held, _ = memory.advance(state, visits)
    return after, held


def _used(memory: SwitchedMemory, period: Period) -> NDArray[np.bool_]:
    """Tell which states of q there are: those of ports that are visited, shape (N, n)."""
    order = [
        network.port.order if channel in period.channel else 0
        for channel, network in enumerate(memory.networks)
    ]
    return np.arange(memory.width) < np.array(order)[:, None]


def _unpacked(
    memory: SwitchedMemory, period: Period, used: NDArray[np.bool_], packed: Real
) -> MemoryState:
    q = np.zeros(used.shape)
    q[used] = packed[:-1]
    return MemoryState(q, float(packed[-1]), _last(memory, period))
