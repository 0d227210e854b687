"""The waveforms of a record, read when they are asked for."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]


class Waveforms(Mapping[str, Real]):
    """Point of the chain -> its waveform, shape (W,) [V], in the order of the chain.

    Each access reads from the file; keep the array if it is needed again.

    Parameters
    ----------
    names : point -> name of its dataset
    read : returns elements start to stop of a dataset
    """

    def __init__(
        self, names: Mapping[str, str], read: Callable[[str, int, int | None], Any]
    ) -> None:
        """Take the names of the points, read nothing."""
        self._names = dict(names)
        self._read = read

    def __getitem__(self, point: str) -> Real:
        """Read the whole waveform of a point."""
        return self.stretch(point)

    def stretch(self, point: str, start: int = 0, stop: int | None = None) -> Real:
        """Read elements start to stop of the waveform of a point, shape (stop - start,) [V]."""
        values: Real = self._read(self._names[point], start, stop)
        return values

    def __iter__(self) -> Iterator[str]:
        """Go through the points."""
        return iter(self._names)

    def __len__(self) -> int:
        """Return the number of points."""
        return len(self._names)
