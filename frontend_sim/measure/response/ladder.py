"""A linear system at any time, by matrix exponentials over powers of two of a unit of time."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.exponential import expm1

FINEST = 2.0**-60
"""Norm of the system times the unit of time: below it one term of the series is exact."""


@dataclass(frozen=True, eq=False)
class Ladder:
    """E_k = exp(M u 2^k) - I for k = 0, 1, ..., the rungs of a ladder.

    Any double is a sum of powers of two, so states at any time cost one matrix product for each
    binary digit, and a bisection in time needs no further exponential:

        E_(k+1) = 2 E_k + E_k²,    x <- x + E_k x.

    The identity is never added, see ``analog/exponential.py``: modes far slower than the unit keep
    their relative accuracy.

    Parameters
    ----------
    system : M, shape (n, n) [1/s]
    unit : u, a power of two [s]
    rungs : shape (K, n, n) [1]
    """

    system: Real
    unit: float
    rungs: Real

    @classmethod
    def of(cls, system: Real, longest: float) -> Self:
        """Make the ladder of dx/dt = M x for times up to ``longest`` [s]."""
        norm = float(np.max(np.sum(np.abs(system), axis=1), initial=0.0))
        longest = max(longest, 1e-280)
        exponent = math.floor(math.log2(FINEST / norm)) if norm > 0.0 else 0
        exponent = min(exponent, math.floor(math.log2(longest)))
        unit = 2.0**exponent
        count = math.floor(math.log2(longest)) - exponent + 1
        return cls(system, unit, doubled(expm1(system * unit), count))

    @classmethod
    def of_steps(cls, step: Real, most: int) -> Self:
        """Make the ladder of x[k+1] = x[k] + E x[k] for up to ``most`` steps; time counts steps."""
        return cls(np.zeros_like(step), 1.0, doubled(step, max(most, 1).bit_length()))

    def length(self, rung: int) -> float:
        """Return the length of a rung [s]."""
        return self.unit * 2.0**rung

    def rung_below(self, time: float) -> int:
        """Return the longest rung that is no longer than a time [s], the lowest at least."""
        rung = math.floor(math.log2(max(time / self.unit, 1.0)))
        return min(rung, len(self.rungs) - 1)

    def advance(self, states: Real, times: Real) -> Real:
        """Return the states at times of their own.

        Parameters
        ----------
        states : shape (n, K), one column for each time
        times : at least 0, below twice the longest rung, shape (K,) [s]
        """
        states, rest = states.copy(), times.copy()
        for rung in range(len(self.rungs) - 1, -1, -1):
            length = self.length(rung)
            on = rest >= length
            if np.any(on):
                states[:, on] += self.rungs[rung] @ states[:, on]
                rest[on] -= length
        return np.asarray(states + (self.system @ states) * rest)

    def fill(self, state: Real, rung: int, doublings: int) -> Real:
        """Return the states at 0, 1, ..., 2^doublings rungs, shape (2^doublings + 1, n, m).

        Parameters
        ----------
        state : shape (n, m), m states that are carried together
        """
        filled = state[None]
        for level in range(rung, rung + doublings):
            filled = np.concatenate([filled, filled + self.rungs[level] @ filled])
        last = filled[:1] + self.rungs[rung + doublings] @ filled[:1]
        return np.concatenate([filled, last])

    def last(
        self, state: Real, end: float, finest: float, holds: Callable[[Real], bool]
    ) -> tuple[float, Real]:
        """Return the last time in [0, end] at which a condition holds, and the state there.

        The condition holds at 0 and changes once in the interval. The time is built digit by
        digit, to ``finest`` [s].

        Parameters
        ----------
        state : shape (n, m)
        """
        time = 0.0
        for rung in range(self.rung_below(end), -1, -1):
            length = self.length(rung)
            if length < finest:
                break
            if time + length > end:
                continue
            further = state + self.rungs[rung] @ state
            if holds(further):
                time, state = time + length, further
        return time, state


def doubled(first: Real, count: int) -> Real:
    """Return E, 2 E + E², ...: ``count`` matrices, each for twice the time, shape (count, n, n)."""
    rungs = np.empty((count, *first.shape))
    rungs[0] = first
    for rung in range(1, count):
        rungs[rung] = 2.0 * rungs[rung - 1] + rungs[rung - 1] @ rungs[rung - 1]
    return rungs
