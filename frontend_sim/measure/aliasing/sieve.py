"""What the converter itself does to a signal before a code: it weighs several looks."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Self

import numpy as np
from numpy.typing import ArrayLike, NDArray

from frontend_sim.converter import AnyAdc, OversamplingAdc
from frontend_sim.converter.clock import look_count
from frontend_sim.errors import MeasureError

Real = NDArray[np.float64]

MOST_LOOKS = 1 << 24
"""Looks at the pin that are held at once, 128 MB."""


@dataclass(frozen=True, eq=False)
class Sieve:
    """Weights of the looks in one code, the oldest first; they add up to 1.

    Parameters
    ----------
    adc : the converter
    weights : shape (L,) [1]
    since : instants of these looks after the oldest one, by the converter's clock, shape (L,) [s]
    """

    adc: AnyAdc
    weights: Real
    since: Real

    @classmethod
    def of(cls, adc: AnyAdc) -> Self:
        """Take the weights of a converter: its filter, its average, or one look."""
        if isinstance(adc, OversamplingAdc):
            taps = adc.sinc.taps
            return cls(adc, taps, np.arange(len(taps)) / adc.sinc.modulator_rate)
        looks = adc.looks
        at = adc.pattern.at(np.arange(looks, dtype=np.int64))
        return cls(adc, np.full(looks, 1.0 / looks), at - at[0])

    def gain(self, frequency: ArrayLike) -> Real:
        """Return the gain of the weights at some frequencies, without sign, of their shape [1].

            |D(f)| = |sum of w[i] exp(-2 pi i f t[i])|

        in closed form for a sinc filter, 1 for a single look.

        Parameters
        ----------
        frequency : of the signal, also far above the rate [Hz]
        """
        f = np.asarray(frequency, dtype=np.float64)
        if isinstance(self.adc, OversamplingAdc):
            return self.adc.sinc.amplitude(f)
        if len(self.weights) == 1:
            return np.ones_like(f)
        turns = np.multiply.outer(f, self.since)
        turned = np.exp(-2j * np.pi * (turns - np.round(turns)))
        return np.asarray(np.abs(turned @ self.weights))

    def looks(self, codes: int) -> int:
        """Return the number of looks that so many codes need.

        Raises
        ------
        MeasureError
            If they are more than are held at once.
        """
        count = look_count(self.adc, codes)
        if count > MOST_LOOKS:
            raise MeasureError(
                f"{codes} codes look at the pin {count} times, more than the {MOST_LOOKS} that "
                "are held at once; shorten simulation.duration"
            )
        return count

    def codes(self, values: Real, codes: int) -> Real:
        """Return what the weights make of values at all looks, shape (codes,) [V].

        Parameters
        ----------
        values : at looks 0, 1, ..., shape (looks,) [V]
        codes : number of codes
        """
        newest = np.array([self.adc.last_look(0), self.adc.last_look(1)])
        hop, length = int(newest[1] - newest[0]), len(self.weights)
        oldest = int(newest[0]) - length + 1
        windows = np.lib.stride_tricks.sliding_window_view(values[oldest:], length)[::hop]
        return np.asarray(windows[:codes] @ self.weights)

    def newest(self, values: Real, codes: int) -> Real:
        """Return the value at the newest look of each code, shape (codes,)."""
        first = self.adc.last_look(0)
        return values[first :: self.adc.last_look(1) - first][:codes]
