"""First-order RC high pass, buffered."""

from __future__ import annotations

from typing import ClassVar, Literal

from pydantic import Field

from frontend_sim.analog.block import Block, first_order
from frontend_sim.analog.network import GROUND, SIGNAL, Capacitor, Circuit, Held, Resistor
from frontend_sim.analog.noise import NoiseInput, thermal_density
from frontend_sim.analog.stages.base import Stage
from frontend_sim.quantities import Capacitance, Resistance


class RcHighpass(Stage):
    """First-order RC high pass

        H(s) = s R C / (1 + s R C).

    Source: impedance divider 1/(s C) against R; common practice.
    """

    passive: ClassVar[bool] = True
    kind: Literal["rc-highpass"] = "rc-highpass"
    resistance: Resistance = Field(description="resistance R to ground")
    capacitance: Capacitance = Field(description="series capacitance C")

    def blocks(self) -> tuple[Block, ...]:
        """Return one block with the pole -1/(R C) and a zero at the origin."""
        rate = 1.0 / (self.resistance * self.capacitance)
        return (first_order(-rate, (1.0, 0.0)),)

    def resistance_at_rest(self) -> float:
        """Return R, the only way to ground at rest [ohm]."""
        return self.resistance

    def output_circuit(self) -> Circuit:
        """Return both parts."""
        return Circuit(
            (
                Held("source", SIGNAL),
                Capacitor("source", "output", self.capacitance),
                Resistor("R", "output", GROUND, self.resistance),
            ),
            "output",
        )

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return the thermal noise of the resistor, which the pole filters."""
        (block,) = self.blocks()
        density = thermal_density(self.resistance, temperature)
        return (NoiseInput("thermal noise of R", density, 0.0, 0, -block.b, 0.0),)
