"""Recorded points as a grid of a multiple of their rate sees them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from frontend_sim.simulation.kernels import Real
from frontend_sim.stimulus.drive import Between, UniformDrive


@dataclass(frozen=True, eq=False)
class Resampled(UniformDrive):
    """The same signal by ``times`` as many points: a line or a held level is cut, not changed."""

    drive: UniformDrive
    times: int

    @property
    def rate(self) -> float:
        """Points per second [Hz]."""
        return self.drive.rate * self.times

    @property
    def origin(self) -> float:
        """Time of point 0 [s]."""
        return self.drive.origin

    @property
    def between(self) -> Between:
        """What the signal does between points."""
        return self.drive.between

    @property
    def initial(self) -> float:
        """Value before point 0."""
        return self.drive.initial

    def points(self, first: int, last: int) -> Real:
        """Return the points first to last - 1."""
        begin, stop = first // self.times, -(-last // self.times)
        whole = self.drive.points(begin, stop + 1)
        offset = first - begin * self.times
        if self.between == "hold":
            fine = np.repeat(whole[:-1], self.times)
        else:
            share = np.arange(self.times) / self.times
            fine = (whole[:-1, None] + np.diff(whole)[:, None] * share).reshape(-1)
        return fine[offset : offset + last - first]
