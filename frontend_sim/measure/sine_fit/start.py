"""A first guess of the frequency of a sine, close enough for the fit to find the rest."""

from __future__ import annotations

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real
from frontend_sim.measure.instants import Instants
from frontend_sim.measure.spectrum.spectrum import amplitude_spectrum

FEW_CYCLES = 6
"""Up to here the two sides of a spectrum disturb one another, and guesses are tried one by one."""

TRIED = 1024
"""Points on which they are tried."""

MOST_CYCLES = 0.999
"""Highest guess, as a share of half the rate."""


def starting_frequency(values: Real, instants: Instants) -> float:
    """Return the frequency of the strongest line, to a small part of a bin [Hz].

    The peak of the spectrum under a Hann window, between bins by the ratio of the two highest,
    d = (2 r - 1) / (1 + r). Source: V. K. Jain, W. L. Collins and D. C. Davis 1979, "High-accuracy
    analog measurements via interpolated FFT", for the Hann window (from memory). With few cycles
    the sine is fitted at every fifth of a cycle, and the best kept.

    Parameters
    ----------
    values : shape (N,) [V]

    Raises
    ------
    MeasureError
        If the instants lie on no grid, so that there is no spectrum.
    """
    if instants.rate is None:
        raise MeasureError(
            "these instants lie on no grid, so the frequency cannot be found from a spectrum; give "
            f"it to within half a cycle of the record, {0.5 / instants.span:.3g} Hz"
        )
    spectrum = amplitude_spectrum(values - np.mean(values), instants.rate, "hann")
    amplitude = spectrum.amplitude
    peak = int(np.argmax(amplitude[1:-1])) + 1
    if peak <= FEW_CYCLES:
        return _best_of_few(values, instants)
    left, here, right = amplitude[peak - 1 : peak + 2]
    if here == 0.0:
        raise MeasureError("the record holds one value only, and no sine")
    ratio = max(left, right) / here
    offset = (2.0 * ratio - 1.0) / (1.0 + ratio) * (1.0 if right >= left else -1.0)
    highest = MOST_CYCLES * 0.5 * spectrum.rate
    return float(min((peak + offset) * spectrum.resolution, highest))


def _best_of_few(values: Real, instants: Instants) -> float:
    """Try cycles of 0.5 to ``FEW_CYCLES`` + 1 in the record on some of its points."""
    stride = max(len(values) // TRIED, 1)
    few, ticks = values[::stride], instants.ticks[::stride] - instants.centre
    most = min(FEW_CYCLES + 1.0, 0.5 * MOST_CYCLES * len(values))
    best, least = 0.0, np.inf
    for cycles in np.arange(0.5, most, 0.2):
        turn = 2.0 * np.pi * cycles / instants.span * instants.tick * ticks
        columns = np.column_stack([np.sin(turn), np.cos(turn), np.ones_like(turn)])
        found = np.linalg.lstsq(columns, few, rcond=None)[0]
        rest = float(np.sum((few - columns @ found) ** 2))
        if rest < least:
            best, least = float(cycles), rest
    return best / instants.span
