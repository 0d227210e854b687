"""First-order RC low pass, buffered."""

from __future__ import annotations

from typing import ClassVar, Literal

from pydantic import Field

from frontend_sim.analog.block import Block, first_order
from frontend_sim.analog.network import GROUND, SIGNAL, Capacitor, Circuit, Held, Resistor
from frontend_sim.analog.noise import NoiseInput, thermal_density
from frontend_sim.analog.stages.base import Stage
from frontend_sim.quantities import Capacitance, Resistance


class RcLowpass(Stage):
    """First-order RC low pass

        H(s) = 1 / (1 + s R C).

    Source: impedance divider R against 1/(s C); common practice.
    """

    passive: ClassVar[bool] = True
    kind: Literal["rc-lowpass"] = "rc-lowpass"
    resistance: Resistance = Field(description="series resistance R")
    capacitance: Capacitance = Field(description="capacitance C to ground")

    def blocks(self) -> tuple[Block, ...]:
        """Return one block with the pole -1/(R C)."""
        rate = 1.0 / (self.resistance * self.capacitance)
        return (first_order(-rate, (0.0, rate)),)

    def resistance_at_rest(self) -> float:
        """Return R: at rest the source stands behind it [ohm]."""
        return self.resistance

    def output_circuit(self) -> Circuit:
        """Return both parts."""
        return Circuit(
            (
                Held("source", SIGNAL),
                Resistor("R", "source", "output", self.resistance),
                Capacitor("output", GROUND, self.capacitance),
            ),
            "output",
        )

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return the thermal noise of the resistor, which the pole filters."""
        (block,) = self.blocks()
        density = thermal_density(self.resistance, temperature)
        return (NoiseInput("thermal noise of R", density, 0.0, 0, block.b, 0.0),)
