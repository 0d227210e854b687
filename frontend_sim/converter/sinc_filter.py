"""The sinc^K filter behind a modulator: K running means in a row, one value kept of R."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray

from frontend_sim.errors import InputError

Real = NDArray[np.float64]

HALF_POWER = 10.0 * math.log10(2.0)
"""Attenuation at the corner [dB]."""

NO_TURN = 1e-100
"""A part of a turn between two samples below this is none, and would lose its digits."""

STEPS = 100
"""Halvings of an interval, more than a float has digits."""


@dataclass(frozen=True)
class SincFilter:
    """K running means over R modulator samples each, decimated by R.

    Source: Hogenauer 1981, "An economical class of digital filters for decimation and
    interpolation"; from memory.

    Parameters
    ----------
    order : K, 1 to 5
    ratio : R, at least 2
    modulator_rate : samples per second [Hz]
    """

    order: int
    ratio: int
    modulator_rate: float

    @property
    def data_rate(self) -> float:
        """Values per second where the filter runs on, modulator_rate / R [Hz]."""
        return self.modulator_rate / self.ratio

    @property
    def length(self) -> int:
        """Modulator samples in one value, K (R - 1) + 1."""
        return self.order * (self.ratio - 1) + 1

    @cached_property
    def taps(self) -> Real:
        """Weights of the samples, which add up to 1, shape (length,).

            h[n] = R^-K · sum over j of (-1)^j binomial(K, j) binomial(n - j R + K - 1, K - 1)

        is the K-fold difference of the K-fold running sum of one sample. Only the first half is
        computed, where the sum loses no digits; the second is its mirror image.
        """
        n = np.arange((self.length + 1) // 2)
        total = np.zeros(len(n))
        for j in range(self.order // 2 + 1):
            since = n[j * self.ratio :] - float(j * self.ratio)
            sums = np.ones(len(since))
            for i in range(1, self.order):
                sums *= (since + i) / (i * self.ratio)
            total[j * self.ratio :] += (-1) ** j * math.comb(self.order, j) * sums / self.ratio
        return np.concatenate([total, total[: self.length // 2][::-1]])

    def amplitude(self, frequency: ArrayLike) -> Real:
        """Return the gain at some frequencies, without sign, of their shape [1].

            |H(f)| = |sin(pi R f / f_m) / (R sin(pi f / f_m))|^K

        Parameters
        ----------
        frequency : before decimation, also above half the data rate [Hz]
        """
        turns = np.asarray(frequency, dtype=np.float64) / self.modulator_rate
        turns = turns - np.round(turns)  # one period of the modulator rate is like another
        below = self.ratio * np.sin(np.pi * turns)
        # Whole turns are taken off before the sine; so the notches are zero to the last digit.
        above = np.sin(np.pi * (self.ratio * turns - np.round(self.ratio * turns)))
        still = np.abs(turns) < NO_TURN
        gain = np.where(still, 1.0, above / np.where(still, 1.0, below))
        return np.asarray(np.abs(gain) ** self.order)

    def attenuation(self, frequency: float) -> float:
        """Return the attenuation at a frequency, infinite in a notch [dB].

        Parameters
        ----------
        frequency : [Hz]
        """
        gain = float(self.amplitude(frequency))
        return -20.0 * math.log10(gain) if gain > 0.0 else math.inf

    @property
    def corner(self) -> float:
        """Frequency of 3.01 dB, half the power [Hz]."""
        return self._crossing(self.data_rate, 0.0, HALF_POWER)

    def notch(self, number: int = 1) -> float:
        """Return the frequency of a notch, number · data_rate [Hz]."""
        return number * self.data_rate

    def notch_edges(self, attenuation: float, number: int = 1) -> tuple[float, float]:
        """Return from where to where a notch has at least some attenuation [Hz].

        Parameters
        ----------
        attenuation : [dB]
        number : of the notch, 1 for that at the data rate, up to R - 1

        Raises
        ------
        InputError
            If there is no such notch, or the attenuation is nowhere less on the way to the next.
        """
        if not 1 <= number < self.ratio:
            raise InputError(
                f"there are notches 1 to {self.ratio - 1} below the modulator rate, no {number}"
            )
        peaks = self.lobe(number - 1), self.lobe(number)
        least = max(self.attenuation(peak) for peak in peaks)
        if not attenuation > least:
            raise InputError(
                f"the filter attenuates by {least:.4g} dB all the way to the next notch; ask for "
                f"the width of more than that, not of {attenuation:g} dB"
            )
        below, above = (self._crossing(self.notch(number), peak, attenuation) for peak in peaks)
        return below, above

    def lobe(self, number: int) -> float:
        """Return the frequency of least attenuation between a notch and the next one [Hz].

        Parameters
        ----------
        number : of the notch before, 0 to R - 1; the lobe of 0 has its peak at 0 Hz, that of R - 1
            at the modulator rate
        """
        if number in (0, self.ratio - 1):
            return self.modulator_rate if number else 0.0
        low, high = self.notch(number), self.notch(number + 1)
        for _ in range(STEPS):
            third = (high - low) / 3.0
            if self.amplitude(low + third) < self.amplitude(high - third):
                low += third
            else:
                high -= third
        return 0.5 * (low + high)

    def _crossing(self, more: float, less: float, attenuation: float) -> float:
        """Return where, from one frequency to another, a falling attenuation has a value [Hz]."""
        for _ in range(STEPS):
            middle = 0.5 * (more + less)
            if self.attenuation(middle) >= attenuation:
                more = middle
            else:
                less = middle
        return 0.5 * (more + less)

    @property
    def group_delay(self) -> float:
        """Delay of every frequency, K (R - 1) / 2 modulator periods [s]."""
        return 0.5 * self.order * (self.ratio - 1) / self.modulator_rate

    @property
    def settling_time(self) -> float:
        """From a restart to the first whole value, K R modulator periods [s]."""
        return self.order * self.ratio / self.modulator_rate

    def step(self) -> Real:
        """Return what share of a step the values after a restart show, shape (K,) [1].

        The last one is 1. With many taps: 1/2, 1 for K = 2; 1/6, 5/6, 1 for K = 3.
        """
        # K R samples are more than the filter holds: the last value sees the newest of them.
        sums = np.append(0.0, np.cumsum(self.taps))
        seen = np.minimum(np.arange(1, self.order + 1) * self.ratio, self.length)
        return np.asarray(sums[seen])

    @property
    def register_growth(self) -> int:
        """Bits by which the registers of the running sums outgrow the input, ceil(K log2 R)."""
        growth: int = self.ratio**self.order - 1
        return growth.bit_length()

    @property
    def noise_gain(self) -> float:
        """Rms of a value where every sample has white noise of rms 1 [1]."""
        return float(np.sqrt(np.sum(self.taps**2)))

    @property
    def noise_bandwidth(self) -> float:
        """Bandwidth of an ideal filter that lets as much white noise through [Hz]."""
        return 0.5 * self.modulator_rate * self.noise_gain**2
