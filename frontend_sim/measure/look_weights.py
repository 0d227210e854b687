"""What a converter that takes several looks for a code does to noise."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.exponential import expm1
from frontend_sim.analog.noise import NoiseModel
from frontend_sim.converter import AnyAdc
from frontend_sim.converter.sinc_filter import SincFilter


@dataclass(frozen=True, eq=False)
class LookWeights:
    """The looks in one code: a code is the sum of weight[k] · look[k], looks at equal intervals.

    An average is a sinc filter of first order.

    Parameters
    ----------
    sinc : the filter, whose modulator rate is that of the looks; None where a code is one look
    """

    sinc: SincFilter | None

    @classmethod
    def of(cls, adc: AnyAdc) -> Self:
        """Take the filter of a converter: its own, or that of an average."""
        if adc.kind == "oversampling":
            return cls(adc.sinc)
        if adc.looks == 1:
            return cls(None)
        return cls(SincFilter(1, adc.looks, 1.0 / adc.pattern.closest))

    @property
    def white(self) -> float:
        """Variance of a code for looks of variance one, each of its own [1]."""
        return 1.0 if self.sinc is None else self.sinc.noise_gain**2

    def power(self, frequency: Real) -> Real:
        """Return |H(f)|², shape (K,) [1]."""
        if self.sinc is None:
            return np.ones(len(frequency))
        return np.asarray(self.sinc.amplitude(frequency) ** 2)

    def variance(self, model: NoiseModel, covariance: Real) -> float:
        """Return the variance of a code, the sum over lags of (w * w)[k] R(k T) [V²].

        R(k T) = c exp(a k T) P c' is the autocovariance of the pin.

        Parameters
        ----------
        covariance : P of the states, at rest, shape (n, n)
        """
        here = covariance @ model.c
        if self.sinc is None or not np.any(here):
            return float(model.c @ here)
        lags = autocorrelation(self.sinc.taps)
        size = len(lags)
        block = math.isqrt(size - 1) + 1
        step = expm1(model.a / self.sinc.modulator_rate) + np.eye(len(model.a))
        rows = [model.c]
        for _ in range(block - 1):
            rows.append(rows[-1] @ step)
        leap, columns = np.linalg.matrix_power(step, block), [here]
        for _ in range(-(-size // block) - 1):
            columns.append(leap @ columns[-1])
        found = (np.array(columns) @ np.array(rows).T).ravel()[:size]
        return float(lags[0] * found[0] + 2.0 * (lags[1:] @ found[1:]))


def autocorrelation(weights: Real) -> Real:
    """Return the sum over i of w[i] w[i + k], for k = 0 to L - 1, shape (L,)."""
    size = len(weights)
    spectrum = np.fft.rfft(weights, 2 * size)
    return np.asarray(np.fft.irfft(np.abs(spectrum) ** 2, 2 * size)[:size])
