"""From conversion to conversion over a uniform grid of points: the lifted recursion."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Literal, Self

import numpy as np
from numpy.typing import NDArray

from frontend_sim.analog.block import Real
from frontend_sim.analog.chain import Chain
from frontend_sim.analog.discretize import DiscreteModel
from frontend_sim.analog.exponential import power
from frontend_sim.simulation import kernels
from frontend_sim.simulation.lifted import (
    LONGEST_ROW,
    PRODUCT,
    Lifted,
    entries,
    row_length,
    weights_of,
)
from frontend_sim.simulation.path import Outputs, State
from frontend_sim.simulation.resampled import Resampled
from frontend_sim.simulation.since import SincePoint
from frontend_sim.stimulus.drive import UniformDrive

Index = NDArray[np.int64]

LONGEST_SUM = 4096
"""Most points in one weighted sum; longer stretches are cut after the conversion before them."""
MOST_POINTS = 1 << 22
"""Most points held in memory at once."""
WAVEFORM_TILE = 256 * LONGEST_ROW
"""Instants in one product where every point is an output. All tiles are powers of two up to this
one, so blocks that start at its multiples never cut a tile."""


@dataclass(frozen=True, eq=False)
class UniformPath:
    """The chain steps over the points of a uniform drive, many at once.

    With x~ = x - stop·u, a step of any discrete model is x~[j+1] = Phi x~[j] + gamma u[j], with
    gamma = start + Phi stop, and over the d points between two conversions

        x~[j+d] = Phi^d x~[j] + sum_i Phi^(d-1-i) gamma u[j+i],

    one pass over the stimulus whatever the order of the chain. Source: Chen and Francis 1995,
    *Optimal Sampled-Data Control Systems*, chapter 8 (lifting); from memory.
    """

    drive: UniformDrive
    outputs: Outputs
    model: DiscreteModel
    gamma: Real
    since: SincePoint
    initial: Real
    stride: int
    settled: bool
    even: bool = False

    @classmethod
    def of(
        cls,
        chain: Chain,
        drive: UniformDrive,
        outputs: Outputs,
        model: DiscreteModel,
        since: SincePoint,
        initial: Literal["settled", "rest"],
        stride: int,
        even: bool = False,
    ) -> Self:
        """Prepare the path for a discrete model of the chain with the drive's step.

        ``stride`` is the usual number of points between two instants; it sets the size of the
        matrix products alone.
        """
        x = chain.settled(drive.initial) if initial == "settled" else np.zeros(chain.order)
        gamma = model.start + model.stop + model.e @ model.stop
        return cls(
            drive,
            outputs,
            model,
            gamma,
            since,
            x,
            stride,
            initial == "settled",
            even,
        )

    def start(self) -> State:
        """Return the state at the last point at or before t = 0."""
        node = int(self.drive.locate(np.zeros(1))[0][0])
        before, u = self.drive.points(node - 1, node + 1)
        if self.settled and before != u:  # a jump at t = 0: the line to it begins one step earlier
            node, u = node - 1, before
        return State(self.initial - self.model.stop * u, node)

    def advance(
        self, state: State, number: int, instants: Real, drive: UniformDrive | None = None
    ) -> tuple[State, Real]:
        """Advance through instants, see ``Path``.

        Where instant k is point k · stride for certain, whole tiles need not look for their points,
        nor what is left of the last one, up to a row.
        """
        source, sure = drive or self.drive, 0
        if drive is not None and isinstance(self.drive, Resampled):
            source = Resampled(drive, self.drive.times)
        if self.on_points and number % self.tile == 0:
            sure = len(instants) // self.lifted.row * self.lifted.row
        if sure == 0:
            return self._located(state, source, number, instants)
        x, y, begin = state.x.copy(), np.empty((len(self.outputs.d), len(instants))), 0
        if number == 0 and self.settled:  # so the state is the same one stride before
            x = self.initial - self.model.stop * source.initial
        elif number == 0:
            begin = min(self.tile, sure)
            state, y[:, :begin] = self._located(state, source, 0, instants[:begin])
            x = state.x
        for done in range(begin, sure, self.tile):
            upto, node = min(done + self.tile, sure), (number + done - 1) * self.stride
            points = source.points(node, node + (upto - done) * self.stride + 1)
            self.lifted.advance(x[None], points, y[:, None, done:upto])
        state = State(x, (number + sure - 1) * self.stride)
        if sure < len(instants):
            state, y[:, sure:] = self._located(state, source, number + sure, instants[sure:])
        return state, y

    def _located(
        self, state: State, source: UniformDrive, number: int, instants: Real
    ) -> tuple[State, Real]:
        """Advance through any instants, each from the point before it."""
        index, since = self.drive.locate(instants, self.outputs.delay)
        y = np.empty((len(self.outputs.d), len(instants)))
        x, node, done = state.x.copy(), int(state.node), 0
        while done < len(instants):
            while index[done] - node > MOST_POINTS:
                points = source.points(node, node + MOST_POINTS + 1)
                self._states(x, points, 0, np.array([MOST_POINTS]), False)
                node += MOST_POINTS
            part = slice(done, self._piece(index, node, number, done))
            points = source.points(node, int(index[part][-1]) + 2)
            self._fill(x, points, node, number + done, index[part], since[part], y[:, part])
            node, done = int(index[part.stop - 1]), part.stop
        return State(x, node), y

    def rested(self, state: State, number: int, instants: Real) -> State:
        """Return the state after instants at which all was zero, see ``Path``."""
        return State(state.x, int(self.drive.locate(instants[-1:], self.outputs.delay)[0][0]))

    def _piece(self, index: Index, node: int, number: int, done: int) -> int:
        """Return where the next piece ends: few enough points, and at a multiple of tiles."""
        last = (int(index[done - 1]) if done else node) + MOST_POINTS
        stop = max(int(np.searchsorted(index, last, "right")), done + 1)
        if stop >= len(index):
            return len(index)
        aligned = (number + stop) // self.tile * self.tile - number
        return aligned if aligned > done else stop

    @property
    def on_points(self) -> bool:
        """Whether instant k is point k · stride for certain, and a stride fits into one sum."""
        return self.even and self.stride <= LONGEST_SUM

    @cached_property
    def tile(self) -> int:
        """Number of instants in one matrix product, a power of two."""
        if self.stride == 1:
            return WAVEFORM_TILE
        most = PRODUCT // (max(self.stride, 1) * max(len(self.gamma), 8))
        return 1 << min(max(most, 1).bit_length() - 1, 10)

    @cached_property
    def lifted(self) -> Lifted:
        """The outputs of a whole tile at every stride-th point."""
        entry = entries(self.stride, len(self.gamma))
        row = min(row_length(entry, len(self.outputs.d)), self.tile)
        feed = np.asarray(self.outputs.d + self.outputs.c @ self.model.stop)
        step = self._power(self.stride)
        return Lifted.of(step, self._stride_weights, self.outputs, feed, row)

    @cached_property
    def _ages(self) -> dict[int, Real]:
        """Weights that were needed so far, by how many there are."""
        return {}

    def _weights(self, length: int) -> Real:
        """Return Phi^age gamma for at least ``length`` ages, down to 0, shape (n, ...)."""
        longest = max(self._ages, default=0)
        if longest < max(length, 1):
            longest = 1 << (length - 1).bit_length()
            columns, step = weights_of(self.model.e, self.gamma[:, None], longest)
            self._ages[longest], self._powers[longest] = columns, step
        return self._ages[longest]

    @cached_property
    def _powers(self) -> dict[int, Real]:
        """Powers of the step that were needed so far."""
        return {}

    def _power(self, count: int) -> Real:
        if count not in self._powers:
            self._powers[count] = power(self.model.e, count)
        return self._powers[count]

    def _fill(
        self, x: Real, points: Real, node: int, number: int, index: Index, since: Real, y: Real
    ) -> None:
        """Advance x~ in place from a point to the last of ``index``, and fill in the outputs.

        points : from number ``node`` to one behind the last of ``index``
        """
        at, before = 0, node
        while at < len(index):
            stop = min((number + at) // self.tile * self.tile + self.tile - number, len(index))
            part = slice(at, stop)
            steady, on_points = False, False
            if stop - at == self.tile and self.stride <= LONGEST_SUM:
                steady, on_points = kernels.steady(index[part], since[part], before, self.stride)
            first = before - node
            if on_points:
                here = points[first : index[stop - 1] - node + 1]
                self.lifted.advance(x[None], here, y[:, None, part])
            else:
                count = np.diff(index[part], prepend=before)
                states = self._states(x, points, first, count, steady)
                y[:, part] = self._read(states, points, index[part] - node, since[part])
            at, before = stop, int(index[stop - 1])

    def _states(self, x: Real, points: Real, first: int, count: Index, steady: bool) -> Real:
        """Return x~ after each of ``count`` points in a row from point ``first``, shape (K, n)."""
        if steady and self.stride > 1:
            rows = points[first : first + len(count) * self.stride].reshape(-1, self.stride)
            which = np.zeros(len(count), np.int64)
            return self._recur(x, np.array([self._power(self.stride)]), which, self._sums(rows))
        steps = np.maximum(-(-count // LONGEST_SUM), 1)
        owner = np.repeat(np.arange(len(count)), steps)
        turn = np.arange(len(owner)) - np.repeat(np.cumsum(steps) - steps, steps)
        parts = np.minimum(count[owner] - turn * LONGEST_SUM, LONGEST_SUM)
        starts = first + np.cumsum(parts) - parts
        lengths, which = np.unique(parts, return_inverse=True)
        powers = np.array([self._power(int(length)) for length in lengths])
        sums = np.empty((len(owner), len(x)))
        kernels.weigh(points, starts, parts, self._weights(int(lengths[-1])), sums)
        states: Real = self._recur(x, powers, which, sums)[np.cumsum(steps) - 1]
        return states

    def _sums(self, rows: Real) -> Real:
        """Return the weighted sums over rows of points, shape (K, n): one product."""
        sums: Real = rows @ self._stride_weights
        return sums

    @cached_property
    def _stride_weights(self) -> Real:
        """The weights of one stride, contiguous for the matrix product, shape (stride, n)."""
        return np.ascontiguousarray(self._weights(self.stride)[:, -self.stride :].T)

    @cached_property
    def _reach(self) -> Index:
        return kernels.reach(self.model.e)

    def _recur(self, x: Real, powers: Real, which: Index, sums: Real) -> Real:
        states = np.empty_like(sums)
        kernels.recur(x, powers, self._reach, which, sums, states)
        return states

    def _read(self, states: Real, points: Real, here: Index, since: Real) -> Real:
        """Return the outputs at the instants, which lie ``since`` after their points."""
        u, following = points[here], points[here + 1]
        states = states + u[:, None] * self.model.stop
        rise = following - u
        self.since.advance(states, u, rise, since)
        if self.drive.between == "line":
            u = u + rise * (since * self.drive.rate)
        y = np.empty((len(self.outputs.d), len(here)))
        kernels.readout(states, u, self.outputs.c, self.outputs.d, y)
        return y
