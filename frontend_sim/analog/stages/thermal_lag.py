"""Thermal lag of a sensor."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.analog.block import Block, first_order
from frontend_sim.analog.stages.base import Stage
from frontend_sim.quantities import PartTime


class ThermalLag(Stage):
    """A sensor that follows the temperature around it with a lag of first order

        H(s) = 1 / (1 + s tau).

    tau is heat capacity times thermal resistance. Temperature goes in and comes out: a thermometer
    follows. Source: lumped heat balance, common practice.
    """

    kind: Literal["thermal-lag"] = "thermal-lag"
    time_constant: PartTime = Field(description="time constant tau, to 63 % of a step")

    def units(self) -> tuple[str, str]:
        """Return that a temperature goes in and comes out."""
        return ("K", "K")

    def blocks(self) -> tuple[Block, ...]:
        """Return one block with the pole -1/tau."""
        rate = 1.0 / self.time_constant
        return (first_order(-rate, (0.0, rate)),)
