"""When the converter looks."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from frontend_sim.converter.adc import Adc
from frontend_sim.randomness import normal, stream

Real = NDArray[np.float64]

FURTHEST = 0.49
"""Jitter is cut at this share of a period, ten standard deviations away at the least."""


def conversion_count(adc: Adc, duration: float) -> int:
    """Return the number of conversions with first + k/rate in [0, duration)."""
    position = (duration - adc.first) * adc.rate
    slack = 4.0 * np.finfo(np.float64).eps * max(abs(position), duration * adc.rate, 1.0)
    return max(math.ceil(position - slack), 0)


def nominal_instants(adc: Adc, start: int, stop: int) -> Real:
    """Return first + k/rate for conversions start to stop - 1, shape (stop - start,) [s]."""
    return adc.first + np.arange(start, stop, dtype=np.float64) / adc.rate


def sampling_instants(adc: Adc, start: int, stop: int, seed: int) -> Real:
    """Return the true instants, with aperture delay and jitter, shape (stop - start,) [s].

    The jitter of conversion k depends on the seed and k alone.
    """
    instants = nominal_instants(adc, start, stop) + adc.aperture_delay
    if adc.aperture_jitter == 0.0:
        return instants
    jitter = adc.aperture_jitter * normal(stream(seed, "aperture jitter"), start, stop)
    furthest = FURTHEST / adc.rate
    return instants + np.clip(jitter, -furthest, furthest)
