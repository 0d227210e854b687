"""Where a stimulus jumps, and where it bends."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise

import numpy as np

from frontend_sim.simulation.kernels import Real
from frontend_sim.stimulus.drive import Drive, UniformDrive

ROUNDING = 64.0 * float(np.finfo(np.float64).eps)
"""Instants this share of their time apart are one instant, whatever was rounded on the way."""

NO_JUMP = 1e-12
"""A change by less than this share of the value is the rounding of a smooth signal."""


def slack(times: Real, interval: float) -> Real:
    """Return how far instants at ``times`` lie from what is surely before and behind them [s].

    ``interval`` is the longest one between points of a recording; near t = 0 rounding is relative
    to it.
    """
    return ROUNDING * np.maximum(np.abs(times), interval)


def jump_times(
    drives: Sequence[Drive], start: float, stop: float, interval: float, bends: bool = False
) -> Real:
    """Return the times in (start, stop] at which a drive jumps, sorted and each once [s].

    t = 0 counts, since the signal before it is another; times nearer than rounding are one.

    Parameters
    ----------
    bends : whether those count too at which the slope of a drive jumps, but for a recording
    """
    found = [_jumps(drive, start, stop, interval, bends) for drive in drives]
    if start < 0.0 <= stop:
        found.append(np.zeros(1))
    times = np.sort(np.concatenate(found)) if found else np.empty(0)
    if len(times) < 2:
        return times
    apart = np.diff(times, prepend=-np.inf) > 4.0 * slack(times, interval)
    return times[apart]


def _jumps(drive: Drive, start: float, stop: float, interval: float, bends: bool) -> Real:
    if isinstance(drive, UniformDrive):
        return _changes(drive, start, stop) if drive.between == "hold" else np.empty(0)
    times = drive.events(max(start, 0.0), stop) if stop > 0.0 else np.empty(0)
    if len(times) == 0:
        return times
    apart = slack(times, interval)
    earlier = times - apart
    before, after = drive.states(np.maximum(earlier, 0.0)), drive.states(times)
    row, at_rest, sides = drive.readout, drive.initial, []
    for _ in range(3 if bends else 2):
        sides.append((np.where(earlier < 0.0, at_rest, before @ row), after @ row))
        row, at_rest = row @ drive.generator, 0.0
    found = np.zeros(len(times), np.bool_)
    for value, slope in pairwise(sides):
        # A smooth signal changes too from the one side to the other.
        smooth = 2.0 * apart * _larger(*slope)
        found |= np.abs(value[1] - value[0]) > NO_JUMP * _larger(*value) + smooth
    return times[found]


def _larger(before: Real, after: Real) -> Real:
    return np.maximum(np.abs(before), np.abs(after))


def _changes(drive: UniformDrive, start: float, stop: float) -> Real:
    first = max(int(np.floor((start - drive.origin) * drive.rate)), 1)
    last = int(np.ceil((stop - drive.origin) * drive.rate)) + 1
    if last <= first:
        return np.empty(0)
    points = drive.points(first - 1, last)
    changed = first + np.flatnonzero(np.diff(points))
    times = drive.origin + changed / drive.rate
    return times[(times > start) & (times <= stop)]
