"""Whether time stamps are a uniform grid in disguise.

Printed or stored time stamps are rounded: 360 points per second print as 0.00278, 0.00556, ...,
and their differences jitter by a digit. They **count as uniform** if one grid, t0 + i T, explains
all of them,

    |t[i] - t0 - i T| <= max(h[i], 1e-6 T)    for every i,

where h[i] is half of the last printed or stored digit of t[i]. The first bound is what the print
itself cannot tell; it is used only while the last digit is finer than half an interval, since a
coarser one could hide a missing point. The second is harmless: 1e-6 of an interval moves a signal
by no more than 1e-6 of the difference between neighbouring points.

Many T are left by these bounds. The one with the fewest digits, as a rate or as an interval, is
taken (360 Hz, not 359.99987 Hz), so the grid does not drift against conversions at the true rate.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from frontend_sim.stimulus.recording.stamps import Stamps

HARMLESS = 1e-6
"""Share of an interval by which a time stamp may always lie off the grid."""
COARSEST = 0.25
"""Share of an interval that half of the last digit must stay below to be trusted."""
ROUNDS = 64


@dataclass(frozen=True)
class Grid:
    """Points at first + j / rate.

    Parameters
    ----------
    rate : [Hz];  first : time of point 0 [s]
    slack : how far off the grid the time stamps lie, or could lie unseen [s]
    """

    rate: float
    first: float
    slack: float


def find_grid(stamps: Stamps, printed: bool) -> Grid | None:
    """Return the grid that explains all time stamps, or None if there is no such grid.

    The intervals T that are still possible form an interval; each candidate that fails cuts it at
    the pair of time stamps that contradicts the candidate most.

    Parameters
    ----------
    printed : whether the rounding of the print counts; without it only 1e-6 of an interval
    """
    first, last, halves = stamps.ends()
    steps = stamps.count - 1
    mean = (last - first) / steps if steps else 0.0
    if mean <= 0.0:
        return None
    slack = max(halves, 2.0 * HARMLESS * mean)
    low, high = (last - first - slack) / steps, (last - first + slack) / steps
    low = max(low, 0.5 * mean)
    for _ in range(ROUNDS):
        if low > high:
            return None
        interval = simplest(low, high)
        cut = _contradiction(stamps, interval, mean, printed)
        if isinstance(cut, Grid):
            return cut
        if cut.step > 0:
            low = max(low, cut.interval)
        else:
            high = min(high, cut.interval)
    return None


def mean_grid(stamps: Stamps) -> tuple[Grid, float]:
    """Return the grid of the mean rate, and how far the time stamps lie off it at most [s]."""
    first, last, halves = stamps.ends()
    steps = max(stamps.count - 1, 1)
    interval = simplest((last - first - halves) / steps, (last - first + halves) / steps)
    furthest = 0.0
    for position, seconds, _ in stamps.blocks():
        grid = first + np.arange(position, position + len(seconds)) * interval
        furthest = max(furthest, float(np.max(np.abs(seconds - grid))))
    return Grid(1.0 / interval, first, halves), furthest


def simplest(low: float, high: float) -> float:
    """Return the interval between two bounds that has the fewest digits, as interval or as rate."""
    middle, rate = 0.5 * (low + high), 0.5 * (1.0 / low + 1.0 / high)
    for digits in range(1, 18):
        rounded = 1.0 / float(f"{rate:.{digits - 1}e}")
        if low <= rounded <= high:
            return rounded
        rounded = float(f"{middle:.{digits - 1}e}")
        if low <= rounded <= high:
            return rounded
    return middle


@dataclass(frozen=True)
class _Cut:
    """A bound for T: from below where ``step`` is positive, else from above."""

    interval: float
    step: int


def _contradiction(stamps: Stamps, interval: float, mean: float, printed: bool) -> Grid | _Cut:
    """Return the grid of an interval, or the bound by the two stamps that contradict it most.

    All t0 with t[i] - i T - h[i] <= t0 <= t[i] - i T + h[i] are possible; there is none if the
    largest lower bound, at i, exceeds the smallest upper one, at j.
    """
    least, most = (-np.inf, 0, 0.0), (np.inf, 0, 0.0)
    furthest = 0.0
    for position, seconds, half in stamps.blocks():
        trusted = (half < COARSEST * mean) & printed
        half = np.maximum(
            np.where(trusted, half, 2.0 * np.spacing(np.abs(seconds))), HARMLESS * mean
        )
        index = np.arange(position, position + len(seconds), dtype=np.float64)
        off = seconds - index * interval
        furthest = max(furthest, float(half.max()))
        i, j = int(np.argmax(off - half)), int(np.argmin(off + half))
        least = max(least, (float(off[i] - half[i]), position + i, float(seconds[i] - half[i])))
        most = min(most, (float(off[j] + half[j]), position + j, float(seconds[j] + half[j])))
    if least[0] <= most[0]:
        origin = min(max(float(stamps.read(0, 1)[0]), least[0]), most[0])
        return Grid(1.0 / interval, origin, furthest)
    step = least[1] - most[1]
    if step == 0:
        return _Cut(np.inf, 1)
    bound = (least[2] - most[2]) / step
    # A bound that rounding keeps at the candidate itself would never end the search.
    return _Cut(np.nextafter(bound, np.inf if step > 0 else -np.inf), step)
