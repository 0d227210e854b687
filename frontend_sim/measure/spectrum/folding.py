"""Where a frequency shows up after sampling."""

from __future__ import annotations

import math

from frontend_sim.measure.arrays import positive


def folded(frequency: float, rate: float) -> float:
    """Return where a tone shows up between zero and half the rate,

        |f - rate · round(f / rate)|.

    Source: the sampling theorem; common practice.

    Parameters
    ----------
    frequency : of the tone, at least zero [Hz]
    rate : samples per second [Hz]

    Returns
    -------
    [Hz]
    """
    return abs(math.remainder(frequency, positive(rate, "the rate", "Hz")))
