"""Sines and their conversion, for tests of measures."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from frontend_sim.converter.adc import Adc
from frontend_sim.converter.quantizer import quantize, read_back

Real = NDArray[np.float64]


def sine(
    cycles: float, count: int, amplitude: float = 1.0, phase: float = 0.1, offset: float = 0.0
) -> Real:
    """Return ``count`` points of a sine with so many cycles in them; its rate is ``count`` Hz."""
    whole, part = divmod(cycles, 1.0)
    number = np.arange(count)
    turn = (number * int(whole)) % count / count + part * number / count
    return offset + amplitude * np.sin(2.0 * np.pi * turn + phase)


def converter(bits: int) -> Adc:
    """Return an ideal converter from -1 V to 1 V."""
    return Adc(rate=1.0, bits=bits, low=-1.0, high=1.0)


def converted(bits: int, values: Real) -> Real:
    """Return values as an ideal converter from -1 V to 1 V reads them."""
    adc = converter(bits)
    codes, overrange = quantize(adc, values)
    assert not np.any(overrange)
    return read_back(adc, codes)


def full_scale_sine(bits: int, cycles: float, count: int, shift: float = 0.0) -> Real:
    """Return the largest sine within the range that can be shifted by a share of an LSB."""
    lsb = 2.0 ** (1 - bits)
    return sine(cycles, count, amplitude=1.0 - lsb, offset=(shift - 0.5) * lsb)
