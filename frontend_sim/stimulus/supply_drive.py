"""A supply voltage behind an RC filter, over its nominal value."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from frontend_sim.stimulus.drive import PiecewiseDrive, Real
from frontend_sim.stimulus.phase import cycles


@dataclass(frozen=True, eq=False)
class SupplyDrive(PiecewiseDrive):
    """A level, a step and a ripple through 1 / (1 + s T), settled before t = 0,

        e(t) = level + step (1 - exp(-(t - at)/T)) from t = at on
               + ripple (sin wt - wT cos wt + wT exp(-t/T)) / (1 + (wT)²),

    where the ripple, ripple · sin wt, begins at t = 0. Source: closed forms of the RC low pass.

    Parameters
    ----------
    level, step, ripple : over the nominal voltage [1]
    at : [s];  frequency : w / (2 pi) [Hz];  constant : T, 0 for no filter [s]
    scale : factor of all
    """

    level: float
    step: float
    at: float
    ripple: float
    frequency: float
    constant: float
    scale: float = 1.0

    @property
    def generator(self) -> Real:
        """A held value, a rotation, a decay."""
        g, w = np.zeros((4, 4)), 2.0 * math.pi * self.frequency
        g[1, 2], g[2, 1] = w, -w
        g[3, 3] = -1.0 / self.constant if self.constant else 0.0
        return g

    @property
    def readout(self) -> Real:
        """Held value, sine, decay; all scaled."""
        return self.scale * np.array([1.0, 1.0, 0.0, 1.0])

    @property
    def initial(self) -> float:
        """Return the level before t = 0."""
        return self.scale * self.level

    @property
    def fresh(self) -> float:
        """A thousand cycles of the ripple."""
        return 1000.0 / self.frequency if self.ripple else math.inf

    def events(self, start: float, stop: float) -> Real:
        """Return the instant of the step where it falls in (start, stop]."""
        return np.array([self.at] if self.step and start < self.at <= stop else [])

    def states(self, times: Real) -> Real:
        """Return held value, sine and cosine of the filtered ripple, and what decays."""
        times = np.asarray(times, dtype=np.float64)
        after = times >= self.at
        w, constant = 2.0 * math.pi * self.frequency, self.constant
        size = self.ripple / math.hypot(1.0, w * constant)
        angle = 2.0 * np.pi * cycles(self.frequency, times) - math.atan(w * constant)
        decay = np.zeros(len(times))
        if constant:
            since = np.where(after, times - self.at, 0.0)
            decay = -np.where(after, self.step, 0.0) * np.exp(-since / constant)
            share = self.ripple * w * constant / (1.0 + (w * constant) ** 2)
            decay += share * np.exp(-np.maximum(times, 0.0) / constant)
        held = self.level + np.where(after, self.step, 0.0)
        return np.column_stack([held, size * np.sin(angle), size * np.cos(angle), decay])
