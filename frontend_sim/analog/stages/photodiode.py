"""Photodiode."""

from __future__ import annotations

import math
from typing import Literal, Self

from pydantic import Field, model_validator

from frontend_sim.analog.block import Block, first_order, gain_block
from frontend_sim.analog.noise import NoiseInput, at_input, thermal_density
from frontend_sim.analog.stages.base import Stage
from frontend_sim.quantities import (
    NotNegativeCapacitance,
    NotNegativeCurrent,
    NotNegativePower,
    Resistance,
    Responsivity,
)

ELEMENTARY_CHARGE = 1.602176634e-19
"""A s, exact since the SI of 2019."""


class Photodiode(Stage):
    """Photodiode: a current S P + I_dark for an optical power P, into a load or into the next stage

        H(s) = S R / (1 + s R C)    in V/W with a load R and the junction's C,
        H(s) = S                    in A/W without a load.

    Without a load the current is the output, for a transimpedance-amplifier; the junction then
    belongs to its ``input_capacitance``. S below zero is a diode the other way round. Shot noise
    has the density sqrt(2 q I). Source: common practice; shot noise from W. Schottky 1918.
    """

    kind: Literal["photodiode"] = "photodiode"
    responsivity: Responsivity = Field(description="current S per optical power")
    load_resistance: Resistance | None = Field(
        default=None, description="load R; left out, the output is the current"
    )
    junction_capacitance: NotNegativeCapacitance = Field(
        default=0.0, description="capacitance C of the junction, with a load"
    )
    dark_current: NotNegativeCurrent = Field(default=0.0, description="current without light")
    operating_power: NotNegativePower = Field(
        default=0.0, description="optical power at which the shot noise is taken"
    )

    @model_validator(mode="after")
    def _possible(self) -> Self:
        if self.responsivity == 0.0:
            raise ValueError("a responsivity of 0 leaves nothing of the light")
        if self.load_resistance is None and self.junction_capacitance > 0.0:
            raise ValueError(
                "junction_capacitance needs load_resistance; without a load give it to the "
                "transimpedance-amplifier that follows, in its input_capacitance"
            )
        return self

    def units(self) -> tuple[str, str]:
        """Return optical power in, volts out with a load, else amperes."""
        return ("W", "A" if self.load_resistance is None else "V")

    def blocks(self) -> tuple[Block, ...]:
        """Return the pole of load and junction, or a gain where one of them is missing."""
        if self.load_resistance is None:
            return (gain_block(self.responsivity),)
        gain = self.responsivity * self.load_resistance
        if self.junction_capacitance == 0.0:
            return (gain_block(gain),)
        rate = 1.0 / (self.load_resistance * self.junction_capacitance)
        return (first_order(-rate, (0.0, gain * rate)),)

    def resistance_at_rest(self) -> float | None:
        """Return the load, where the output is a voltage [ohm]."""
        return self.load_resistance

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return shot noise at the operating power, and thermal noise of the load."""
        blocks, size = self.blocks(), abs(self.responsivity)
        current = self.dark_current + size * self.operating_power
        sources = []
        if current > 0.0:
            density = math.sqrt(2.0 * ELEMENTARY_CHARGE * current) / size
            sources.append(at_input("shot noise", density, blocks))
        if self.load_resistance is not None:
            density = thermal_density(self.load_resistance, temperature)
            density /= self.load_resistance * size
            sources.append(at_input("thermal noise of load_resistance", density, blocks))
        return tuple(sources)

    def offset(self, temperature: float) -> float:
        """Return what the dark current makes, in the unit of the output."""
        dark = math.copysign(self.dark_current, self.responsivity)
        return dark if self.load_resistance is None else dark * self.load_resistance
