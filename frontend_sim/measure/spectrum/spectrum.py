"""The one-sided amplitude spectrum of a record."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.measure.arrays import Real, positive, samples
from frontend_sim.measure.spectrum.window import Window, window_named

LEAST_POINTS = 16
"""Fewest points of which a spectrum is made; the widest window then still falls to zero."""


@dataclass(frozen=True, eq=False)
class Spectrum:
    """Amplitudes over frequency, so scaled that a tone on a bin shows its peak value.

    Parameters
    ----------
    frequency : of each bin, 0 to half the rate, shape (N // 2 + 1,) [Hz]
    amplitude : peak value of a sine there, shape (N // 2 + 1,) [V]; at zero the mean, and at half
        the rate of an even N the height of the alternation
    window : that the record was multiplied with
    rate : samples per second [Hz]
    count : samples of the record, N
    """

    frequency: Real
    amplitude: Real
    window: Window
    rate: float
    count: int

    @property
    def resolution(self) -> float:
        """Distance of the bins, rate / N [Hz]."""
        return self.rate / self.count

    @property
    def noise_bandwidth(self) -> float:
        """Width of the band whose noise one bin shows [Hz]."""
        return self.window.noise_bandwidth * self.resolution

    @property
    def mean_square(self) -> Real:
        """Mean square that each bin shows, shape (N // 2 + 1,) [V²].

        A²/2, at zero and half the rate A². Over bins of noise it adds up to the noise bandwidth of
        the window times their mean square, see ``power``.
        """
        square = 0.5 * self.amplitude**2
        square[self._single] *= 2.0
        return square

    @property
    def density(self) -> Real:
        """Noise density of each bin, one-sided, shape (N // 2 + 1,) [V/sqrt(Hz)].

        At zero and half the rate, where the two sides meet, twice the mean square counts.
        """
        square = self.mean_square
        square[self._single] *= 2.0
        return np.sqrt(square / self.noise_bandwidth)

    def power(self, first: int, last: int) -> float:
        """Return the mean square of what lies in bins first to last, both included [V²].

        Of a tone whose main lobe lies within, A²/2 wherever it stands between bins.
        """
        return float(np.sum(self.mean_square[first : last + 1])) / self.window.noise_bandwidth

    def dbfs(self, full_scale: float) -> Real:
        """Return levels against a sine that fills the range, shape (N // 2 + 1,) [dB].

        Parameters
        ----------
        full_scale : width of the range, high - low [V]
        """
        reference = 0.5 * positive(full_scale, "the full scale", "V")
        with np.errstate(divide="ignore"):
            return np.asarray(20.0 * np.log10(self.amplitude / reference))

    @property
    def _single(self) -> list[int]:
        return [0, -1] if self.count % 2 == 0 else [0]


def amplitude_spectrum(values: ArrayLike, rate: float, window: str | Window = "hann") -> Spectrum:
    """Return the one-sided amplitude spectrum of a record,

        A[k] = 2 |sum_n w[n] x[n] exp(-2 pi i k n / N)| / (N a[0]),

    half of that at zero and at half the rate. Source: IEEE 1057 and IEEE 1241, from memory.

    Parameters
    ----------
    values : shape (N,) [V]
    rate : samples per second [Hz]
    window : a name of ``WINDOWS``, or a window of your own

    Raises
    ------
    MeasureError
        If the record is too short or not finite, or there is no such window.
    """
    row = samples(values, LEAST_POINTS)
    exact = positive(rate, "the rate", "Hz")
    chosen = window if isinstance(window, Window) else window_named(window)
    count = len(row)
    amplitude = np.abs(np.fft.rfft(row * chosen.points(count)))
    amplitude *= 2.0 / (count * chosen.coherent_gain)
    amplitude[[0, -1] if count % 2 == 0 else [0]] *= 0.5
    frequency = np.arange(len(amplitude), dtype=np.float64) * (exact / count)
    return Spectrum(frequency, amplitude, chosen, exact, count)
