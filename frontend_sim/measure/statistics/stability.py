"""Whether enough has been drawn: the adaptive procedure of JCGM 101."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import MeasureError
from frontend_sim.measure.statistics.pass_rate import PassRate, refuse_no_share
from frontend_sim.quantities.counting import counted

Real = NDArray[np.float64]

GUIDE_BLOCK = 10_000
"""Draws in a block that the guide asks for; of runs that take long, fewer are usual."""

LEAST_BLOCKS = 2
"""Blocks from which on a deviation can be told."""


@dataclass(frozen=True)
class Stability:
    """What all draws say so far, and how far more of them could still move it.

    Parameters
    ----------
    draws, blocks : how many
    mean, deviation : of all draws, in the unit of the measure
    low, high : ends of the interval that holds the share ``coverage`` of all draws, as much below
        as above
    coverage : that share [1]
    spreads : how far each of the four may still move at 95 % confidence, in this order
    tolerance : numerical tolerance that they are held against
    """

    draws: int
    blocks: int
    mean: float
    deviation: float
    low: float
    high: float
    coverage: float
    spreads: tuple[float, float, float, float]
    tolerance: float

    @property
    def tight(self) -> bool:
        """Whether all four have stabilized."""
        return self.blocks >= LEAST_BLOCKS and max(self.spreads) <= self.tolerance


def block_size(coverage: float = 0.95, least: int = GUIDE_BLOCK) -> int:
    """Return M = max(J, least) with J the smallest integer of at least 100 / (1 - coverage).

    Source: JCGM 101:2008, 7.9.4 b), which has 10 000 for ``least``.
    """
    refuse_no_share(coverage, "coverage")
    # 1 - 0.95 lies a little above 0.05 in binary; J is meant to be 2000.
    return max(math.ceil(100.0 / (1.0 - coverage) * (1.0 - 1e-12)), least)


def numerical_tolerance(deviation: float, digits: int) -> float:
    """Return half a unit of the last of so many significant digits of a standard deviation.

    With deviation = c 10^l, c an integer of ``digits`` digits, it is 10^l / 2. Source: JCGM
    101:2008, 7.9.2: 0.000 35 V with two digits gives 0.000 005 V.
    """
    if digits < 1:
        raise MeasureError(f"{digits} significant digits; at least one must count")
    if deviation == 0.0:
        return 0.0
    written = f"{deviation:.{digits - 1}e}"  # rounds 9.96 up to the next power, as it should
    return 0.5 * 10.0 ** (int(written.partition("e")[2]) - digits + 1)


def stability(
    blocks: Sequence[Real],
    digits: int = 2,
    coverage: float = 0.95,
    tolerance: float | None = None,
) -> Stability:
    """Return whether draws have stabilized, from blocks of equal size.

    For each block the mean, the deviation and the ends of the interval are taken; the standard
    deviation of their averages over h blocks is s = sqrt( sum (block - average)^2 / (h (h - 1)) ).
    The guide draws on until 2 s of all four is within the tolerance (JCGM 101:2008, 7.9.4). Here
    Student's factor for h - 1 degrees of freedom takes the place of 2, which is its value for many
    blocks: of two blocks that agree by chance nothing follows.

    Parameters
    ----------
    blocks : draws of one measure, each of shape (M,), in the order in which they were drawn
    digits : significant digits of the standard deviation that shall count
    coverage : share of draws within the interval [1]
    tolerance : in the unit of the measure, in place of the one that ``digits`` gives

    Raises
    ------
    MeasureError
        If there is no block, they differ in length, are too small for the coverage, or hold a
        value that is not finite.
    """
    from scipy.special import stdtrit

    rows = _rows(blocks, coverage)
    count, size = rows.shape
    ends = (0.5 * (1.0 - coverage), 0.5 * (1.0 + coverage))
    all_draws = rows.reshape(-1)
    deviation = float(np.std(all_draws, ddof=1))
    low, high = (float(end) for end in np.quantile(all_draws, ends))
    spreads = (math.inf,) * 4
    if count >= LEAST_BLOCKS:
        each = np.array(
            [np.mean(rows, axis=1), np.std(rows, axis=1, ddof=1), *np.quantile(rows, ends, axis=1)]
        )
        factor = max(2.0, float(stdtrit(count - 1, 0.975)))
        moved = factor * np.std(each, axis=1, ddof=1) / math.sqrt(count)
        spreads = (float(moved[0]), float(moved[1]), float(moved[2]), float(moved[3]))
    allowed = numerical_tolerance(deviation, digits) if tolerance is None else tolerance
    return Stability(
        count * size, count, float(np.mean(all_draws)), deviation, low, high, coverage, spreads,
        allowed,
    )  # fmt: skip


def tight_enough(rate: PassRate, width: float) -> bool:
    """Return whether the interval of a yield is no wider than asked for [1]."""
    return rate.width <= width


def _rows(blocks: Sequence[Real], coverage: float) -> Real:
    refuse_no_share(coverage, "coverage")
    lengths = {len(block) for block in blocks}
    if len(lengths) != 1:
        raise MeasureError(
            "the procedure needs blocks of one length, at least one; given are "
            f"{', '.join(map(str, sorted(lengths))) or 'none'}"
        )
    size = lengths.pop()
    if size * (1.0 - coverage) < 2.0:
        raise MeasureError(
            f"blocks of {counted(size, 'draw')} cannot tell the ends of an interval of "
            f"{100 * coverage:g} %; take {math.ceil(2.0 / (1.0 - coverage))} draws or more, the "
            f"guide takes {block_size(coverage)}"
        )
    rows = np.stack([np.asarray(block, dtype=np.float64) for block in blocks])
    if not np.all(np.isfinite(rows)):
        raise MeasureError("a draw is not finite; mean and deviation of such draws say nothing")
    return rows
