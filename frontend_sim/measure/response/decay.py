"""How a step response decays to its end: samples that miss nothing, and a bound on what follows.

The distance from the end is e(t) = -c w(t) with dw/dt = A w, w(0) = -A^-1 b the settled states;
its slope is c v(t) with dv/dt = A v, v(0) = b. Both are marched through octaves of time, exactly
for any step, so a stretch is sampled finely only where a mode still rings in it.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Self

import numpy as np
from numpy.typing import NDArray

from frontend_sim.analog.block import Complex, Real
from frontend_sim.analog.chain import Chain
from frontend_sim.errors import ModelError
from frontend_sim.measure.response.ladder import Ladder

Whole = NDArray[np.int64]

CELLS = 6
"""Each octave of time is cut into 2^CELLS cells."""

PER_PERIOD = 16.0
"""Least samples in a period of a mode that still rings."""

DEAD = 60.0
"""Time constants after which a mode is e^-60 = 1e-26 of its start, and rings no more."""

MOST_DOUBLINGS = 21
"""Cells are cut at most into 2^21 pieces; only a quality factor above 1e6 needs more."""

MARGIN = 2.0
"""Allowance of the bound for peaks of the read-out between the nodes of the march."""


@dataclass(frozen=True, eq=False)
class Samples:
    """Equally spaced samples of the distance from the end.

    Parameters
    ----------
    start : time of the first [s]
    rung : their spacing, as a rung of the ladder
    states : w and v side by side, shape (K, n, 2)
    distance : e, shape (K,) [1]
    slope : de/dt, shape (K,) [1/s]
    """

    start: float
    rung: int
    states: Real
    distance: Real
    slope: Real


@dataclass(frozen=True, eq=False)
class Decay:
    """The march through a step response, for a chain whose modes all die out.

    Parameters
    ----------
    ladder : of the chain's own modes
    readout : c, shape (n,)
    poles : shape (n,) [rad/s]
    times : nodes of the march, shape (J,) [s]
    rungs : spacing from each node to the next, shape (J - 1,)
    nodes : w and v at each node, shape (J, n, 2)
    bound : largest |e| that can still come from each node on, shape (J,) [1]
    """

    ladder: Ladder
    readout: Real
    poles: Complex
    times: Real
    rungs: Whole
    nodes: Real
    bound: Real

    @classmethod
    def of(cls, chain: Chain, floor: float) -> Self:
        """March until no later distance from the end can exceed ``floor`` [1].

        For t = T + s the distance is -c exp(A s) w(T), so sum_i max_s |c exp(A s)|_i |w_i(T)|
        bounds all that comes after T. The maximum is taken over the march, which goes on until
        every mode t^k exp(-t/T_slowest) of the chain falls; a margin covers peaks between nodes.
        """
        states = np.column_stack([chain.settled(1.0), chain.b])
        return cls._from(chain, chain.c[-1], states, floor)

    @classmethod
    def to_rest(cls, chain: Chain, point: int, lack: Real, floor: float) -> Self:
        """March a point of a chain whose input rests, from any state it is in.

        Parameters
        ----------
        point : number of the point
        lack : states in the end less the states now, shape (n,)
        floor : see ``of``
        """
        return cls._from(chain, chain.c[point], np.column_stack([lack, -chain.a @ lack]), floor)

    @classmethod
    def _from(cls, chain: Chain, readout: Real, states: Real, floor: float) -> Self:
        if floor <= 0.0:
            raise ModelError(f"a band of {floor:g} is reached by no response; give one above zero")
        slowest = 1.0 / float(np.min(-chain.poles.real))
        ladder = Ladder.of(chain.a, 1100.0 * max(chain.order, 1) * slowest)
        return cls(*_march(ladder, readout, chain.poles, states, slowest, floor))

    def cells(self, last_first: bool, bounded_by: float = 0.0) -> Iterator[tuple[float, Samples]]:
        """Yield (bound, samples) stretch by stretch, in order of time or against it.

        Parameters
        ----------
        bounded_by : stretches from which on nothing can exceed this are left out [1]
        """
        count = int(np.sum(np.maximum.accumulate(self.bound[::-1])[::-1] > bounded_by))
        stretches = list(self._stretches(count))
        for node, doublings in reversed(stretches) if last_first else stretches:
            yield float(self.bound[node]), self._samples(node, doublings)

    def _stretches(self, count: int) -> Iterator[tuple[int, int]]:
        """Yield the first node of each stretch, and into how many pieces 2^k its cell is cut.

        Cells of an octave in which nothing rings faster than the cells are taken together, which
        is told by a negative number.
        """
        octave = 2**CELLS
        for first in range(0, len(self.rungs), octave):
            if first >= count:
                return
            doublings = self._doublings(first)
            if doublings == 0:
                yield first, -CELLS
            else:
                yield from ((node, doublings) for node in range(first, min(first + octave, count)))

    def _doublings(self, node: int) -> int:
        alive = -self.poles.real * self.times[node] <= DEAD
        fastest = float(np.max(np.abs(self.poles.imag[alive]), initial=0.0))
        cell = self.ladder.length(int(self.rungs[node]))
        pieces = cell * fastest * PER_PERIOD / (2.0 * math.pi)
        doublings = max(math.ceil(math.log2(pieces)), 0) if pieces > 0.0 else 0
        if doublings > MOST_DOUBLINGS:
            raise ModelError(
                "the response rings for too long to be searched: a quality factor above a "
                "million; give the pole pair more damping"
            )
        return min(doublings, int(self.rungs[node]))

    def _samples(self, node: int, doublings: int) -> Samples:
        rung = int(self.rungs[node]) - max(doublings, 0)
        states = self.ladder.fill(self.nodes[node], rung, abs(doublings))
        distance, slope = self.outputs(states)
        return Samples(float(self.times[node]), rung, states, distance, slope)

    def outputs(self, states: Real) -> tuple[Real, Real]:
        """Return e and de/dt of states (..., n, 2)."""
        read = np.einsum("i,...ij->...j", self.readout, states)
        return -read[..., 0], read[..., 1]

    def at(self, state: Real, times: Real) -> Real:
        """Return the states after times from one state (n, 2), shape (K, n, 2)."""
        n = len(self.readout)
        both = np.repeat(state[:, :, None], len(times), axis=2).reshape(n, -1)
        moved = self.ladder.advance(both, np.tile(times, 2))
        return np.moveaxis(moved.reshape(n, 2, len(times)), 2, 0)


def _march(
    ladder: Ladder, readout: Real, poles: Complex, state: Real, slowest: float, floor: float
) -> tuple[Ladder, Real, Complex, Real, Whole, Real, Real]:
    """Return the fields of ``Decay``: octave by octave until the bound has fallen to the floor."""
    backward = Ladder(ladder.system.T, ladder.unit, np.swapaxes(ladder.rungs, 1, 2))
    norm = float(np.max(np.sum(np.abs(ladder.system), axis=1)))
    rung = ladder.rung_below(1.0 / (16.0 * norm))
    row, start = readout[:, None], 0.0
    times, rungs, nodes, rows = [np.zeros(1)], [], [state[None]], [row[None]]
    reach = np.abs(readout)
    while True:
        new = ladder.fill(state, rung, CELLS)[1:]
        new_rows = backward.fill(row, rung, CELLS)[1:]
        times.append(start + ladder.length(rung) * np.arange(1.0, 2.0**CELLS + 1.0))
        rungs.append(np.full(2**CELLS, rung))
        nodes.append(new)
        rows.append(new_rows)
        state, row, start = new[-1], new_rows[-1], float(times[-1][-1])
        reach = np.maximum(reach, np.max(np.abs(new_rows[:, :, 0]), axis=0))
        still = MARGIN * float(reach @ np.abs(state[:, 0]))
        over = start >= 2.0 * len(readout) * slowest and still < floor
        if over or rung + CELLS + 1 >= len(ladder.rungs):
            break
        rung += 1 if len(times) > 2 else 0
    all_nodes = np.concatenate(nodes)
    bound = MARGIN * np.abs(all_nodes[:, :, 0]) @ reach
    return (
        ladder, readout, poles, np.concatenate(times), np.concatenate(rungs), all_nodes, bound
    )  # fmt: skip
