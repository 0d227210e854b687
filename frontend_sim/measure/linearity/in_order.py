"""How sure a ramp that is sampled in order makes the levels at which its codes change."""

from __future__ import annotations

import numpy as np

from frontend_sim.measure.arrays import Real
from frontend_sim.measure.linearity.confidence import Counts


def misplaced(codes: Counts, counts: Counts) -> Real:
    """Return how many samples of a ramp lie on the wrong side of each level, shape (K - 1,).

    Of C samples below a level the first C should be them; noise exchanges some near the level. None
    are misplaced in a clean ramp, and about half of all where samples come in any order.

    Parameters
    ----------
    codes : in the order of time, from the lowest code seen counted as 0, shape (N,)
    counts : of the codes 0, 1, ..., shape (K,)
    """
    half = len(codes) // 2
    rising = np.mean(codes[half:]) >= np.mean(codes[:half])
    row = codes if rising else codes[::-1]
    below = np.cumsum(counts[:-1])
    # Sample i belongs before the levels from its code on, and comes behind those with C <= i.
    behind = np.searchsorted(below, np.arange(len(row)), side="right")
    late = behind > row
    starts = np.bincount(row[late], minlength=len(counts))
    stops = np.bincount(behind[late], minlength=len(counts))
    # Each of them has taken the place of one that comes too early.
    return np.asarray(2.0 * np.cumsum(starts - stops)[:-1], dtype=np.float64)


def steps_unsure(wrong: Real, deviations: float) -> Real:
    """Return half the confidence interval of the distance of two levels, in steps of the ramp,

        1 + z sqrt(2 m).

    Each level lies between two samples, so both together are known to one step. A count below a
    level is a sum over samples of independent yes and no, of variance sum p (1 - p), which is no
    more than the expected number m of those on the wrong side, sum min(p, 1 - p).

    Parameters
    ----------
    wrong : samples on the wrong side of each level, shape (K - 1,)
    deviations : z, of the confidence
    """
    # One level may have been lucky: none is taken for quieter than all are on average.
    noisy = np.maximum(wrong, np.mean(wrong))
    return np.asarray(1.0 + deviations * np.sqrt(2.0 * noisy))
