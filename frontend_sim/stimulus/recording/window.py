"""The part of a recording that is played: from ``start`` to ``end``, at ``speed``."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from frontend_sim.errors import RecordingError
from frontend_sim.stimulus.drive import Between, Drive, Lines
from frontend_sim.stimulus.recording.grid import HARMLESS, Grid
from frontend_sim.stimulus.recording.playback import Conversion, Playback, StampedPlayback
from frontend_sim.stimulus.recording.series import BLOCK, Real
from frontend_sim.stimulus.recording.store import Stored, store_columns


@dataclass(frozen=True)
class Window:
    """What is played.

    Parameters
    ----------
    start, end : on the recording's own time axis, None for its ends [s]
    speed : playback-rate factor
    between : what the signal does between points
    """

    start: float | None
    end: float | None
    speed: float
    between: Between


@dataclass(frozen=True)
class GridWindow:
    """The points of a grid that a window needs.

    Parameters
    ----------
    first, last : points first to last - 1
    lead : share of an interval from the window's start to its first point, in [0, 1)
    length : of the window, in intervals
    """

    first: int
    last: int
    lead: float
    length: float


def grid_window(file: Path, grid: Grid, count: int, window: Window) -> GridWindow:
    """Return the points of a grid that a window needs; the last point lasts one interval.

    Raises RecordingError if the window lies outside of the recording.
    """
    slack = max(HARMLESS, grid.slack * grid.rate)
    last_stamp = grid.first + count / grid.rate
    check_window(file, window, grid.first, last_stamp, slack / grid.rate)
    start = 0.0 if window.start is None else (window.start - grid.first) * grid.rate
    end = float(count) if window.end is None else (window.end - grid.first) * grid.rate
    start, end = _snapped(start, slack), min(_snapped(end, slack), float(count))
    first = min(math.ceil(start), count - 1)
    lead = max(first - start, 0.0)
    # A line needs the point at the end of its last piece; a held value does not.
    last = math.ceil(end) + (1 if window.between == "line" else 0)
    return GridWindow(first, max(min(last, count), first + 1), lead, end - start)


def _snapped(position: float, slack: float) -> float:
    nearest = round(position)
    return max(float(nearest) if abs(position - nearest) <= slack else position, 0.0)


def check_window(file: Path, window: Window, first: float, last: float, slack: float) -> None:
    """Raise RecordingError if a window does not lie within [first, last], to a slack [s]."""
    extent = f"the recording goes from {first:.9g} s to {last:.9g} s"
    if window.start is not None and not first - slack <= window.start < last - slack:
        raise RecordingError(f"{file}: start = {window.start:.9g} s, but {extent}")
    if window.end is not None and not first + slack < window.end <= last + slack:
        raise RecordingError(f"{file}: end = {window.end:.9g} s, but {extent}")


def grid_drives(part: GridWindow, playback: Playback, before: float) -> tuple[Drive, ...]:
    """Return the drives of a window on a grid.

    If the window starts between two points, a second drive holds what the signal differs from its
    first point until then, so that the sum is exact from t = 0 on.

    Parameters
    ----------
    before : value of the point before the window's first one [V]
    """
    if part.lead == 0.0:
        return (playback,)
    rise = playback.initial - before
    until = playback.origin
    if playback.between == "hold":
        return playback, Lines.of(-rise, [0.0, until], [-rise, 0.0])
    level = -rise * part.lead
    return playback, Lines.of(level, [0.0, until], [level, 0.0], [-level / until, 0.0])


@dataclass(frozen=True)
class StampedWindow:
    """The points with time stamps that a window needs.

    Parameters
    ----------
    first, last : points first to last - 1
    start, end : where the window begins and ends [s]
    """

    first: int
    last: int
    start: float
    end: float


def stamped_window(file: Path, times: Stored, window: Window) -> StampedWindow:
    """Return the points with time stamps that a window needs; it ends at the last one.

    Raises RecordingError if the window lies outside of the recording.
    """
    stamps = times.view()
    begin, stop = float(stamps[0]), float(stamps[-1])
    check_window(file, window, begin, stop, HARMLESS * (stop - begin) / times.count)
    start = begin if window.start is None else max(window.start, begin)
    end = stop if window.end is None else min(window.end, stop)
    first = int(np.searchsorted(stamps, start, side="right")) - 1
    last = int(np.searchsorted(stamps, end, side="left"))
    if window.between == "line" or window.end is None:
        last += 1
    return StampedWindow(first, max(last, first + 1), start, end)


def stamped_drive(
    times: Stored,
    read: Callable[[int, int], Real],
    part: StampedWindow,
    window: Window,
    conversion: Conversion,
) -> StampedPlayback:
    """Return the drive of a window on time stamps.

    Parameters
    ----------
    read : gives numbers of the file, its position 0 is the part's first point
    """
    played_times, played = store_columns(_played(times, read, part, window), 2)
    return StampedPlayback(played_times, played, window.between, conversion)


def _played(
    times: Stored, read: Callable[[int, int], Real], part: StampedWindow, window: Window
) -> Iterator[tuple[Real, Real]]:
    """Return blocks of (playback time, number); the ends are cut at the window."""
    for position in range(part.first, part.last, BLOCK):
        until = min(position + BLOCK, part.last)
        # One more on each side, for the values at a cut end.
        low, high = max(position - 1, part.first), min(until + 1, part.last)
        seen = times.read(low, high), read(low - part.first, high - part.first)
        stamps, values = (row[position - low : until - low].copy() for row in seen)
        if position == part.first and part.start > stamps[0]:
            values[0] = _value_at(part.start, seen, window, values[0])
            stamps[0] = part.start
        if until == part.last and part.end < stamps[-1]:
            values[-1] = _value_at(part.end, seen, window, values[-1])
            stamps[-1] = part.end
        yield (stamps - part.start) / window.speed, values


def _value_at(time: float, seen: tuple[Real, Real], window: Window, held: float) -> float:
    return float(np.interp(time, *seen)) if window.between == "line" else held
