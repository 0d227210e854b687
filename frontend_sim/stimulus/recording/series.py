"""The seam between file formats and the rest: one signal, and its time where the file has one."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]

BLOCK = 1 << 20
"""Points that are looked at together; it bounds memory and never shows in a result."""


@dataclass(frozen=True)
class Wanted:
    """Which parts of a file are asked for: names, or numbers counted from 1.

    Parameters
    ----------
    column : the signal; None stands for the only one
    time : the time of each point; None where there is none
    dataset : the array inside a file that holds several
    """

    column: int | str | None = None
    time: int | str | None = None
    dataset: str | None = None


@dataclass(frozen=True, eq=False)
class Series:
    """A row of numbers in a file, in the file's own unit; what is missing reads as NaN.

    Parameters
    ----------
    label : what it is called in messages, for instance ``column 2 'pressure'``
    unit : the unit that the file gives, or ""
    count : how many numbers
    read : ``read(first, last)`` gives numbers first to last - 1, shape (last - first,); the array
        may be shared and is not to be changed
    half_step : of numbers of the series, the largest error that rounding to the last printed or
        stored digit can have made
    where : says of a position where it stands in the file, for instance ``line 12``
    always_finite : True where the file's type of number has no NaN
    absolute : True for date-times and times of day, which are read as seconds after the first
    """

    label: str
    unit: str
    count: int
    read: Callable[[int, int], Real]
    half_step: Callable[[Real], Real]
    where: Callable[[int], str]
    always_finite: bool = False
    absolute: bool = False

    def blocks(self, first: int = 0, last: int | None = None) -> Iterator[tuple[int, Real]]:
        """Return (position, numbers) block by block from first to last - 1."""
        stop = self.count if last is None else last
        for start in range(first, stop, BLOCK):
            yield start, self.read(start, min(start + BLOCK, stop))


@dataclass(frozen=True, eq=False)
class Source:
    """What a reader returns.

    Parameters
    ----------
    signal : the recorded signal
    time : the time of each of its points, None where none was asked for
    rate : points per second that the file itself states [Hz], or None
    notes : what was decided while the file was opened
    names : the columns or arrays of the file, for messages
    """

    signal: Series
    time: Series | None = None
    rate: float | None = None
    notes: tuple[str, ...] = field(default=())
    names: str = ""


Reader = Callable[[Path, Wanted], Source]
"""Opens a file. Raises RecordingError if it holds no such signal."""


def stored_half_step(dtype: np.dtype[np.generic]) -> Callable[[Real], Real]:
    """Return the ``half_step`` of numbers that are stored in binary."""
    if not np.issubdtype(dtype, np.floating):
        return lambda values: np.full(len(values), 0.5)
    half = 0.5 * float(np.finfo(dtype).eps)  # type: ignore[type-var]  # floating, as tested above
    return lambda values: half * np.abs(values)
