"""Thermistor in a divider."""

from __future__ import annotations

from typing import Annotated, Literal

import numpy as np
from pydantic import Field

from frontend_sim.analog.block import Real
from frontend_sim.analog.noise import NoiseInput, at_output, thermal_density
from frontend_sim.analog.sensors.thermistor import (
    beta_slope,
    by_beta,
    by_steinhart_hart,
    steinhart_hart_slope,
)
from frontend_sim.analog.stages.temperature_sensor import TemperatureSensor
from frontend_sim.quantities import (
    REFERENCE_TEMPERATURE,
    Beta,
    PartVoltage,
    Resistance,
    Temperature,
)

LOWEST, HIGHEST = 50.0, 1000.0
"""Range of the models, wider than that of any part [K]."""

Coefficient = Annotated[float, Field(strict=True)]


class Thermistor(TemperatureSensor):
    """Thermistor R(T) with a resistor R_s across an excitation E

        v = E R / (R_s + R)    with the thermistor to ground,    v = E R_s / (R_s + R)    from E.

    R = R0 exp(B (1/T - 1/T0)), or by Steinhart and Hart 1/T = a + b ln R + c (ln R)³, R in ohm and
    T in K. Source: J. S. Steinhart and S. R. Hart 1968, "Calibration curves for thermistors";
    self-heating is left out.
    """

    kind: Literal["thermistor"] = "thermistor"
    nominal_resistance: Resistance | None = Field(
        default=None, description="resistance R0 at nominal_temperature; goes with beta"
    )
    beta: Beta | None = Field(default=None, description="beta value B")
    nominal_temperature: Temperature = Field(
        default=REFERENCE_TEMPERATURE, description="temperature T0 of nominal_resistance"
    )
    steinhart_hart: tuple[Coefficient, Coefficient, Coefficient] | None = Field(
        default=None,
        description="coefficients a, b, c, instead of nominal_resistance and beta",
        json_schema_extra={"unit": "1/K", "examples": [[1.129e-3, 2.341e-4, 8.767e-8]]},
    )
    excitation_voltage: PartVoltage = Field(description="voltage E across both resistors")
    series_resistance: Resistance = Field(description="the other resistor R_s")
    place: Literal["to-ground", "to-excitation"] = Field(
        default="to-ground", description="where the thermistor stands, seen from the output"
    )

    def check(self) -> None:
        """Refuse keys that give no curve, or two, or one that does not fall."""
        by_two = (self.nominal_resistance is not None, self.beta is not None)
        if (self.steinhart_hart is not None) == any(by_two) or any(by_two) != all(by_two):
            raise ValueError("give either nominal_resistance and beta together, or steinhart_hart")
        if self.nominal_temperature == 0.0:
            raise ValueError("nominal_temperature must be above 0 K, absolute zero")
        if self.steinhart_hart is not None:
            _, b, c = self.steinhart_hart
            if not (b > 0.0 and c >= 0.0):
                raise ValueError(
                    f"of the coefficients in steinhart_hart, a, b, c, the second must be above 0 "
                    f"and the third at least 0; given {b:g} and {c:g}"
                )

    def resistance(self, temperature: Real) -> Real:
        """Return the resistance of the thermistor [ohm] at temperatures above 0 [K]."""
        with np.errstate(over="ignore"):  # an infinite resistance at the cold end is right
            if self.steinhart_hart is not None:
                return by_steinhart_hart(*self.steinhart_hart, temperature)
            assert self.nominal_resistance is not None
            assert self.beta is not None
            nominal, beta = self.nominal_resistance, self.beta
            return by_beta(nominal, beta, self.nominal_temperature, temperature)

    def _share(self, temperature: Real) -> Real:
        """Return the thermistor's share of the divider, R / (R + R_s)."""
        return 1.0 / (1.0 + self.series_resistance / self.resistance(temperature))

    def curve(self, signal: Real) -> Real:
        """Return the voltage at temperatures [K]."""
        share = self._share(signal)
        return self.excitation_voltage * (share if self.place == "to-ground" else 1.0 - share)

    def derivative(self, signal: Real) -> Real:
        """Return dv/dT at temperatures [K]."""
        if self.steinhart_hart is not None:
            relative = steinhart_hart_slope(*self.steinhart_hart, signal)
        else:
            assert self.beta is not None
            relative = beta_slope(self.beta, signal)
        share = self._share(signal)
        sign = 1.0 if self.place == "to-ground" else -1.0
        return sign * self.excitation_voltage * share * (1.0 - share) * relative

    def resistance_at_rest(self) -> float:
        """Return both resistors side by side, at the operating temperature [ohm]."""
        own = float(self.resistance(np.array(self.operating_temperature)))
        return 1.0 / (1.0 / own + 1.0 / self.series_resistance)

    def ends(self) -> tuple[float, float]:
        """Return the range in which the models mean anything [K]."""
        return LOWEST, HIGHEST

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return the thermal noise of both resistors, which divide each other's."""
        at = np.array(self.operating_temperature)
        share = float(self._share(at))
        # Of a resistance without bound, infinite noise would meet a share of zero.
        resistance = float(self.resistance(at)) if share < 1.0 else 0.0
        own = thermal_density(resistance, self.operating_temperature)
        other = thermal_density(self.series_resistance, temperature)
        return (
            at_output("thermal noise of the thermistor", own, 1.0 - share),
            at_output("thermal noise of series_resistance", other, share),
        )
