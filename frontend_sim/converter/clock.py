"""When the converter looks."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from frontend_sim.converter.base import Converter
from frontend_sim.randomness import normal, stream

Real = NDArray[np.float64]

FURTHEST = 0.44
"""Jitter is cut at this share of the shortest interval, almost nine standard deviations away at
the least. Two neighbours may then come nearer by 88 % of it, and a wander takes 10 % more only at
ten standard deviations, so looks keep their order."""


def look_count(adc: Converter, codes: int) -> int:
    """Return the number of looks that so many codes need."""
    return adc.last_look(codes - 1) + 1 if codes > 0 else 0


def nominal_instants(adc: Converter, start: int, stop: int) -> Real:
    """Return the instants of looks start to stop - 1 by the converter's clock, in true time.

    Its rate error is in them; delay, jitter and wander are not.

    Returns an array of shape (stop - start,) [s].
    """
    return adc.pattern.between(start, stop)


def sampling_instants(adc: Converter, start: int, stop: int, seed: int) -> Real:
    """Return the true instants of looks start to stop - 1, shape (stop - start,) [s].

    Delay, jitter and wander are added to the nominal instants. What is random of look i depends on
    the seed and i alone.
    """
    pattern = adc.pattern
    instants = pattern.between(start, stop) + adc.aperture_delay
    if adc.wander is not None:
        instants = instants + adc.wander.deviation(pattern, start, stop, seed)
    if adc.aperture_jitter == 0.0:
        return instants
    jitter = adc.aperture_jitter * normal(stream(seed, "aperture jitter"), start, stop)
    furthest = FURTHEST * pattern.closest
    return instants + np.clip(jitter, -furthest, furthest)
