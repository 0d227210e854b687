"""The rhythm in which a converter looks at its pin."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]
Index = NDArray[np.int64]


@dataclass(frozen=True)
class LookPattern:
    """Bursts of equally spaced looks, one burst per period; looks = 1 is a uniform row,

        t[i] = first + floor(i / looks) / rate + (i mod looks) · interval.

    Parameters
    ----------
    first : instant of look 0 [s]
    rate : bursts per second [Hz]
    looks : looks in a burst
    interval : between the looks of a burst; the gap to the next burst is at least as long [s]
    """

    first: float
    rate: float
    looks: int = 1
    interval: float = 0.0

    def at(self, numbers: Index) -> Real:
        """Return the instants of some looks, shape of ``numbers`` [s]."""
        if self.looks == 1:
            return np.asarray(self.first + numbers.astype(np.float64) / self.rate)
        burst, place = np.divmod(numbers, self.looks)
        within = place.astype(np.float64) * self.interval
        return np.asarray(self.first + burst.astype(np.float64) / self.rate + within)

    def between(self, start: int, stop: int) -> Real:
        """Return the instants of looks start to stop - 1, shape (stop - start,) [s]."""
        return self.at(np.arange(start, stop, dtype=np.int64))

    @property
    def look_rate(self) -> float:
        """Looks per second within a burst, or in a uniform row [Hz]."""
        return self.rate if self.looks == 1 else 1.0 / self.interval

    @property
    def closest(self) -> float:
        """Shortest interval between two looks [s]."""
        return 1.0 / self.rate if self.looks == 1 else self.interval

    @property
    def widest(self) -> float:
        """Longest interval between two looks [s]."""
        return 1.0 / self.rate - (self.looks - 1) * self.interval
