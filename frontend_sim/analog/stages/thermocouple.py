"""Thermocouple with its cold junction."""

from __future__ import annotations

from typing import Literal

import numpy as np
from pydantic import Field

from frontend_sim.analog.block import Real
from frontend_sim.analog.noise import NoiseInput, at_output, thermal_density
from frontend_sim.analog.sensors.thermocouple import Letter, limits, seebeck, thermovoltage
from frontend_sim.analog.stages.temperature_sensor import TemperatureSensor
from frontend_sim.quantities import (
    REFERENCE_TEMPERATURE,
    NotNegativeResistance,
    Temperature,
)


class Thermocouple(TemperatureSensor):
    """Thermocouple of a letter-designated type, v = E(T) - E(T_cold).

    E is the reference function of the type on ITS-90, against a junction at 0 degC. The cold
    junction is where the wires meet copper. Source: G. W. Burns et al. 1993, NIST Monograph 175;
    IEC 60584-1.
    """

    kind: Literal["thermocouple"] = "thermocouple"
    type: Letter = Field(description="letter of the type")
    cold_junction: Temperature = Field(
        default=REFERENCE_TEMPERATURE, description="temperature T_cold of the cold junction"
    )
    resistance: NotNegativeResistance = Field(
        default=0.0, description="resistance of the wires, for its thermal noise"
    )

    def check(self) -> None:
        """Refuse a cold junction beyond the range of the type."""
        if np.isnan(self._cold()):
            raise ValueError(
                f"cold_junction {self.shown(self.cold_junction)} is beyond {self.span()}"
            )

    def _cold(self) -> float:
        return float(thermovoltage(self.type, np.array(self.cold_junction)))

    def curve(self, signal: Real) -> Real:
        """Return the voltage at temperatures [K]."""
        return thermovoltage(self.type, signal) - self._cold()

    def derivative(self, signal: Real) -> Real:
        """Return the Seebeck coefficient at temperatures [K], in V/K."""
        return seebeck(self.type, signal)

    def resistance_at_rest(self) -> float:
        """Return the resistance of the wires [ohm]."""
        return self.resistance

    def ends(self) -> tuple[float, float]:
        """Return the range of the type [K]."""
        return limits(self.type)

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return the thermal noise of the wires."""
        if self.resistance == 0.0:
            return ()
        density = thermal_density(self.resistance, temperature)
        return (at_output("thermal noise of the wires", density),)
