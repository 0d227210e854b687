"""A half-sine shock."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from pydantic import Field

from frontend_sim.quantities import PositiveTime, SignalDifference, SignalLevel, Time
from frontend_sim.stimulus.base import Key, Stimulus
from frontend_sim.stimulus.drive import Drive, PiecewiseDrive, Real


@dataclass(frozen=True, eq=False)
class HalfWave(PiecewiseDrive):
    """u = baseline + peak · sin(pi (t - at) / length) for at <= t < at + length."""

    baseline: float
    peak: float
    at: float
    length: float

    @property
    def generator(self) -> Real:
        """A rotation by pi / length, and a held baseline."""
        w = np.pi / self.length
        return np.array([[0.0, w, 0.0], [-w, 0.0, 0.0], [0.0, 0.0, 0.0]])

    @property
    def readout(self) -> Real:
        """Sine and baseline."""
        return np.array([1.0, 0.0, 1.0])

    @property
    def initial(self) -> float:
        """Return the baseline."""
        return self.baseline

    def events(self, start: float, stop: float) -> Real:
        """Return the beginning and the end of the shock where they fall in (start, stop]."""
        times = np.array([self.at, self.at + self.length])
        return times[(times > start) & (times <= stop)]

    def states(self, times: Real) -> Real:
        """Return sine and cosine during the shock, zeros outside, and the baseline."""
        inside = (times >= self.at) & (times < self.at + self.length)
        angle = np.pi * (times - self.at) / self.length
        return np.column_stack(
            [
                np.where(inside, self.peak * np.sin(angle), 0.0),
                np.where(inside, self.peak * np.cos(angle), 0.0),
                np.full(len(times), self.baseline),
            ]
        )


class HalfSine(Stimulus):
    """A shock of half-sine shape, u = baseline + peak · sin(pi (t - at) / length).

    The pulse shape of IEC 60068-2-27 (from memory, the standard was not at hand).
    """

    kind: Literal["half-sine"] = "half-sine"
    peak: SignalDifference = Field(description="height of the shock above the baseline")
    length: PositiveTime = Field(description="length of the shock")
    at: Time = Field(default=0.0, description="instant at which the shock begins")
    baseline: SignalLevel = Field(default=0.0, description="value before and after the shock")

    def drives(self, key: Key) -> tuple[Drive, ...]:
        """Return one half wave."""
        return (HalfWave(self.baseline, self.peak, self.at, self.length),)
