"""A double-exponential surge."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property
from typing import Literal, Self

import numpy as np
from pydantic import Field, model_validator

from frontend_sim.quantities import PositiveTime, SignalDifference, SignalLevel, Time
from frontend_sim.stimulus.base import Key, Stimulus
from frontend_sim.stimulus.drive import Drive, PiecewiseDrive, Real

LEAST_APART = 1e-3
"""Least difference of the two time constants, as a share of the shorter one: nearer together the
difference of the decays would lose its digits."""


@dataclass(frozen=True, eq=False)
class Surge(PiecewiseDrive):
    """u = baseline + scale · (exp(-(t - at)/decay) - exp(-(t - at)/rise)) from t = at on."""

    baseline: float
    scale: float
    at: float
    decay: float
    rise: float

    @property
    def generator(self) -> Real:
        """Two decays and a held baseline."""
        return np.diag([-1.0 / self.decay, -1.0 / self.rise, 0.0])

    @property
    def readout(self) -> Real:
        """The difference of the decays, and the baseline."""
        return np.array([1.0, -1.0, 1.0])

    @property
    def initial(self) -> float:
        """Return the baseline."""
        return self.baseline

    def events(self, start: float, stop: float) -> Real:
        """Return the beginning of the surge where it falls in (start, stop]."""
        return np.array([self.at] if start < self.at <= stop else [])

    def states(self, times: Real) -> Real:
        """Return the two decays and the baseline."""
        since = np.maximum(times - self.at, 0.0)
        on = np.where(times >= self.at, self.scale, 0.0)
        return np.column_stack(
            [
                on * np.exp(-since / self.decay),
                on * np.exp(-since / self.rise),
                np.full(len(times), self.baseline),
            ]
        )


@dataclass(frozen=True)
class Shape:
    """Time constants of a double exponential [s] and what its largest value is divided by [1]."""

    decay: float
    rise: float
    height: float


def _shape(decay: float, rise: float) -> Shape:
    top = decay * rise / (decay - rise) * math.log(decay / rise)
    return Shape(decay, rise, math.exp(-top / decay) - math.exp(-top / rise))


def _front_and_half_value(shape: Shape) -> tuple[float, float]:
    """Return front time and time to half value as IEC 60060-1 defines them.

    The front time is 1/0.6 of the time from 30 % to 90 %; the time to half value counts from the
    virtual origin, where the line through these two points meets zero. From memory, the standard
    was not at hand.
    """
    from scipy.optimize import brentq

    top = shape.decay * shape.rise / (shape.decay - shape.rise) * math.log(shape.decay / shape.rise)

    def level(t: float) -> float:
        return (math.exp(-t / shape.decay) - math.exp(-t / shape.rise)) / shape.height

    def crossing(share: float, start: float, stop: float) -> float:
        return float(brentq(lambda t: level(t) - share, start, stop, xtol=1e-15 * stop, rtol=1e-13))

    t30, t90 = crossing(0.3, 0.0, top), crossing(0.9, 0.0, top)
    half = crossing(0.5, top, top + 60.0 * shape.decay)
    front = (t90 - t30) / 0.6
    return front, half - (t30 - 0.3 * front)


def shape_of(front_time: float, half_time: float) -> Shape:
    """Return the double exponential with a front time T1 and a time to half value T2.

    Parameters
    ----------
    front_time, half_time : T1 and T2 [s]; a double exponential exists for T2 / T1 above about 4

    Raises
    ------
    ValueError
        If T2 is too short for the shape.
    """
    from scipy.optimize import root

    if half_time < 4.0 * front_time:
        raise ValueError(
            f"half_time {half_time:g} s must be at least 4 times front_time {front_time:g} s; "
            "a double exponential has no shorter tail"
        )

    def mismatch(logarithms: np.ndarray[tuple[int], np.dtype[np.float64]]) -> list[float]:
        decay, ratio = math.exp(logarithms[0]), 1.0 + math.exp(logarithms[1])
        front, half = _front_and_half_value(_shape(decay, decay / ratio))
        return [math.log(front / front_time), math.log(half / half_time)]

    guess = [math.log(1.4 * half_time), math.log(3.0 * half_time / front_time)]
    found = root(mismatch, guess, tol=1e-12)
    if max(abs(value) for value in mismatch(found.x)) > 1e-9:
        raise ValueError(
            f"no double exponential has front_time {front_time:g} s and half_time {half_time:g} s; "
            "give rise_constant and decay_constant instead"
        )
    decay = math.exp(found.x[0])
    return _shape(decay, decay / (1.0 + math.exp(found.x[1])))


class DoubleExponential(Stimulus):
    """u = baseline + peak · k · (exp(-t/decay) - exp(-t/rise)), the surge shape of IEC 60060-1.

    It is given by its front time and time to half value (1.2/50 us is the usual lightning
    impulse), or by the two time constants; k makes ``peak`` the largest value. From memory, the
    standard was not at hand.
    """

    kind: Literal["double-exponential"] = "double-exponential"
    peak: SignalDifference = Field(description="largest value above the baseline")
    at: Time = Field(default=0.0, description="instant at which the surge begins")
    baseline: SignalLevel = Field(default=0.0, description="value before the surge")
    front_time: PositiveTime | None = Field(default=None, description="front time T1")
    half_time: PositiveTime | None = Field(default=None, description="time to half value T2")
    rise_constant: PositiveTime | None = Field(
        default=None, description="time constant of the rise, the shorter one"
    )
    decay_constant: PositiveTime | None = Field(
        default=None, description="time constant of the decay, the longer one"
    )

    @model_validator(mode="after")
    def _one_way_to_give_the_shape(self) -> Self:
        times = (self.front_time is not None, self.half_time is not None)
        constants = (self.rise_constant is not None, self.decay_constant is not None)
        if not ((all(times) and not any(constants)) or (all(constants) and not any(times))):
            raise ValueError(
                "give either front_time and half_time, or rise_constant and decay_constant"
            )
        if self.rise_constant is not None and self.decay_constant is not None:
            if not self.rise_constant * (1.0 + LEAST_APART) <= self.decay_constant:
                raise ValueError(
                    f"rise_constant {self.rise_constant:g} s must be shorter than decay_constant "
                    f"{self.decay_constant:g} s, by {LEAST_APART:.1%} of it at least"
                )
        else:
            self.shape  # noqa: B018 - raises for times that no double exponential has
        return self

    @cached_property
    def shape(self) -> Shape:
        """Time constants and height of the shape."""
        if self.rise_constant is not None and self.decay_constant is not None:
            return _shape(self.decay_constant, self.rise_constant)
        assert self.front_time is not None
        assert self.half_time is not None
        return shape_of(self.front_time, self.half_time)

    def drives(self, key: Key) -> tuple[Drive, ...]:
        """Return one surge."""
        shape = self.shape
        return (Surge(self.baseline, self.peak / shape.height, self.at, shape.decay, shape.rise),)
