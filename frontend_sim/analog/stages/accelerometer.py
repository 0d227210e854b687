"""Accelerometer with its resonance."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.analog.block import Block
from frontend_sim.analog.noise import NoiseInput, at_input
from frontend_sim.analog.stages.base import Stage
from frontend_sim.analog.stages.second_order import SecondOrder
from frontend_sim.quantities import (
    AccelerationNoise,
    AccelerationSensitivity,
    PartFrequency,
    PositivePartRatio,
    Voltage,
)


class Accelerometer(Stage):
    """Accelerometer, a mass on a spring with a voltage for its deflection

        H(s) = S w0² / (s² + s w0/Q + w0²),    v = H a + offset.

    Source: equation of motion of the seismic mass, any textbook of vibration measurement.
    """

    kind: Literal["accelerometer"] = "accelerometer"
    sensitivity: AccelerationSensitivity = Field(
        description="output S per acceleration, well below the resonance, of either sign"
    )
    natural_frequency: PartFrequency = Field(description="natural frequency w0 / (2 pi)")
    quality_factor: PositivePartRatio = Field(description="quality factor Q of the resonance")
    offset_voltage: Voltage = Field(default=0.0, description="output without acceleration")
    noise_density: AccelerationNoise = Field(
        default=0.0, description="density of the noise, as an acceleration at the input"
    )

    def units(self) -> tuple[str, str]:
        """Return acceleration in, volts out."""
        return ("m/s^2", "V")

    def blocks(self) -> tuple[Block, ...]:
        """Return one block of second order, or two of first order up to critical damping."""
        unity = SecondOrder(corner=self.natural_frequency, quality_factor=self.quality_factor)
        *first, last = unity.blocks()
        return (*first, Block.of(last.a, last.b, self.sensitivity * last.c, 0.0))

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return the noise of the sensor, which the resonance shapes like the signal."""
        if self.noise_density == 0.0:
            return ()
        return (at_input("noise of the sensor", self.noise_density, self.blocks()),)

    def offset(self, temperature: float) -> float:
        """Return the output without acceleration [V]."""
        return self.offset_voltage
