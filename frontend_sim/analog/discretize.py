"""Discrete models of a chain on a uniform grid; each method is one row of a table."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from typing import Literal

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.chain import Chain
from frontend_sim.analog.exponential import augmented, expm1

Method = Literal["zoh", "foh", "bilinear"]

KEPT = 128
"""Models that are kept: the pin, waveforms and checks of a run step by the same one."""


@dataclass(frozen=True, eq=False)
class DiscreteModel:
    """One step of a chain over an interval h between two points of its input,

        x[j+1] = x[j] + e x[j] + start u[j] + stop u[j+1].

    The matrix is kept less the identity, so that modes much slower than the step keep their rate.

    Parameters
    ----------
    e : shape (n, n) [1]
    start, stop : shape (n,) [1]
    """

    e: Real
    start: Real
    stop: Real


@lru_cache(maxsize=KEPT)
def zoh(chain: Chain, step: float, prewarp: float | None = None) -> DiscreteModel:
    """Return the step-invariant model: the input is held over each interval.

    Source: C. F. Van Loan 1978, "Computing integrals involving the matrix exponential".
    """
    e = expm1(augmented(chain.a, chain.b, np.zeros((1, 1)), np.ones(1)) * step)
    n = chain.order
    return DiscreteModel(e[:n, :n], e[:n, n], np.zeros(n))


@lru_cache(maxsize=KEPT)
def foh(chain: Chain, step: float, prewarp: float | None = None) -> DiscreteModel:
    """Return the ramp-invariant model: the input goes in a line over each interval.

    Source: C. F. Van Loan 1978, as for ``zoh``, with a generator of value and rise per step.
    """
    generator = np.array([[0.0, 1.0 / step], [0.0, 0.0]])
    e = expm1(augmented(chain.a, chain.b, generator, np.array([1.0, 0.0])) * step)
    n = chain.order
    return DiscreteModel(e[:n, :n], e[:n, n] - e[:n, n + 1], e[:n, n + 1])


@lru_cache(maxsize=KEPT)
def bilinear(chain: Chain, step: float, prewarp: float | None = None) -> DiscreteModel:
    """Return the trapezoidal model, s = (1/k) (z - 1) / (z + 1), k = h/2.

    With a pre-warp frequency f, k = tan(pi f h) / (2 pi f), so that the response at f is exact.
    Source: A. Tustin 1947, "A method of analysing the behaviour of linear systems in terms of
    time series".

    Parameters
    ----------
    step : h [s]
    prewarp : f [Hz], below half the grid rate
    """
    k = half_step(step, prewarp)
    system = np.eye(chain.order) - k * chain.a
    right = np.column_stack([2.0 * k * chain.a, k * chain.b])
    columns = np.asarray(np.linalg.solve(system, right), dtype=np.float64)
    n = chain.order
    return DiscreteModel(columns[:, :n], columns[:, n], columns[:, n])


def half_step(step: float, prewarp: float | None) -> float:
    """Return k of the bilinear transform [s]: h/2, or tan(pi f h)/(2 pi f) pre-warped at f."""
    if prewarp is None:
        return 0.5 * step
    return math.tan(math.pi * prewarp * step) / (2.0 * math.pi * prewarp)


def warped_frequency(frequency: float, step: float, prewarp: float | None) -> float:
    """Return where a bilinear model shows what the chain does at a frequency [Hz],

    f_d = atan(2 pi f k) / (pi h).
    """
    return math.atan(2.0 * math.pi * frequency * half_step(step, prewarp)) / (math.pi * step)


METHODS: dict[Method, Callable[[Chain, float, float | None], DiscreteModel]] = {
    "zoh": zoh,
    "foh": foh,
    "bilinear": bilinear,
}
