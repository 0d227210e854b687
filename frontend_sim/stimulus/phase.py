"""The phase of a sinusoid far from its start, without loss of digits."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]

_SPLITTER = 134217729.0  # 2^27 + 1


def cycles(frequency: float, times: Real) -> Real:
    """Return frequency · time modulo 1, to about 2e-16 of a cycle.

    The product is formed with its rounding error (Dekker 1971, "A floating-point technique for
    extending the available precision"), so that a sine does not drift in phase after millions of
    periods.

    Parameters
    ----------
    frequency [Hz]
    times : shape (K,) [s]
    """
    product = frequency * times
    f_high, f_low = _halves(np.asarray(frequency, dtype=np.float64))
    t_high, t_low = _halves(times)
    error = f_low * t_low - (((product - f_high * t_high) - f_low * t_high) - f_high * t_low)
    return np.asarray((product - np.floor(product)) + error)


def _halves(value: Real) -> tuple[Real, Real]:
    scaled = _SPLITTER * value
    high = scaled - (scaled - value)
    return high, value - high
