"""The rhythm in which a converter looks at its pin."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Self

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]
Index = NDArray[np.int64]

SAME = 1e-12
"""Places that differ by less than this share of a period are the same: rounding."""


@dataclass(frozen=True)
class LookPattern:
    """Bursts of equally spaced looks, one burst per period; looks = 1 is a uniform row,

        t[i] = first + floor(i / looks) / rate + (i mod looks) · interval.

    With ``places`` the looks of a period are not equally spaced: (i mod looks) · interval becomes
    places[i mod looks].

    Parameters
    ----------
    first : instant of look 0 [s]
    rate : bursts per second [Hz]
    looks : looks in a burst
    interval : between the looks of a burst; the gap to the next burst is at least as long [s]
    places : of the looks of a period, from 0, increasing, shape (looks,); empty where they are
        equally spaced [s]
    """

    first: float
    rate: float
    looks: int = 1
    interval: float = 0.0
    places: tuple[float, ...] = ()

    @classmethod
    def of(cls, first: float, period: float, places: Sequence[float]) -> Self:
        """Return the simplest pattern with looks at some places of each period.

        Parameters
        ----------
        first : instant of the look at ``places[0]`` [s]
        period : [s];  places : increasing, within one period of each other [s]
        """
        told = np.asarray(places, dtype=np.float64) - places[0]
        for looks in range(1, len(told) + 1):
            parts, rest = divmod(len(told), looks)
            if rest:
                continue
            part = period / parts
            repeated = (np.arange(parts)[:, None] * part + told[:looks]).ravel()
            if np.allclose(repeated, told, rtol=0.0, atol=SAME * period):
                return cls._burst(first, 1.0 / part, told[:looks])
        raise AssertionError("a whole period repeats itself")

    @classmethod
    def _burst(cls, first: float, rate: float, places: Real) -> Self:
        if len(places) == 1:
            return cls(first, rate)
        interval = float(places[-1]) / (len(places) - 1)
        even = np.arange(len(places)) * interval
        burst = 1.0 / rate - float(places[-1]) >= interval * (1.0 - SAME)
        if burst and np.allclose(places, even, rtol=0.0, atol=SAME / rate):
            return cls(first, rate, len(places), interval)
        return cls(first, rate, len(places), interval, tuple(places.tolist()))

    def at(self, numbers: Index) -> Real:
        """Return the instants of some looks, shape of ``numbers`` [s]."""
        if self.looks == 1:
            return np.asarray(self.first + numbers.astype(np.float64) / self.rate)
        burst, place = np.divmod(numbers, self.looks)
        within = place.astype(np.float64) * self.interval
        if self.places:
            within = np.asarray(self.places)[place]
        return np.asarray(self.first + burst.astype(np.float64) / self.rate + within)

    def between(self, start: int, stop: int) -> Real:
        """Return the instants of looks start to stop - 1, shape (stop - start,) [s]."""
        return self.at(np.arange(start, stop, dtype=np.int64))

    @property
    def look_rate(self) -> float:
        """Looks per second within a burst, or in a uniform row [Hz]."""
        return self.rate if self.looks == 1 else 1.0 / self.closest

    @property
    def closest(self) -> float:
        """Shortest interval between two looks [s]."""
        if self.places:
            return min(self.gaps)
        return 1.0 / self.rate if self.looks == 1 else self.interval

    @property
    def widest(self) -> float:
        """Longest interval between two looks [s]."""
        if self.places:
            return max(self.gaps)
        return 1.0 / self.rate - (self.looks - 1) * self.interval

    @property
    def gaps(self) -> tuple[float, ...]:
        """Interval before each look of a period; before the first, since the last one [s]."""
        if not self.places:
            return (self.widest, *([self.interval] * (self.looks - 1)))
        inner = np.diff(self.places).tolist()
        return (1.0 / self.rate - self.places[-1], *inner)
