"""How often each code was seen, and which codes can be judged."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.converter.adc import Adc
from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import codes_of
from frontend_sim.measure.linearity.confidence import Counts, sane_bits
from frontend_sim.quantities.counting import counted

LEAST_CODES = 3
"""Codes that must lie between the lowest and the highest one seen."""

LEAST_HITS = 10
"""Samples per code, on average, below which a histogram says nothing of single codes."""


@dataclass(frozen=True, eq=False)
class CodeDensity:
    """Counts of the codes from the lowest to the highest one seen.

    The width of these two end codes is not known: they hold all that lies beyond, or only as much
    of their width as the signal reached. Codes further out are dead, or were not reached; no count
    can tell which.

    Parameters
    ----------
    lowest : lowest code seen [counts]
    counts : of the codes lowest, lowest + 1, ..., shape (K,)
    below, above : codes of the converter that were never seen beyond the two ends
    """

    lowest: int
    counts: Counts
    below: int
    above: int

    @property
    def total(self) -> int:
        """Samples."""
        return int(np.sum(self.counts))

    @property
    def inner_codes(self) -> Counts:
        """Codes whose width can be judged: all but the two ends, shape (K - 2,) [counts]."""
        return self.lowest + 1 + np.arange(len(self.counts) - 2)


def code_density(codes: ArrayLike, adc: Adc) -> CodeDensity:
    """Count the codes of a record.

    Parameters
    ----------
    codes : shape (N,) [counts]
    adc : that they come from

    Raises
    ------
    MeasureError
        If codes lie outside the converter's range, if there are too few of them, or if too few
        codes were reached.
    """
    row = codes_of(codes, 1)
    bits = sane_bits(adc.bits)
    lowest, highest = int(np.min(row)), int(np.max(row))
    if lowest < adc.lowest_code or highest > adc.highest_code:
        raise MeasureError(
            f"codes from {lowest} to {highest} do not come from a converter of {bits} bits and "
            f"{adc.code_format}, which gives {adc.lowest_code} to {adc.highest_code}"
        )
    inner = highest - lowest - 1
    if inner < LEAST_CODES:
        raise MeasureError(
            f"only codes {lowest} to {highest} were reached; linearity needs a signal over at "
            f"least {LEAST_CODES + 2} codes, best a little beyond both ends of the range"
        )
    counts = np.bincount(row - lowest, minlength=highest - lowest + 1)
    hits = int(np.sum(counts[1:-1]))
    if hits < LEAST_HITS * inner:
        raise MeasureError(
            f"{counted(hits, 'sample')} over the {inner} codes between {lowest} and {highest} do "
            f"not suffice to judge a code; take at least {LEAST_HITS * inner} there, see "
            "sine_samples_needed for a stated confidence"
        )
    return CodeDensity(lowest, counts, lowest - adc.lowest_code, adc.highest_code - highest)
