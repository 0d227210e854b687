"""Noise of the chain at the conversions: exact in its covariance, whatever the rate."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.analog.noise import NoiseModel, factor, stationary_covariance, step_covariance
from frontend_sim.randomness import normal, stream
from frontend_sim.simulation import kernels
from frontend_sim.simulation.kernels import Index, Real


@dataclass(frozen=True, eq=False)
class NoisePath:
    """Noise at nominal conversion instants: x[k+1] = Phi x[k] + L n[k], y = c x.

    The covariance of one step is exact, so noise of any bandwidth folds down as it does in the
    converter, and no grid limits it. Jitter moves a conversion by far less than noise can tell, so
    the noise is taken at the nominal instants. The first conversion draws from the stationary
    covariance. Source: C. F. Van Loan 1978, for the covariance of a step.
    """

    e: Real
    step_factor: Real
    first_factor: Real
    c: Real
    reach: Index
    key: tuple[int, ...]

    @classmethod
    def of(cls, model: NoiseModel, interval: float, seed: int) -> Self:
        """Prepare for conversions ``interval`` apart [s]; ModelError as the covariances say."""
        e, q = step_covariance(model.a, model.b, interval)
        first = factor(stationary_covariance(model.a, model.b))
        key = stream(seed, "noise of the chain")
        return cls(e, factor(q), first, model.c, kernels.reach(e), key)

    def start(self) -> Real:
        """Return the states at the first conversion, less the step to it."""
        size = len(self.e)
        drawn = np.array([normal((*self.key, i, 1), 0, 1)[0] for i in range(size)])
        return np.asarray(self.first_factor @ drawn)

    def advance(self, x: Real, start: int, stop: int) -> tuple[Real, Real]:
        """Return the states after conversions start to stop - 1, and their noise at the pin [V]."""
        x, states = x.copy(), np.empty((stop - start, len(x)))
        white = np.column_stack([normal((*self.key, i, 0), start, stop) for i in range(len(x))])
        if start == 0:
            white[0] = 0.0
        which = np.zeros(stop - start, np.int64)
        sums = np.empty_like(states)
        kernels.mix(self.step_factor, white, sums)
        powers = self.e[None]
        if start == 0:
            powers = np.stack([self.e, np.zeros_like(self.e)])
            which[0] = 1
        kernels.recur(x, powers, self.reach, which, sums, states)
        y = np.empty((1, stop - start))
        kernels.readout(states, np.zeros(stop - start), self.c[None], np.zeros(1), y)
        return x, y[0]
