"""What the converter makes of a voltage."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from frontend_sim.converter.adc import Adc
from frontend_sim.randomness import normal, stream

Real = NDArray[np.float64]
Codes = NDArray[np.int64]


def converted_voltage(adc: Adc, pin: Real, start: int, seed: int) -> Real:
    """Return what the quantizer sees: (1 + gain_error) · pin + offset + noise.

    Parameters
    ----------
    pin : voltage at the pin at the sampling instants, shape (K,) [V]
    start : number of the first of these conversions; their noise depends on it and the seed
    """
    voltage = (1.0 + adc.gain_error) * pin + adc.offset
    if adc.input_noise > 0.0:
        noise = normal(stream(seed, "ADC input noise"), start, start + len(pin))
        voltage = voltage + adc.input_noise * noise
    return voltage


def quantize(adc: Adc, voltage: Real) -> tuple[Codes, NDArray[np.bool_]]:
    """Return codes and overrange flags, each of shape (K,).

        position = (voltage - low) / LSB
        nearest: floor(position + 1/2), a tie upwards      down: floor(position)

    clipped to the range; the flag tells where the clipping changed the code. Source: the ideal
    transfer function of IEEE 1241, from memory, the standard was not at hand.
    """
    position = (voltage - adc.low) / adc.lsb
    steps = np.floor(position)
    if adc.rounding == "nearest":
        # The sum position + 1/2 would round a position just below a half to the next code.
        steps += position - steps >= 0.5
    clipped = np.clip(steps, 0.0, 2.0**adc.bits - 1.0)
    return clipped.astype(np.int64) + adc.lowest_code, clipped != steps


def read_back(adc: Adc, codes: Codes) -> Real:
    """Return the voltage that firmware reads from codes: low + (code - lowest) · LSB [V]."""
    return np.asarray(adc.low + (codes - adc.lowest_code) * adc.lsb)
