"""The noise of a record that should be constant."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.converter.adc import Adc
from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import codes_of, positive, samples
from frontend_sim.measure.noise.interval import Interval, rms_interval
from frontend_sim.quantities.counting import counted

CREST = 6.6
"""Peak-to-peak value of normal noise over its rms that 99.9 % of the samples keep."""

LEAST_RMS = 0.5
"""Noise of so many LSB at least makes the error of rounding independent of it."""


@dataclass(frozen=True)
class Noise:
    """Noise about the mean of a record. Nothing is removed first: a drift counts as noise.

    Parameters
    ----------
    mean : [V], or [counts] of codes
    rms : standard deviation, sqrt( sum (x - mean)² / (N - 1) ), same unit
    rms_interval : of the rms, were the samples independent and normal
    peak_to_peak : largest less smallest sample; it grows with N
    count : samples, N
    full_scale : width of the range, same unit; None where it was not given
    """

    mean: float
    rms: float
    rms_interval: Interval
    peak_to_peak: float
    count: int
    full_scale: float | None

    @property
    def effective_resolution(self) -> float | None:
        """Return log2( full scale / rms ), infinite without noise, None without a full scale."""
        return _bits(self.full_scale, self.rms)

    @property
    def noise_free_bits(self) -> float | None:
        """Return log2( full scale / (6.6 rms) ): bits that 99.9 % of the samples keep still.

        Infinite without noise, None without a full scale. Source: common practice.
        """
        return _bits(self.full_scale, CREST * self.rms)

    @property
    def noise_free_bits_seen(self) -> float | None:
        """Return log2( full scale / peak-to-peak ): bits that all samples of this record keep."""
        return _bits(self.full_scale, self.peak_to_peak)


def noise_of(values: ArrayLike, full_scale: float | None = None, confidence: float = 0.95) -> Noise:
    """Measure the noise of a record.

    Parameters
    ----------
    values : shape (N,) [V]
    full_scale : width of the range, for the resolutions [V]
    confidence : of the interval

    Raises
    ------
    MeasureError
        If there are fewer than 2 samples, or they are not finite.
    """
    row = samples(values, 2)
    whole = None if full_scale is None else positive(full_scale, "the full scale", "V")
    rms = float(np.std(row, ddof=1))
    return Noise(
        mean=float(np.mean(row)),
        rms=rms,
        rms_interval=rms_interval(rms, len(row), confidence),
        peak_to_peak=float(np.ptp(row)),
        count=len(row),
        full_scale=whole,
    )


def code_noise(codes: ArrayLike, adc: Adc, confidence: float = 0.95) -> Noise:
    """Measure the noise of codes, in counts, which are LSB.

    Parameters
    ----------
    codes : shape (N,) [counts]
    adc : that they come from, for the full scale, 2^bits counts

    Raises
    ------
    MeasureError
        If they are not whole numbers, fewer than 2, or clipped at an end of the range.
    """
    row = codes_of(codes, 2)
    for end, name in ((adc.lowest_code, "lowest"), (adc.highest_code, "highest")):
        cut = int(np.count_nonzero(row == end))
        if cut:
            of = f"of {counted(len(row), 'code')}"
            raise MeasureError(
                f"{counted(cut, f'{of} is', f'{of} are')} the {name} one, {end}: the noise is cut "
                "off there; move the level into the range"
            )
    return noise_of(row, adc.full_scale_codes, confidence)


def before_rounding(rms: float) -> float:
    """Return the rms of the noise before it was rounded to codes, sqrt( rms² - 1/12 ) [LSB].

    Sheppard's correction. Source: B. Widrow 1956, on quantization noise (from memory).

    Parameters
    ----------
    rms : of the codes [LSB]

    Raises
    ------
    MeasureError
        If the noise is below half an LSB: the codes then depend on where the level stands between
        them, and tell little of the noise.
    """
    inner = positive(rms, "the rms of the codes", "LSB") ** 2 - 1.0 / 12.0
    if inner < LEAST_RMS**2:
        raise MeasureError(
            f"codes with {rms:.3g} LSB rms do not tell the noise below them, it must be at least "
            f"{LEAST_RMS:g} LSB; measure the voltage at the pin, or with more bits"
        )
    return math.sqrt(inner)


def _bits(full_scale: float | None, noise: float) -> float | None:
    if full_scale is None:
        return None
    return math.log2(full_scale / noise) if noise > 0.0 else math.inf
