"""The two drives of a recording: points on a grid, and points with time stamps."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from frontend_sim.stimulus.drive import Between, LineDrive, UniformDrive
from frontend_sim.stimulus.recording.series import Real
from frontend_sim.stimulus.recording.store import Stored


@dataclass(frozen=True)
class Conversion:
    """From a number of the file to the signal in SI: u = number · gain + offset."""

    gain: float
    offset: float

    def __call__(self, numbers: Real) -> Real:
        """Return the signal, shape as given; the numbers stay as they are."""
        if self.gain == 1.0 and self.offset == 0.0:
            return numbers
        signal = numbers * self.gain
        if self.offset != 0.0:
            signal += self.offset
        return signal


@dataclass(frozen=True, eq=False)
class Playback(UniformDrive):
    """Points of a recording with a constant rate.

    Parameters
    ----------
    read : ``read(first, last)`` gives numbers of the file;  first : the one that is point 0
    count : number of points
    rate : points per second [Hz];  origin : time of point 0 [s]
    between : what the signal does between points
    conversion : from numbers to the signal
    """

    read: Callable[[int, int], Real]
    first: int
    count: int
    rate: float
    origin: float
    between: Between
    conversion: Conversion

    @cached_property
    def initial(self) -> float:
        """Return the value of point 0."""
        return float(self.points(0, 1)[0])

    def points(self, first: int, last: int) -> Real:
        """Return points first to last - 1; those before and after the recording repeat its ends."""
        lowest, highest = max(first, 0), min(last, self.count)
        if (lowest, highest) == (first, last):
            return self._converted(first, last)
        wanted = np.empty(max(last - first, 0))
        if highest > lowest:
            wanted[lowest - first : highest - first] = self._converted(lowest, highest)
        if first < 0:
            wanted[:-first] = self._converted(0, 1)
        if last > self.count:
            wanted[max(self.count - first, 0) :] = self._converted(self.count - 1, self.count)
        return wanted

    def _converted(self, first: int, last: int) -> Real:
        return self.conversion(self.read(self.first + first, self.first + last))


@dataclass(frozen=True, eq=False)
class StampedPlayback(LineDrive):
    """Points of a recording with a time stamp each.

    Parameters
    ----------
    times : increasing, the first is 0 [s]
    numbers : of the file, one for each time
    between : what the signal does between points; after the last it is held
    conversion : from numbers to the signal
    """

    times: Stored
    numbers: Stored
    between: Between
    conversion: Conversion

    @property
    def held(self) -> bool:
        """Whether points are held until the next."""
        return self.between == "hold"

    @cached_property
    def initial(self) -> float:
        """Return the value of the first point."""
        return float(self.conversion(self.numbers.read(0, 1))[0])

    def events(self, start: float, stop: float) -> Real:
        """Return the time stamps in (start, stop]."""
        first, last = np.searchsorted(self.times.view(), [start, stop], side="right")
        return self.times.read(int(first), int(last))

    def states(self, times: Real) -> Real:
        """Return the value, and the slope where points are joined by lines."""
        stamps, numbers = self.times.view(), self.numbers.view()
        piece = np.maximum(np.searchsorted(stamps, times, side="right") - 1, 0)
        here = np.asarray(self.conversion(np.asarray(numbers[piece])))
        if self.held:
            return here[:, None]
        following = np.minimum(piece + 1, self.times.count - 1)
        there = self.conversion(np.asarray(numbers[following]))
        since = np.asarray(stamps[piece])
        length = np.asarray(stamps[following]) - since
        slope = np.divide(there - here, length, out=np.zeros(len(times)), where=length > 0.0)
        return np.column_stack([here + slope * (times - since), slope])
