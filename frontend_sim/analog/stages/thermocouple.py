"""Thermocouple with its cold junction."""

from __future__ import annotations

from typing import Literal

import numpy as np
from pydantic import Field

from frontend_sim.analog.block import Real
from frontend_sim.analog.noise import NoiseInput, thermal_density
from frontend_sim.analog.sensors.thermocouple import Letter, limits, seebeck, thermovoltage
from frontend_sim.analog.stages.curved_sensor import CurvedSensor
from frontend_sim.quantities import (
    REFERENCE_TEMPERATURE,
    TEMPERATURE,
    NotNegativeResistance,
    Temperature,
    as_text,
)


class Thermocouple(CurvedSensor):
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
    operating_temperature: Temperature = Field(
        default=REFERENCE_TEMPERATURE,
        description="temperature at which inspect takes the curve's tangent",
    )

    def units(self) -> tuple[str, str]:
        """Return temperature in, volts out."""
        return ("K", "V")

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

    def ends(self) -> tuple[float, float]:
        """Return the range of the type [K]."""
        return limits(self.type)

    def operating_point(self) -> float:
        """Return the operating temperature [K]."""
        return self.operating_temperature

    def shown(self, signal: float) -> str:
        """Return a temperature in degrees."""
        return as_text(signal, TEMPERATURE, 6)

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return the thermal noise of the wires."""
        if self.resistance == 0.0:
            return ()
        density = thermal_density(self.resistance, temperature)
        return (NoiseInput("thermal noise of the wires", density, 0.0, 0, np.empty(0), 1.0),)
