"""A clock that runs ahead and behind, slowly."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Literal, Self

import numpy as np
from numpy.typing import NDArray
from pydantic import Field, model_validator

from frontend_sim.converter.gauss_markov import gauss_markov
from frontend_sim.converter.pattern import LookPattern
from frontend_sim.quantities import Angle, Frequency, PositiveTime, Time
from frontend_sim.values import Value

Real = NDArray[np.float64]


class Wander(Value):
    """How far the clock is ahead of or behind its mean rate, as a time error d(t),

    sinusoidal: d = sqrt(2) rms sin(2 pi frequency t + phase);
    gauss-markov: a random d with E[d(t) d(t')] = rms² exp(-|t - t'| / correlation_time).
    """

    shape: Literal["sinusoidal", "gauss-markov"] = Field(
        description="sinusoidal, or a random first-order Gauss-Markov process"
    )
    rms: Time = Field(description="rms of the time error of the instants")
    frequency: Frequency | None = Field(default=None, description="of the sinusoidal wander")
    phase: Angle = Field(default=0.0, description="of the sinusoidal wander at t = 0")
    correlation_time: PositiveTime | None = Field(
        default=None, description="after which a gauss-markov wander has forgotten 63 % of itself"
    )

    @model_validator(mode="after")
    def _keys_suit_the_shape(self) -> Self:
        sinusoidal = self.shape == "sinusoidal"
        needed, foreign = ("frequency", "correlation_time")[:: 1 if sinusoidal else -1]
        if getattr(self, needed) is None:
            raise ValueError(f"a {self.shape} wander needs {needed}")
        if getattr(self, foreign) is not None:
            raise ValueError(f"a {self.shape} wander has no {foreign}; take it out")
        if not sinusoidal and self.phase != 0.0:
            raise ValueError("a gauss-markov wander has no phase; take it out")
        return self

    def deviation(self, pattern: LookPattern, start: int, stop: int, seed: int) -> Real:
        """Return d at the nominal instants of looks start to stop - 1, shape (stop - start,) [s].

        It depends on the seed and the number of a look alone.
        """
        return self.rms * _SHAPES[self.shape](self, pattern, start, stop, seed)

    def change(self, interval: float) -> float:
        """Return an upper bound of the rms change of d over an interval [s]."""
        if self.correlation_time is not None:
            return self.rms * math.sqrt(-2.0 * math.expm1(-interval / self.correlation_time))
        return self.rms * min(2.0 * math.pi * (self.frequency or 0.0) * interval, 2.0)


def _sine(wander: Wander, pattern: LookPattern, start: int, stop: int, seed: int) -> Real:
    turns = (wander.frequency or 0.0) * pattern.between(start, stop)
    angle = 2.0 * np.pi * (turns - np.floor(turns)) + wander.phase
    return np.asarray(math.sqrt(2.0) * np.sin(angle))


def _random(wander: Wander, pattern: LookPattern, start: int, stop: int, seed: int) -> Real:
    constant = wander.correlation_time or math.inf
    return gauss_markov(seed, "clock wander", pattern, constant, start, stop)


_SHAPES: dict[str, Callable[[Wander, LookPattern, int, int, int], Real]] = {
    "sinusoidal": _sine,
    "gauss-markov": _random,
}
