"""A discrete model of a chain, as it answers to frequencies and to a step."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from frontend_sim.analog.block import Complex, Real
from frontend_sim.analog.chain import Chain
from frontend_sim.analog.discretize import METHODS, DiscreteModel, Method
from frontend_sim.measure.response.ladder import Ladder


@dataclass(frozen=True, eq=False)
class GridModel:
    """A discrete model of a chain as a filter from the points of a grid to the points of a grid.

    Parameters
    ----------
    method : zoh, foh or bilinear
    model : one step
    readout, feed : output equation, c of shape (n,) and d
    rate : grid points per second [Hz]
    """

    method: Method
    model: DiscreteModel
    readout: Real
    feed: float
    rate: float

    @classmethod
    def of(cls, chain: Chain, method: Method, rate: float, prewarp: float | None) -> GridModel:
        """Make the model of a chain, its pure delay left out."""
        model = METHODS[method](chain, 1.0 / rate, prewarp)
        return cls(method, model, chain.c[-1], float(chain.d[-1]), rate)

    def response(self, frequency: Real) -> Complex:
        """Return c (z - 1 - e)^-1 (start + z stop) + d with z = exp(2 pi j f / rate)."""
        turn = 2j * np.pi * np.asarray(frequency, dtype=np.float64) / self.rate
        less_one = np.expm1(turn)
        drive = self.model.start + (1.0 + less_one)[:, None] * self.model.stop
        system = less_one[:, None, None] * np.eye(len(self.readout)) - self.model.e
        states = np.linalg.solve(system, drive[:, :, None])[:, :, 0]
        return np.asarray(states @ self.readout + self.feed, dtype=np.complex128)

    @cached_property
    def _ladder(self) -> Ladder:
        n = len(self.readout)
        step = np.zeros((n + 1, n + 1))
        step[:n, :n] = self.model.e
        step[:n, n] = self.model.start + self.model.stop
        return Ladder.of_steps(step, 2**50)

    def step_response(self, points: Real) -> Real:
        """Return the response to points that are 1 from number 0 on, at whole numbers (K,) [1]."""
        states = np.zeros((len(self.readout) + 1, len(points)))
        # The interval that ends at point 0 sees the new value at its end already.
        states[:-1] = self.model.stop[:, None]
        states[-1] = 1.0
        states = self._ladder.advance(states, points)
        return np.asarray(self.readout @ states[:-1] + self.feed)
