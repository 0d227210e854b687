"""A signal that becomes known as the run goes on: some of its points, joined by lines."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from frontend_sim.simulation.kernels import Real
from frontend_sim.stimulus.drive import Between, UniformDrive


@dataclass(frozen=True, eq=False)
class Polygon(UniformDrive):
    """Points ``first`` and on of a signal at j / rate, as far as they are known and still needed.

    Parameters
    ----------
    rate : [Hz];  initial : value before t = 0
    data : the points, shape (K,)
    """

    rate: float
    initial: float
    first: int
    data: Real
    origin: float = 0.0
    between: Between = "line"

    def points(self, first: int, last: int) -> Real:
        """Return the points first to last - 1; beyond the known ones, the nearest known."""
        begin, stop = first - self.first, last - self.first
        if begin >= 0 and stop <= len(self.data):
            return self.data[begin:stop]
        known = self.data[np.clip(np.arange(begin, stop), 0, len(self.data) - 1)]
        # Before t = 0 the signal may have been another one.
        return np.where(np.arange(first, last) < 0, self.initial, known)

    def grown(self, data: Real, keep: int) -> Polygon:
        """Return the polygon with more points behind, and without those before number ``keep``."""
        drop = max(min(keep - self.first, len(self.data) - 1), 0)
        joined = np.concatenate([self.data[drop:], data])
        return Polygon(self.rate, self.initial, self.first + drop, joined)
