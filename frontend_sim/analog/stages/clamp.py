"""Clamp diodes at an input."""

from __future__ import annotations

import math
from typing import Literal, Self

from pydantic import Field, model_validator

from frontend_sim.analog.block import Block, first_order, gain_block
from frontend_sim.analog.limits import Clipping, DiodeClamp, Limiter
from frontend_sim.analog.noise import NoiseInput, thermal_density
from frontend_sim.analog.stages.base import Stage
from frontend_sim.analog.stages.rail_limit import levels, refuse_levels
from frontend_sim.quantities import (
    REFERENCE_TEMPERATURE,
    Capacitance,
    NotNegativeVoltage,
    Resistance,
    Voltage,
)

NAMES = ("its upper clamp", "its lower clamp")


class Clamp(Stage):
    """A node behind a resistance R, with a capacitance C to ground and a diode to each level,

        C dy/dt = (u - y) / R - i(y),
        i(y) = (y - (high + upper_forward_voltage)) / R_d    above that voltage,
        i(y) = (y - (low - lower_forward_voltage)) / R_d     below that one, zero between.

    A diode is a switch with a forward voltage and a resistance R_d. Without R_d the node is held;
    without C it follows at once. While a diode conducts, C keeps its clamped voltage, so the node
    comes back from there and not from where an unclamped one would be. The exponential knee of a
    diode, its capacitance and its recovery are not modelled. Source: piecewise-linear diode,
    common practice.
    """

    kind: Literal["clamp"] = "clamp"
    low: Voltage | None = Field(
        default=None, description="voltage that the lower diode goes to; left out, there is none"
    )
    high: Voltage | None = Field(
        default=None, description="voltage that the upper diode goes to; left out, there is none"
    )
    upper_forward_voltage: NotNegativeVoltage = Field(
        default=0.0, description="forward voltage of the upper diode"
    )
    lower_forward_voltage: NotNegativeVoltage = Field(
        default=0.0, description="forward voltage of the lower diode"
    )
    resistance: Resistance | None = Field(
        default=None,
        description="series resistance R before the diodes, the source's included",
    )
    capacitance: Capacitance | None = Field(
        default=None, description="capacitance C of the clamped node to ground; needs resistance"
    )
    diode_resistance: Resistance | None = Field(
        default=None, description="resistance R_d of a conducting diode; needs resistance"
    )

    @model_validator(mode="after")
    def _possible(self) -> Self:
        refuse_levels(self.low, self.high)
        if self.resistance is None:
            for key in ("capacitance", "diode_resistance"):
                if getattr(self, key) is not None:
                    raise ValueError(
                        f"{key} needs resistance: an ideal source would hold the node by itself"
                    )
        return self

    def blocks(self) -> tuple[Block, ...]:
        """Return the node while no diode conducts: a low pass, or a gain of one."""
        rate = self._rate()
        return (gain_block(1.0) if rate is None else first_order(-rate, (0.0, rate)),)

    def rails(self) -> tuple[float, float]:
        """Return where the diodes begin to conduct [V]."""
        low, high = levels(self.low, self.high)
        return low - self.lower_forward_voltage, high + self.upper_forward_voltage

    def resistance_at_rest(self) -> float | None:
        """Return R, while no diode conducts [ohm]."""
        return self.resistance

    def limiter(self, temperature: float = REFERENCE_TEMPERATURE) -> Limiter:
        """Return the diodes."""
        low, high = self.rails()
        ratio = math.inf
        if self.resistance is not None and self.diode_resistance is not None:
            ratio = self.resistance / self.diode_resistance
        rate = self._rate()
        if rate is None:
            return Clipping(range(1), 1.0, low, high, 1.0 / (1.0 + ratio), NAMES)
        return DiodeClamp(range(1), rate, ratio, low, high)

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return the thermal noise of R while no diode conducts."""
        if self.resistance is None:
            return ()
        (block,) = self.blocks()
        density = thermal_density(self.resistance, temperature)
        return (NoiseInput("thermal noise of R", density, 0.0, 0, block.b, block.d),)

    def _rate(self) -> float | None:
        if self.resistance is None or self.capacitance is None:
            return None
        return 1.0 / (self.resistance * self.capacitance)
