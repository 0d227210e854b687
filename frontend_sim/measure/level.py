"""Ratios of levels in decibels and in bits."""

from __future__ import annotations

import math

FULL_SCALE_SINE = 1.5
"""Power of a full-scale sine, FS²/8, over that of the error of a quantizer of no bits, FS²/12."""


def decibel(ratio: float) -> float:
    """Return 20 lg of a ratio of amplitudes, minus infinity of zero, none of none (NaN) [dB]."""
    return -math.inf if ratio <= 0.0 else 20.0 * math.log10(ratio)


def quotient(part: float, whole: float) -> float:
    """Return part / whole of two levels, infinite over a silent whole, NaN if both are [1]."""
    if whole == 0.0:
        return math.inf if part > 0.0 else math.nan
    return part / whole


def effective_bits(error: float, full_scale: float) -> float:
    """Return the bits of the ideal quantizer whose error is as large,

        N = log2( full_scale / (sqrt(12) · error) ),

    the effective number of bits of IEEE 1241 (from memory). For a full-scale sine it is
    (SINAD - 1.76 dB) / 6.02 dB. Infinite without error.

    Parameters
    ----------
    error : rms of noise and distortion [V]
    full_scale : width of the range [V]
    """
    if error == 0.0:
        return math.inf
    return math.log2(full_scale / (math.sqrt(12.0) * error))


def quantization_limit(bits: float) -> float:
    """Return the SNR of a full-scale sine behind an ideal quantizer, 20 lg(2^N sqrt(1.5)) [dB].

    Source: W. R. Bennett 1948, "Spectra of quantized signals" (from memory).
    """
    return 20.0 * bits * math.log10(2.0) + 10.0 * math.log10(FULL_SCALE_SINE)


def jitter_limit(frequency: float, jitter: float) -> float:
    """Return the SNR of a sine that is sampled with jitter, -20 lg(2 pi f s) [dB].

    Valid while 2 pi f s is far below one. Source: common practice.

    Parameters
    ----------
    frequency : of the sine [Hz]
    jitter : rms of the instants [s]
    """
    return -decibel(2.0 * math.pi * frequency * jitter)
