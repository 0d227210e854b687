"""Time stamps in seconds, and whether they are in order."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from frontend_sim.errors import RecordingError
from frontend_sim.stimulus.recording.series import Real, Series


@dataclass(frozen=True, eq=False)
class Stamps:
    """Time stamps in seconds.

    Parameters
    ----------
    series : as in the file;  factor : seconds in one of its units
    """

    series: Series
    factor: float

    @property
    def count(self) -> int:
        """Number of time stamps."""
        return self.series.count

    def seconds(self, raw: Real) -> Real:
        """Return numbers of the file in seconds; decimal fractions of a second stay the nearest."""
        inverse = round(1.0 / self.factor)
        exact = self.factor < 1.0 and 1.0 / inverse == self.factor
        return raw / inverse if exact else raw * self.factor

    def read(self, first: int, last: int) -> Real:
        """Return time stamps first to last - 1 [s]."""
        return self.seconds(self.series.read(first, last))

    def blocks(self) -> Iterator[tuple[int, Real, Real]]:
        """Return (position, time stamps, half of their last digits) block by block [s]."""
        for position, raw in self.series.blocks():
            seconds = self.seconds(raw)
            half = self.series.half_step(raw) * self.factor + 2.0 * np.spacing(np.abs(seconds))
            yield position, seconds, half

    def ends(self) -> tuple[float, float, float]:
        """Return first and last time stamp, and the halves of their last digits together [s]."""
        raw = np.concatenate([self.series.read(0, 1), self.series.read(self.count - 1, self.count)])
        first, last = self.seconds(raw)
        halves = self.series.half_step(raw) * self.factor + 2.0 * np.spacing(np.abs([first, last]))
        return float(first), float(last), float(halves.sum())


@dataclass(frozen=True)
class Order:
    """What a pass through the time stamps found: how many repeat the one before, and where."""

    duplicates: int
    first_duplicates: tuple[int, ...]


def check_order(file: Path, stamps: Stamps) -> Order:
    """Check that time never goes back.

    Raises RecordingError if a time stamp is missing or earlier than the one before.
    """
    series, last = stamps.series, -np.inf
    duplicates, where = 0, list[int]()
    for position, raw in series.blocks():
        bad = np.flatnonzero(~np.isfinite(raw))
        if len(bad):
            raise RecordingError(
                f"{file}, {series.where(position + int(bad[0]))}: the time is missing; remove the "
                "row, or leave out the time column and give rate"
            )
        steps = np.diff(raw, prepend=last)
        back = np.flatnonzero(steps < 0.0)
        if len(back):
            at = int(back[0])
            before = raw[at - 1] if at else last
            midnight = "; times of day that pass midnight need a date" if series.absolute else ""
            raise RecordingError(
                f"{file}, {series.where(position + at)}: time goes back from {before:.12g} to "
                f"{raw[at]:.12g}; sort the rows, or cut the file there{midnight}"
            )
        same = np.flatnonzero(steps == 0.0)
        duplicates += len(same)
        where += [position + int(i) for i in same[: 3 - len(where)]] if len(where) < 3 else []
        last = float(raw[-1])
    return Order(duplicates, tuple(where))
