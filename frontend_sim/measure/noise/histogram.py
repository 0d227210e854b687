"""How often each code came while the input stood still."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real, codes_of

WIDEST = 2**24
"""Most codes between the lowest and the highest one."""


@dataclass(frozen=True, eq=False)
class CodeHistogram:
    """Counts of all codes from the lowest to the highest one seen.

    Parameters
    ----------
    codes : shape (K,) [counts]
    counts : shape (K,)
    """

    codes: NDArray[np.int64]
    counts: NDArray[np.int64]

    def normal_counts(self) -> Real:
        """Return the counts that normal noise of the same mean and rms would give, shape (K,).

        N ( Phi((code + 1/2 - mean)/rms) - Phi((code - 1/2 - mean)/rms) ): a histogram that strays
        from it tells of mains, of a code that flickers, or of missing codes.
        """
        from scipy.special import ndtr

        total = float(np.sum(self.counts))
        mean = float(np.sum(self.codes * self.counts)) / total
        rms = float(np.sqrt(np.sum(self.counts * (self.codes - mean) ** 2) / total))
        if rms == 0.0:
            return self.counts.astype(np.float64)
        upper = ndtr((self.codes + 0.5 - mean) / rms)
        return np.asarray(total * (upper - ndtr((self.codes - 0.5 - mean) / rms)))


def code_histogram(codes: ArrayLike) -> CodeHistogram:
    """Count codes.

    Parameters
    ----------
    codes : shape (N,) [counts]

    Raises
    ------
    MeasureError
        If there are none, they are not whole numbers, or they lie too far apart to list.
    """
    row = codes_of(codes, 1)
    lowest, highest = int(np.min(row)), int(np.max(row))
    if highest - lowest >= WIDEST:
        raise MeasureError(
            f"codes from {lowest} to {highest} are too far apart for a list of each; a histogram "
            f"is for noise over fewer than {WIDEST} codes"
        )
    counts = np.bincount(row - lowest, minlength=highest - lowest + 1)
    return CodeHistogram(lowest + np.arange(len(counts)), counts)
