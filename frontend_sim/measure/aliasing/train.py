"""The Fourier series of a train of pulses."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from frontend_sim.stimulus.pulse import Train
from frontend_sim.stimulus.sine import Tone


def harmonic_of(train: Train, order: NDArray[np.int64]) -> NDArray[np.complex128]:
    """Return the complex amplitudes of some harmonics, shape of ``order``,

        c[k] = 1/T · sum over breaks of (J[i] / (j w) + S[i] / (j w)²) exp(-j w t[i]),

    w = 2 pi k / T, J the jump of the signal and S that of its slope at a break: what two
    derivatives of a periodic signal of straight pieces leave. The harmonic is 2 |c| at its peak.
    Source: any text on Fourier series, from memory.

    Parameters
    ----------
    order : k, at least 1
    """
    lengths = np.diff(np.append(train.offsets, train.period))
    ends = train.levels + train.slopes * lengths
    jumps = train.levels - np.roll(ends, 1)
    bends = train.slopes - np.roll(train.slopes, 1)
    jw = 2j * np.pi * order / train.period
    turns = np.multiply.outer(order / train.period, train.offsets)
    turned = np.exp(-2j * np.pi * (turns - np.round(turns)))
    return np.asarray((turned @ jumps / jw + turned @ bends / jw**2) / train.period)


def mean_of(train: Train) -> float:
    """Return the mean of a cycle."""
    lengths = np.diff(np.append(train.offsets, train.period))
    areas = train.levels * lengths + 0.5 * train.slopes * lengths**2
    return float(np.sum(areas)) / train.period


def tones_below(train: Train, limit: float) -> list[Tone]:
    """Return mean and harmonics up to a frequency [Hz], with their signs turned round.

    Added to the train, which starts at t = 0, they leave the harmonics above.
    """
    highest = int(np.floor(limit * train.period * (1.0 + 1e-12)))
    orders = np.arange(1, highest + 1)
    found = [Tone(0.0, 1.0 / train.period, 0.0, -mean_of(train))]
    for order, c in zip(orders, harmonic_of(train, orders), strict=True):
        phase = float(np.angle(c)) + 0.5 * np.pi
        found.append(Tone(-2.0 * float(abs(c)), float(order) / train.period, phase, 0.0))
    return found
