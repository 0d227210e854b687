"""Which points of two series in time can be held side by side."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]
Index = NDArray[np.int64]

CLOCK = ("kind", "rate", "rate_error", "first", "aperture_delay", "averaging", "oversampling")
"""Keys of a converter that say when, by its clock, a conversion is due."""

NOTHING_IN_COMMON = "the parts that the two records keep have no conversion in common"

ROUNDING = 1e-9
"""Share of an interval within which two instants are one."""


@dataclass(frozen=True, eq=False)
class Common:
    """Pairs of points of two series.

    Parameters
    ----------
    first, second : numbers of the points in each series, shape (K,)
    share : of the points of the longer series that have a partner [1]
    told : how they were matched, or why none were
    """

    first: Index
    second: Index
    share: float
    told: str

    def __len__(self) -> int:
        """Return the number of pairs."""
        return len(self.first)


def same_clock(first: Mapping[str, Any], second: Mapping[str, Any]) -> bool:
    """Return whether two converters, as resolved data, look at the same nominal instants."""
    return all(first.get(key) == second.get(key) for key in CLOCK)


def by_number(first: int, second: int) -> Common:
    """Pair points by their number, as long as both series last."""
    count = min(first, second)
    index = np.arange(count)
    longer = max(first, second)
    told = "by number" if first == second else f"by number, the first {count} of {longer}"
    return Common(index, index, count / longer if longer else 0.0, told)


def by_numbers(first: Index, second: Index) -> Common:
    """Pair conversions by their number in the whole run, where a record keeps a part of it.

    Parameters
    ----------
    first, second : increasing numbers, shapes (K,) and (L,)
    """
    both, one, other = np.intersect1d(first, second, assume_unique=True, return_indices=True)
    longer = max(len(first), len(second))
    told = f"by number, {len(both)} that both keep of {len(first)} and {len(second)}"
    if len(both) == 0:
        told = NOTHING_IN_COMMON
    return Common(one, other, len(both) / longer if longer else 0.0, told)


def by_instant(first: Real, second: Real) -> Common:
    """Pair the points that lie at the same instants; nothing is interpolated.

    Parameters
    ----------
    first, second : increasing instants, shape (K,) and (L,) [s]
    """
    none = Common(np.empty(0, np.int64), np.empty(0, np.int64), 0.0, "no common instants")
    if len(first) == 0 or len(second) == 0:
        return none
    intervals = [np.min(np.diff(row)) for row in (first, second) if len(row) > 1]
    furthest = max(abs(float(first[-1])), abs(float(second[-1])))
    slack = max(ROUNDING * min(intervals, default=0.0), 4.0 * np.finfo(np.float64).eps * furthest)
    after = np.searchsorted(second, first - slack)
    found = np.minimum(after, len(second) - 1)
    paired = np.abs(second[found] - first) <= slack
    kept = np.flatnonzero(paired)
    if len(kept) == 0:
        return none
    longer = max(len(first), len(second))
    told = f"at {len(kept)} common instants of {len(first)} and {len(second)}"
    return Common(kept, found[kept], len(kept) / longer, told)
