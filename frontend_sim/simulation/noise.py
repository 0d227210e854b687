"""Noise of the chain at the conversions: exact in its covariance, whatever the rate."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.analog.noise import NoiseModel, factor, stationary_covariance, step_covariance
from frontend_sim.converter.pattern import LookPattern
from frontend_sim.errors import ModelError
from frontend_sim.randomness import normal, stream
from frontend_sim.simulation import kernels
from frontend_sim.simulation.kernels import Index, Real


@dataclass(frozen=True, eq=False)
class NoisePath:
    """Noise at the nominal instants of looks: x[k+1] = Phi x[k] + L n[k], y = c x.

    Between bursts of looks the step is longer; each length of a step has a Phi and an L of its own.

    The covariance of one step is exact, so noise of any bandwidth folds down as it does in the
    converter, and no grid limits it. Jitter moves a conversion by far less than noise can tell, so
    the noise is taken at the nominal instants. The first conversion draws from the stationary
    covariance. Source: C. F. Van Loan 1978, for the covariance of a step.
    """

    powers: Real
    step_factors: Real
    lengths: Index
    first_factor: Real
    c: Real
    reach: Index
    key: tuple[int, ...]

    @classmethod
    def of(cls, model: NoiseModel, pattern: LookPattern, seed: int) -> Self:
        """Prepare for looks in a pattern; ModelError as the covariances say."""
        intervals, lengths = _lengths(pattern)
        steps = [step_covariance(model.a, model.b, interval) for interval in intervals]
        powers = np.stack([np.zeros_like(model.a), *(e for e, _ in steps)])
        factors = np.stack([factor(q) for _, q in steps])
        first = _before(model)
        key, reach = stream(seed, "noise of the chain"), kernels.reach(powers)
        return cls(powers, factors, lengths, first, model.c, reach, key)

    def start(self) -> Real:
        """Return the states at the first conversion, less the step to it."""
        size = len(self.first_factor)
        drawn = np.array([normal((*self.key, i, 1), 0, 1)[0] for i in range(size)])
        return np.asarray(self.first_factor @ drawn)

    def advance(self, x: Real, start: int, stop: int) -> tuple[Real, Real]:
        """Return the states after looks start to stop - 1, and their noise at the pin [V]."""
        x, states = x.copy(), np.empty((stop - start, len(x)))
        white = np.column_stack([normal((*self.key, i, 0), start, stop) for i in range(len(x))])
        which = self.lengths[np.arange(start, stop) % len(self.lengths)]
        sums = np.empty_like(states)
        for length, step_factor in enumerate(self.step_factors):
            rows = np.flatnonzero(which == length)
            mixed = np.empty((len(rows), len(x)))
            kernels.mix(step_factor, np.ascontiguousarray(white[rows]), mixed)
            sums[rows] = mixed
        which = which + 1  # the first of the powers keeps the state
        if start == 0:  # the state at the first look is there already
            sums[0], which[0] = 0.0, 0
        kernels.recur(x, self.powers, self.reach, which, sums, states)
        y = np.empty((1, stop - start))
        kernels.readout(states, np.zeros(stop - start), self.c[None], np.zeros(1), y)
        return x, y[0]


def _lengths(pattern: LookPattern) -> tuple[list[float], Index]:
    """Return the different steps of a pattern [s], and which one leads to each look of a period."""
    gaps = pattern.gaps
    told = [float(f"{gap:.11e}") for gap in gaps]  # the same but for rounding
    kinds = list(dict.fromkeys([told[-1], *told]))
    exact = dict(zip(reversed(told), reversed(gaps), strict=True))
    return [exact[kind] for kind in kinds], np.array([kinds.index(one) for one in told], np.int64)


def _before(model: NoiseModel) -> Real:
    """Return a factor of the covariance at the first look.

    It is the stationary one; where a pole at the origin gathers noise without bound there is
    none, and the gathering begins with the run.
    """
    try:
        return factor(stationary_covariance(model.a, model.b))
    except ModelError:
        return np.zeros_like(model.a)
