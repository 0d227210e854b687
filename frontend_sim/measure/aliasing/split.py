"""The ideal split of a row of points in what lies below and above a frequency."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, get_args

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real, positive, samples
from frontend_sim.stimulus.drive import Between, UniformDrive

LEAST = 4
"""Fewest points that have lines above anything."""

Edges = Literal["reflected", "periodic"]
"""How a row goes on beyond its ends: reflected in its end points, or repeated."""

ROUNDING = 1.0 + 1e-12
"""A line that lies above the limit by less than this lies on it."""


def part_above(values: ArrayLike, rate: float, limit: float, edges: Edges = "reflected") -> Real:
    """Return the part of a row of points that lies above a frequency, shape (N,).

    Every line above the limit is kept whole, every other one is gone: a filter with no transition.

    * reflected: the row goes on beyond each end turned round its end point, so that value and slope
      go on; less the line through both ends it is then a sum of sines (discrete sine transform).
      Only the curvature jumps, and what that does falls off with the distance from the ends; the
      end points themselves have no part above.
    * periodic: the row is a whole number of periods of the signal (Fourier series); exact then.

    Parameters
    ----------
    values : equally spaced, at least four, shape (N,), any unit
    rate : of the points [Hz]
    limit : lines at this frequency count as below [Hz]
    edges : how the row goes on beyond its ends

    Raises
    ------
    MeasureError
        If the points are unusable, a frequency is not above zero, or ``edges`` is no known word.
    """
    row = samples(values, LEAST)
    own, top = positive(rate, "the rate", "Hz"), positive(limit, "the limit", "Hz")
    return split_above(row, own, top, edges)


def split_above(points: Real, rate: float, limit: float, edges: Edges) -> Real:
    """Return what ``part_above`` does, of points that are known to be good; zeros of very few.

    Raises
    ------
    MeasureError
        If ``edges`` is no known word.
    """
    known = get_args(Edges)
    if edges not in known:
        raise MeasureError(f"edges must be one of {', '.join(known)}, but {edges!r} was given")
    count = len(points)
    if count < LEAST:
        return np.zeros(count)
    if edges == "periodic":
        # A constant is below any limit; taken off first, it costs no digits.
        lines = np.fft.rfft(points - np.mean(points))
        lines[np.arange(len(lines)) * (rate / count) <= limit * ROUNDING] = 0.0
        return np.asarray(np.fft.irfft(lines, count))
    from scipy.fft import dst, idst

    frequency, inside = _inside(points, rate)
    sines = dst(inside, type=1, norm="ortho")
    sines[frequency <= limit * ROUNDING] = 0.0
    found = np.zeros(count)
    found[1:-1] = idst(sines, type=1, norm="ortho")
    return found


def power_above(points: Real, rate: float, limit: float) -> tuple[Real, Real]:
    """Return frequency [Hz] and mean square of each line of a reflected row above a limit [Hz]."""
    from scipy.fft import dst

    frequency, inside = _inside(points, rate)
    power = dst(inside, type=1, norm="ortho") ** 2 / len(points)
    above = frequency > limit * ROUNDING
    return frequency[above], np.asarray(power[above])


def _inside(points: Real, rate: float) -> tuple[Real, Real]:
    """Return the frequencies of the sines [Hz], and the points between both ends less the line."""
    count = len(points)
    line = points[0] + (points[-1] - points[0]) * (np.arange(count) / (count - 1))
    frequency = np.arange(1.0, count - 1.0) * (0.5 * rate / (count - 1))
    return np.asarray(frequency), np.asarray((points - line)[1:-1])


@dataclass(frozen=True, eq=False)
class Points(UniformDrive):
    """A drive of given points.

    Parameters
    ----------
    row : the points, shape (N,)
    """

    row: Real
    rate: float
    origin: float
    between: Between

    @property
    def initial(self) -> float:
        """Return the value of point 0."""
        return float(self.row[0])

    def points(self, first: int, last: int) -> Real:
        """Return points first to last - 1; beyond the row its ends repeat."""
        return self.row[np.clip(np.arange(first, last), 0, len(self.row) - 1)]
