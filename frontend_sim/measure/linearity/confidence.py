"""How sure a count of codes makes the width of a code."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real, positive, share

Counts = NDArray[np.int64]

MOST_BITS = 24
"""Beyond it no histogram of codes fits into a measurement or a memory."""


def deviate(confidence: float) -> float:
    """Return how many standard deviations hold a share of a normal distribution, two-sided [1].

    1.960 for 95 %, 2.576 for 99 %. Raises MeasureError if it is not between 0 and 1.
    """
    from scipy.special import ndtri

    return float(ndtri(0.5 + 0.5 * share(confidence, "the confidence")))


def sine_samples_needed(bits: int, tolerance: float, confidence: float = 0.99) -> int:
    """Return how many samples of a sine the histogram needs,

        N = z² pi 2^(bits - 1) / tolerance²,

    for the rarest code, in the middle, where a full-scale sine spends 2 / (pi 2^bits) of its time.
    Source: J. Doernberg, H.-S. Lee and D. A. Hodges 1984, "Full-speed testing of A/D converters",
    IEEE J. Solid-State Circuits 19 (from memory).

    Parameters
    ----------
    bits : 1 to 24
    tolerance : half the width of the confidence interval of the DNL [LSB]
    confidence : share of intervals that hold the true value

    Raises
    ------
    MeasureError
        If one of them is out of range.
    """
    exact = positive(tolerance, "the tolerance", "LSB")
    rarest = 2.0 / (math.pi * 2.0 ** sane_bits(bits))
    return math.ceil(deviate(confidence) ** 2 / (rarest * exact**2))


def ramp_samples_needed(bits: int, tolerance: float, confidence: float = 0.99) -> int:
    """Return how many samples at random instants of a ramp the histogram needs,

        N = z² 2^bits / tolerance².

    Parameters and errors as for ``sine_samples_needed``. A slow ramp, sampled in order, needs only
    2^bits / tolerance of them: the ends of a code then are off by one sample at the most.
    """
    exact = positive(tolerance, "the tolerance", "LSB")
    return math.ceil(deviate(confidence) ** 2 * 2.0 ** sane_bits(bits) / exact**2)


def width_confidence(hits: Counts, expected: Real, count: int, confidence: float) -> Real:
    """Return half the confidence interval of the DNL of codes, shape (K,) [LSB],

        z sqrt(q (1 - q) / N) / p,    q = (hits + z²/2) / (N + z²).

    The hits are binomial at random phases; at evenly spread ones they vary by less, so the interval
    is on the safe side. Source: A. Agresti and B. A. Coull 1998, "Approximate is better than
    'exact' for interval estimation of binomial proportions" (from memory).

    Parameters
    ----------
    hits : samples with each code, shape (K,)
    expected : p, share of all samples that a code of one LSB would get, shape (K,) [1]
    count : all samples, N
    """
    z = deviate(confidence)
    q = (hits + 0.5 * z * z) / (count + z * z)
    return np.asarray(z * np.sqrt(q * (1.0 - q) / count) / expected)


def sane_bits(bits: int) -> int:
    """Return a number of bits from 1 to 24. Raises MeasureError if it is not one."""
    if not (isinstance(bits, int) and 1 <= bits <= MOST_BITS):
        raise MeasureError(
            f"a histogram of codes can be made of 1 to {MOST_BITS} bits, not of {bits!r}"
        )
    return bits
