"""Between two points of a grid: where the states are at an instant off the grid."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property
from typing import Protocol

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.chain import Chain
from frontend_sim.analog.discretize import half_step
from frontend_sim.analog.exponential import augmented, expm1
from frontend_sim.simulation import since_kernels
from frontend_sim.simulation.intervals import IntervalTable
from frontend_sim.stimulus.drive import Between


class SincePoint(Protocol):
    """Advances states in place from points of a grid to instants after them."""

    def advance(self, states: Real, value: Real, rise: Real, since: Real) -> None:
        """Advance states (K, n) by since (K,) [s]; value (K,) at the point, rise (K,) per step."""


@dataclass(frozen=True, eq=False)
class Exponential:
    """The exact way, for an input that is held or goes in a line over steps [s] of a grid.

    Parameters
    ----------
    usual : how far behind a point most instants lie; infinite where nothing is known, for speed
        alone [s]
    """

    chain: Chain
    between: Between
    step: float
    usual: float = math.inf

    @cached_property
    def _table(self) -> IntervalTable:
        """Tabulated at the first instant off the grid; many runs have none."""
        if self.between == "hold":
            generator, readout = np.zeros((1, 1)), np.ones(1)
        else:
            generator = np.array([[0.0, 1.0 / self.step], [0.0, 0.0]])
            readout = np.array([1.0, 0.0])
        system = augmented(self.chain.a, self.chain.b, generator, readout)
        return IntervalTable.of(system, self.step)

    @cached_property
    def _usual_step(self) -> Real:
        if math.isinf(self.usual):
            return np.zeros_like(self._table.system)
        return np.ascontiguousarray(expm1(self._table.system * self.usual).T)

    def advance(self, states: Real, value: Real, rise: Real, since: Real) -> None:
        """Advance by the tabulated exponential, see ``SincePoint``."""
        if states.shape[1] and np.any(since):
            table, usual, step = self._table, self.usual, self._usual_step
            steps = table.unit, table.columns, table.table
            since_kernels.since_point(states, value, rise, since, usual, step, *steps)


@dataclass(frozen=True, eq=False)
class Trapezoid:
    """One trapezoidal step of the part of the interval, as the bilinear model would make it."""

    chain: Chain
    step: float
    prewarp: float | None

    def advance(self, states: Real, value: Real, rise: Real, since: Real) -> None:
        """Advance by x += (I - k a)^-1 (2 k a x + k b (u0 + u1)), see ``SincePoint``."""
        off = np.flatnonzero(since)
        if len(off) == 0 or states.shape[1] == 0:
            return
        k = np.array([half_step(float(part), self.prewarp) for part in since[off]])
        system = np.eye(self.chain.order) - k[:, None, None] * self.chain.a
        u = 2.0 * value[off] + rise[off] * (since[off] / self.step)
        right = 2.0 * k[:, None] * (states[off] @ self.chain.a.T) + (k * u)[:, None] * self.chain.b
        states[off] += np.linalg.solve(system, right[:, :, None])[:, :, 0]
