"""What the converter makes of a voltage."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Self

import numpy as np
from numpy.typing import NDArray

from frontend_sim.converter.base import Converter
from frontend_sim.converter.nonlinearity import MOST_LEVELS_BITS
from frontend_sim.quantities import REFERENCE_TEMPERATURE
from frontend_sim.randomness import normal, stream

Real = NDArray[np.float64]
Codes = NDArray[np.int64]
Flags = NDArray[np.bool_]


def converted_voltage(
    adc: Converter,
    pin: Real,
    start: int,
    seed: int,
    temperature: float = REFERENCE_TEMPERATURE,
) -> Real:
    """Return what the quantizer sees: ((1 + gain_error) · pin + offset + noise) / r.

    Parameters
    ----------
    pin : voltage at the pin at the looks, shape (K,) [V]
    start : number of the first of these looks; their noise depends on it and the seed
    temperature : of the reference, whose ratio to its nominal voltage is r [K]

    Raises
    ------
    ModelError
        If the reference drifts out of its limits.
    """
    voltage = (1.0 + adc.gain_error) * pin + adc.offset
    if adc.look_noise > 0.0:
        noise = normal(stream(seed, "ADC input noise"), start, start + len(pin))
        voltage = voltage + adc.look_noise * noise
    if adc.reference is not None:
        stop = start + len(pin)
        voltage = voltage / adc.reference.factor(adc.pattern, start, stop, seed, temperature)
    return voltage


def quantize(adc: Converter, voltage: Real) -> tuple[Codes, Flags]:
    """Return codes and overrange flags of the ideal quantizer, each of shape (K,).

        position = (voltage - low) / LSB
        nearest: floor(position + 1/2), a tie upwards      down: floor(position)

    clipped to the range; the flag tells where the clipping changed the code. Source: the ideal
    transfer function of IEEE 1241, from memory, the standard was not at hand.
    """
    position = (voltage - adc.low) / adc.core_lsb
    steps = np.floor(position)
    if adc.rounding == "nearest":
        # The sum position + 1/2 would round a position just below a half to the next code.
        steps += position - steps >= 0.5
    clipped = np.clip(steps, 0.0, 2.0**adc.bits - 1.0)
    return clipped.astype(np.int64) + adc.core_lowest_code, clipped != steps


@dataclass(frozen=True, eq=False)
class Quantizer:
    """A quantizer with the nonlinearity of its converter.

    Parameters
    ----------
    adc : the converter
    levels : where the code changes, lowest first, shape (2^bits - 1,); None where no code has a
        level of its own [LSB above low]
    """

    adc: Converter
    levels: Real | None

    @classmethod
    def of(cls, adc: Converter, seed: int) -> Self:
        """Work out the levels. Raises ScenarioError if a table does not fit."""
        given = adc.nonlinearity
        if given is None or adc.bits > MOST_LEVELS_BITS:
            return cls(adc, None)
        return cls(adc, given.levels(adc.bits, seed) - _half(adc))

    def codes(self, voltage: Real) -> tuple[Codes, Flags]:
        """Return codes and overrange flags, each of shape (K,).

        The code is the number of levels at or below the voltage; the flag tells where the voltage
        lies beyond the range, or beyond a level that lies further out.
        """
        adc = self.adc
        if adc.nonlinearity is None:
            return quantize(adc, voltage)
        position = (voltage - adc.low) / adc.core_lsb
        half, top = _half(adc), 2.0**adc.bits - 1.0
        if self.levels is None:
            steps = np.floor(adc.nonlinearity.straightened(adc.bits, position + half))
            clipped = np.clip(steps, 0.0, top)
            return clipped.astype(np.int64) + adc.core_lowest_code, clipped != steps
        code = np.searchsorted(self.levels, position, side="right")
        lower = min(-half, float(self.levels[0]))
        upper = max(top + 1.0 - half, float(self.levels[-1]))
        return code + adc.core_lowest_code, (position < lower) | (position >= upper)


def _half(adc: Converter) -> float:
    """Return how far the change to a code lies below the code's own voltage [LSB]."""
    return 0.5 if adc.rounding == "nearest" else 0.0


def read_back(adc: Converter, codes: Codes) -> Real:
    """Return the voltage that firmware reads from codes: low + (code - code at low) · LSB [V]."""
    return np.asarray(adc.low + (codes - adc.code_at_low) * adc.lsb)
