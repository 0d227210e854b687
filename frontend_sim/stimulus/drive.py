"""What drives the chain: the two forms in which every stimulus reaches the engine.

A stimulus is, piece by piece, the output of a small linear generator,

    dg/dt = G g,    u = r g,

whose state g is reset at events. Where the pieces are the cells of a uniform grid (a recording, a
burst of noise), the engine only needs the points and what happens between them. A drive knows the
signal; it does not know the chain.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

Real = NDArray[np.float64]
Between = Literal["hold", "line"]

LINE = np.array([[0.0, 1.0], [0.0, 0.0]])
"""Generator of a line: the states are the value and its slope [1/s]."""


class PiecewiseDrive(ABC):
    """A signal given by a linear generator whose states are known in closed form at any time."""

    if TYPE_CHECKING:  # read-only here, so that a drive may store these, or work them out

        @property
        @abstractmethod
        def generator(self) -> Real:
            """G, shape (m, m) [1/s]."""

        @property
        @abstractmethod
        def readout(self) -> Real:
            """r, shape (m,)."""

        @property
        @abstractmethod
        def initial(self) -> float:
            """The value before t = 0."""

    @property
    def fresh(self) -> float:
        """Time after which the generator's state, run by itself, is worth setting anew [s]."""
        return np.inf

    @abstractmethod
    def events(self, start: float, stop: float) -> Real:
        """Return the times in (start, stop] at which the generator's state is reset, sorted [s]."""

    @abstractmethod
    def states(self, times: Real) -> Real:
        """Return g at times t >= 0 [s], shape (K, m); at an event's own time, the new state."""

    def values(self, times: Real) -> Real:
        """Return u at times [s], shape (K,); before t = 0 the initial value."""
        inside = self.states(np.maximum(times, 0.0)) @ self.readout
        return np.where(times < 0.0, self.initial, inside)


class LineDrive(PiecewiseDrive):
    """A signal of straight lines, or of held values alone, from event to event."""

    @property
    def held(self) -> bool:
        """Whether no value ever changes between events; one state is then enough."""
        return False

    @property
    def generator(self) -> Real:
        """Value and slope, or one held value."""
        return np.zeros((1, 1)) if self.held else LINE

    @property
    def readout(self) -> Real:
        """The value."""
        return np.ones(1) if self.held else np.array([1.0, 0.0])


class UniformDrive(ABC):
    """A signal given by points at ``origin + j / rate``, held or joined by lines."""

    if TYPE_CHECKING:  # read-only here, as those of ``PiecewiseDrive``

        @property
        @abstractmethod
        def rate(self) -> float:
            """Points per second [Hz]."""

        @property
        @abstractmethod
        def origin(self) -> float:
            """Time of point 0, at least 0 [s]."""

        @property
        @abstractmethod
        def between(self) -> Between:
            """What the signal does between points."""

        @property
        @abstractmethod
        def initial(self) -> float:
            """The value before point 0, which is the value of point 0."""

    @abstractmethod
    def points(self, first: int, last: int) -> Real:
        """Return the points first to last - 1, shape (last - first,).

        Before point 0 and after the last one the signal keeps the value of the end point.
        """

    def locate(self, times: Real, later: float = 0.0) -> tuple[NDArray[np.int64], Real]:
        """Return the index of the point at or before each time, and the time since it [s].

        A time within four units in the last place of a point is that point: conversions at k/rate
        then meet the points of a record of the same rate whatever the rounding of both. Times that
        are instants less a delay carry the rounding of the instants; ``later`` is that delay [s].
        """
        from frontend_sim.stimulus.locate import locate

        index, since = np.empty(len(times), np.int64), np.empty(len(times))
        locate(times, later, self.origin, self.rate, 4.0 * np.finfo(np.float64).eps, index, since)
        return index, since

    def values(self, times: Real) -> Real:
        """Return u at times [s], shape (K,)."""
        if len(times) == 0:
            return np.empty(0)
        index, since = self.locate(times)
        first, last = int(index.min()), int(index.max()) + 2
        points = self.points(first, last)
        here = points[index - first]
        if self.between == "hold":
            return here
        return here + (points[index - first + 1] - here) * (since * self.rate)


Drive = PiecewiseDrive | UniformDrive


@dataclass(frozen=True, eq=False)
class Lines(LineDrive):
    """Pieces of straight lines: value ``levels[i] + slopes[i] (t - breaks[i])`` from breaks[i] on.

    Parameters
    ----------
    initial : value before the first break
    breaks : increasing times, at least 0 [s]
    levels : value at each break
    slopes : slope after each break [1/s]
    """

    initial: float
    breaks: Real
    levels: Real
    slopes: Real

    @classmethod
    def of(
        cls, initial: float, breaks: ArrayLike, levels: ArrayLike, slopes: ArrayLike | None = None
    ) -> Lines:
        """Make the drive from anything that NumPy reads; without slopes the levels are held."""
        level_array = np.asarray(levels, dtype=np.float64)
        slope_array = (
            np.zeros_like(level_array) if slopes is None else np.asarray(slopes, dtype=np.float64)
        )
        return cls(float(initial), np.asarray(breaks, dtype=np.float64), level_array, slope_array)

    @cached_property
    def held(self) -> bool:
        """Whether all slopes are zero."""
        return not np.any(self.slopes)

    def events(self, start: float, stop: float) -> Real:
        """Return the breaks in (start, stop]."""
        first, last = np.searchsorted(self.breaks, [start, stop], side="right")
        return np.asarray(self.breaks[first:last], dtype=np.float64)

    def states(self, times: Real) -> Real:
        """Return the value, and the slope where there is one."""
        piece = np.searchsorted(self.breaks, times, side="right") - 1
        inside = np.maximum(piece, 0)
        slope = np.where(piece < 0, 0.0, self.slopes[inside])
        level = np.where(piece < 0, self.initial, self.levels[inside])
        if self.held:
            return level[:, None]
        return np.column_stack([level + slope * (times - self.breaks[inside]), slope])
