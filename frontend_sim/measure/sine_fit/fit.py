"""What a fit of a sine gives."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.measure.arrays import Real, positive, samples
from frontend_sim.measure.level import decibel, effective_bits, quotient
from frontend_sim.measure.sine_fit.bounds import SineBounds
from frontend_sim.stimulus.phase import cycles


@dataclass(frozen=True)
class SineFit:
    """The sine with the least squared distance from a record,

        y(t) = offset + amplitude · sin(2 pi frequency t + phase).

    Parameters
    ----------
    amplitude : peak value, above zero [V]
    frequency : [Hz]
    phase : at t = 0, the first sample of a record with a rate; -pi to pi [rad]
    offset : [V]
    residual_rms : sqrt( sum of squared residuals / N ), noise and distortion of IEEE 1241 [V]
    count : samples of the record, N
    parameters : fitted numbers: 3 with a known frequency, 4 with a free one
    bounds : standard deviations that no unbiased estimate can beat, were the residual white noise
    """

    amplitude: float
    frequency: float
    phase: float
    offset: float
    residual_rms: float
    count: int
    parameters: int
    bounds: SineBounds

    @property
    def noise_rms(self) -> float:
        """Estimate of the noise without bias, sqrt( sum of squared residuals / (N - p) ) [V]."""
        return self.residual_rms * math.sqrt(self.count / (self.count - self.parameters))

    @property
    def sinad(self) -> float:
        """Signal to noise and distortion, 20 lg( amplitude / (sqrt(2) residual rms) ) [dB]."""
        return decibel(quotient(self.amplitude / math.sqrt(2.0), self.residual_rms))

    def effective_bits(self, full_scale: float | None = None) -> float:
        """Return the effective number of bits, IEEE 1241 (from memory).

        Parameters
        ----------
        full_scale : width of the range [V]; left out, the sine counts as filling it

        Raises
        ------
        MeasureError
            If it is not above zero.
        """
        if full_scale is None:
            return effective_bits(self.residual_rms, 2.0 * self.amplitude)
        return effective_bits(self.residual_rms, positive(full_scale, "the full scale", "V"))

    def values(self, times: ArrayLike) -> Real:
        """Return the sine at instants, shape (K,) [V]."""
        turns = cycles(self.frequency, samples(times, 0, "row of instants"))
        return self.offset + self.amplitude * np.sin(2.0 * np.pi * turns + self.phase)
