"""When the converter looks."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from frontend_sim.converter.base import Converter
from frontend_sim.randomness import normal, stream

Real = NDArray[np.float64]

FURTHEST = 0.44
"""Jitter is cut at this share of the shortest interval, almost nine standard deviations away at
the least. Two neighbours may then come nearer by 88 % of it, and a wander takes 10 % more only at
ten standard deviations, so looks keep their order."""


def first_code_instant(adc: Converter) -> float:
    """Return the nominal instant of the look that completes the first code [s]."""
    return float(adc.pattern.at(np.array([adc.last_look(0)]))[0])


def conversion_count(adc: Converter, duration: float) -> int:
    """Return the number of codes whose last look is nominally within [0, duration).

    For a converter without averaging these are all k with first + k/rate below the duration.
    """
    return adc.code_count(duration)


def even_count(adc: Converter, duration: float) -> int:
    """Return the same for a converter whose codes are evenly spaced."""
    position = (duration - first_code_instant(adc)) * adc.true_rate
    whole = max(abs(position), duration * adc.true_rate, 1.0)
    return max(math.ceil(position - 4.0 * np.finfo(np.float64).eps * whole), 0)


def uneven_count(adc: Converter, duration: float) -> int:
    """Return the same for a converter whose codes are not evenly spaced."""

    def instant(code: int) -> float:
        return float(adc.pattern.at(np.array([adc.last_look(code)]))[0])

    limit = duration - 4.0 * np.finfo(np.float64).eps * max(duration, abs(adc.pattern.first))
    count = max(int((duration - instant(0)) * adc.true_rate), 0)
    while count > 0 and instant(count - 1) >= limit:
        count -= 1
    while instant(count) < limit:
        count += 1
    return count


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
