"""A closed loop of any order around an amplifier that slews and meets its rails."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property
from typing import Self

import numpy as np

from frontend_sim.analog.block import Block, Real
from frontend_sim.analog.exponential import expm1
from frontend_sim.analog.limits.follower import NAMES
from frontend_sim.analog.limits.limiter import Limiter, Segments, Touched, continuous

LEVELS = 48
"""Halvings of the longest piece: event times are found to 4e-15 of it."""


@dataclass(frozen=True, eq=False)
class HigherLoop(Limiter):
    """A block H(s) = c (s - A)^-1 b of order n, read as an integrator in a loop of unity feedback,

        dw/dt = clip(k (G u - y), -down, up),    low <= w <= high,    Y(s) = F(s) W(s),

    where G = H(0) and k F(s) = s H / (G - H), F(0) = 1: what follows the integrator, a second pole
    or a loaded output for instance, is what makes the block more than one pole. In the states of
    the block k = G / (c A^-2 b), w = -k c A^-1 x, and with s the limited slope

        dx/dt = A x + b u    while nothing limits,
        dx/dt = (A + b c / G) x + b s / (k G)    while something does; at a rail s is zero.

    The deviation is c (x - x_lin), where x_lin is advanced beside x on the same line as input.

    Parameters
    ----------
    a, b, c : of the block, shapes (n, n) [1/s], (n,) [1/s], (n,)
    gain : G [1];  rate : k [rad/s];  up, down : [V/s];  low, high : [V]
    """

    replaced: range
    a: Real
    b: Real
    c: Real
    gain: float
    rate: float
    up: float
    down: float
    low: float
    high: float
    limits = NAMES
    bends = False

    @classmethod
    def of(
        cls, block: Block, replaced: range, up: float, down: float, low: float, high: float
    ) -> Self | None:
        """Return the loop of a block, None if the block is no such loop.

        It is none with direct feed-through, without gain at rest or with a pole at the origin, and
        if its step response begins to the wrong side on the whole (k below zero).
        """
        if block.order == 0 or block.d != 0.0 or np.any(block.poles == 0.0):
            return None
        rest = np.linalg.solve(block.a, block.b)
        gain = -float(block.c @ rest)
        lag = float(block.c @ np.linalg.solve(block.a, rest))
        if gain == 0.0 or not gain / lag > 0.0:
            return None
        return cls(
            replaced, block.a, block.b, block.c, gain, gain / lag, up, down, low, high
        )  # fmt: skip

    @cached_property
    def integrator(self) -> Real:
        """Row that gives w from the states, -k c A^-1, shape (n,)."""
        return np.asarray(-self.rate * np.linalg.solve(self.a.T, self.c))

    def start(self, u: float, v: float) -> Real:
        """Return deviation, mode, x_lin and x - x_lin at rest."""
        target = self.gain * u
        held = min(max(target, self.low), self.high)
        settled = -np.linalg.solve(self.a, self.b)
        beyond = settled * ((held - target) / self.gain)
        return np.concatenate([[float(self.c @ beyond), -1.0], settled * u, beyond])

    def advance(self, state: Real, span: Segments) -> tuple[Real, Real, Real, Touched]:
        """Advance event by event; the deviation never jumps, since x and x_lin are states."""
        from frontend_sim.analog.limits.loop_kernels import loop

        touched, deviation = Touched.none(4), np.empty(len(span.length))
        after = state.copy()
        loop(
            after, span.length, span.begin, span.end, span.linear,
            *self._tables(float(np.max(span.length))), self.c, self.integrator,
            self.rate, self.gain, self.up, self.down, self.low, self.high,
            deviation, touched.time, touched.piece, touched.since,
        )  # fmt: skip
        return after, deviation, continuous(state, deviation, span.jumps), touched

    @cached_property
    def _known(self) -> dict[int, tuple[float, Real, Real]]:
        """Tables that were needed so far, by the exponent of their longest step."""
        return {}

    def _tables(self, longest: float) -> tuple[float, Real, Real]:
        """Return the smallest step [s], and for its doublings the steps of both systems, less I.

        The free one has the states [x, u, du/dt], the limited one [x, s].
        """
        top = math.ceil(math.log2(max(longest, 1e-300)))
        if top not in self._known:
            unit = 2.0 ** (top - LEVELS)
            n = len(self.b)
            free, held = np.zeros((n + 2, n + 2)), np.zeros((n + 1, n + 1))
            free[:n, :n], free[:n, n], free[n, n + 1] = self.a, self.b, 1.0
            held[:n, :n] = self.a + np.outer(self.b, self.c) / self.gain
            held[:n, n] = self.b / (self.rate * self.gain)
            self._known[top] = (unit, _doublings(free * unit), _doublings(held * unit))
        return self._known[top]


def _doublings(step: Real) -> Real:
    """Return exp(M 2^i) - I for i = 0 ... LEVELS, shape (LEVELS + 1, N, N)."""
    steps = [expm1(step)]
    for _ in range(LEVELS):
        steps.append(2.0 * steps[-1] + steps[-1] @ steps[-1])
    return np.array(steps)
