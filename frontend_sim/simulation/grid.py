"""A stimulus as a discrete model sees it: its values at the points of a grid."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from frontend_sim.simulation.kernels import Real
from frontend_sim.stimulus.drive import Between, Drive, UniformDrive


@dataclass(frozen=True, eq=False)
class GridDrive(UniformDrive):
    """The sum of drives, looked at ``rate`` times a second, held or joined by lines."""

    drives: tuple[Drive, ...]
    rate: float
    between: Between
    origin: float = 0.0

    @property
    def initial(self) -> float:
        """Value before t = 0."""
        return sum(drive.initial for drive in self.drives)

    def points(self, first: int, last: int) -> Real:
        """Return the values at first/rate to (last - 1)/rate."""
        times = np.arange(first, last, dtype=np.float64) / self.rate
        total = np.zeros(last - first)
        for drive in self.drives:
            total += drive.values(times)
        return total
