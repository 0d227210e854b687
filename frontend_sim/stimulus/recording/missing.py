"""Points without a value: found, and bridged under a policy."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from typing import Literal

import numpy as np

from frontend_sim.stimulus.recording.series import Real, Series

Missing = Literal["error", "hold", "line", "zero"]


@dataclass(frozen=True)
class Holes:
    """What is missing in a series.

    Parameters
    ----------
    count : points without a value
    first : positions of the first few
    longest : most of them in a row;  longest_at : where these begin
    largest : largest magnitude of all values, 0 where it cannot be out of bounds
    largest_at : its position
    """

    count: int = 0
    first: tuple[int, ...] = ()
    longest: int = 0
    longest_at: int = 0
    largest: float = 0.0
    largest_at: int = 0


def find_holes(series: Series, first: int, last: int) -> Holes:
    """Look through points first to last - 1."""
    if series.always_finite:
        return Holes()
    count, shown = 0, list[int]()
    longest, longest_at, running = 0, 0, 0
    largest, largest_at = 0.0, first
    for position, values in series.blocks(first, last):
        magnitudes = np.abs(values)
        bad = ~np.isfinite(magnitudes)
        if bad.any():
            magnitudes[bad] = 0.0
        at = int(np.argmax(magnitudes))
        if magnitudes[at] > largest:
            largest, largest_at = float(magnitudes[at]), position + at
        if not bad.any():
            running = 0
            continue
        where = np.flatnonzero(bad)
        count += len(where)
        shown += [position + int(i) for i in where[: 5 - len(shown)]] if len(shown) < 5 else []
        edges = np.flatnonzero(np.diff(bad.astype(np.int8), prepend=0, append=0))
        starts, lengths = edges[::2], edges[1::2] - edges[::2]
        if starts[0] == 0:
            lengths[0] += running
        best = int(np.argmax(lengths))
        if lengths[best] > longest:
            longest = int(lengths[best])
            longest_at = position + int(edges[2 * best + 1]) - longest
        running = int(lengths[-1]) if bad[-1] else 0
    return Holes(count, tuple(shown), longest, longest_at, largest, largest_at)


def bridged(blocks: Iterable[tuple[Real, Real]], policy: Missing) -> Iterator[Real]:
    """Return the values of (time, values) blocks with no hole left.

    ``hold`` keeps the last value, ``line`` joins the values on both sides, ``zero`` puts 0; where
    there is no value before, or none after, the nearest is kept. At least one value must be there.
    """
    if policy == "zero":
        for _, values in blocks:
            yield np.where(np.isfinite(values), values, 0.0)
        return
    times, values, known = np.empty(0), np.empty(0), 0
    for new_times, new_values in blocks:
        # `known` is 1 once the first of the carried points is a value that has been returned.
        times, values = np.append(times, new_times), np.append(values, new_values)
        good = np.flatnonzero(np.isfinite(values))
        if len(good) == 0:
            continue
        until = int(good[-1]) + 1
        filled = _fill(times[:until], values[:until], policy)
        yield filled[known:]
        times, values, known = times[until - 1 :], values[until - 1 :], 1
    if len(values) > known:
        yield np.full(len(values) - known, values[0])


def _fill(times: Real, values: Real, policy: Missing) -> Real:
    good = np.isfinite(values)
    if good.all():
        return values
    filled = values.copy()
    if policy == "line":
        filled[~good] = np.interp(times[~good], times[good], values[good])
    else:
        before = np.maximum(np.cumsum(good) - 1, 0)
        filled[~good] = values[good][before[~good]]
    return filled
