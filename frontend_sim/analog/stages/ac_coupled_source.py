"""A source behind a coupling capacitor."""

from __future__ import annotations

from typing import Literal

import numpy as np
from pydantic import Field

from frontend_sim.analog.block import Block, first_order
from frontend_sim.analog.noise import NoiseInput, at_input, thermal_density
from frontend_sim.analog.stages.base import Stage
from frontend_sim.quantities import Capacitance, NotNegativeResistance, Resistance


class AcCoupledSource(Stage):
    """A source with a resistance R_s, coupled by a capacitor C into a load R_l

        H(s) = s C R_l / (1 + s C (R_s + R_l)).

    Source: impedance divider; common practice.
    """

    kind: Literal["ac-coupled-source"] = "ac-coupled-source"
    source_resistance: NotNegativeResistance = Field(
        default=0.0, description="resistance R_s of the source"
    )
    capacitance: Capacitance = Field(description="coupling capacitance C")
    load_resistance: Resistance = Field(description="resistance R_l from the output to ground")

    def _total(self) -> float:
        return self.source_resistance + self.load_resistance

    def blocks(self) -> tuple[Block, ...]:
        """Return one block with the pole -1/(C (R_s + R_l)) and a zero at the origin."""
        rate = 1.0 / (self.capacitance * self._total())
        return (first_order(-rate, (self.load_resistance / self._total(), 0.0)),)

    def resistance_at_rest(self) -> float:
        """Return R_l: the capacitor keeps the source away at rest [ohm]."""
        return self.load_resistance

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return the thermal noise of both resistors.

        The source's passes like the signal. The load's reaches the output by
        (1 + s C R_s) / (1 + s C (R_s + R_l)).
        """
        (block,) = self.blocks()
        load = NoiseInput(
            "thermal noise of load_resistance",
            thermal_density(self.load_resistance, temperature),
            0.0,
            0,
            -np.asarray(block.b),
            self.source_resistance / self._total(),
        )
        if self.source_resistance == 0.0:
            return (load,)
        density = thermal_density(self.source_resistance, temperature)
        return (at_input("thermal noise of source_resistance", density, [block]), load)
