"""Platinum resistance thermometer."""

from __future__ import annotations

from typing import Literal

import numpy as np
from pydantic import Field

from frontend_sim.analog.block import Real
from frontend_sim.analog.noise import NoiseInput, at_output, thermal_density
from frontend_sim.analog.sensors.platinum import HIGHEST, LOWEST, ratio_slope, resistance_ratio
from frontend_sim.analog.stages.temperature_sensor import TemperatureSensor
from frontend_sim.quantities import (
    NotNegativeResistance,
    PartCurrent,
    PartVoltage,
    Resistance,
)

Wiring = Literal["two-wire", "three-wire", "four-wire"]


class Rtd(TemperatureSensor):
    """Platinum resistance thermometer, R(t) = R0 (1 + A t + B t² + C (t - 100 degC) t³), t in degC

        v = I (R + R_e)                                  fed by a current I,
        v = E (R + R_e) / (R_s + R + R_w)                fed from E by a series resistor R_s.

    C counts below 0 degC only. Leads of R_lead each leave R_e = 2 R_lead with two wires; with three
    wires the circuit subtracts one lead from the other, and their mismatch is left; with four
    wires nothing is. R_w is what the wires that carry the current add. R0 = 100 ohm is a Pt100.
    Source: IEC 60751, from memory; self-heating is left out.
    """

    kind: Literal["rtd"] = "rtd"
    nominal_resistance: Resistance = Field(
        default=100.0, description="resistance R0 at 0 degC: 100 ohm for a Pt100"
    )
    wiring: Wiring = Field(default="four-wire", description="how the leads are brought in")
    lead_resistance: NotNegativeResistance = Field(
        default=0.0, description="resistance of each lead"
    )
    lead_mismatch: NotNegativeResistance = Field(
        default=0.0, description="by how much the two leads of three-wire differ"
    )
    excitation_current: PartCurrent | None = Field(
        default=None, description="current I through the thermometer; or give a divider"
    )
    excitation_voltage: PartVoltage | None = Field(
        default=None, description="voltage E across thermometer and series_resistance"
    )
    series_resistance: Resistance | None = Field(
        default=None, description="resistor R_s from excitation_voltage to the thermometer"
    )

    def check(self) -> None:
        """Refuse keys that leave the circuit open or mean nothing."""
        divider = (self.excitation_voltage is not None, self.series_resistance is not None)
        if (self.excitation_current is not None) == any(divider) or any(divider) != all(divider):
            raise ValueError(
                "give either excitation_current, or excitation_voltage and series_resistance "
                "together"
            )
        if self.lead_mismatch > 0.0 and self.wiring != "three-wire":
            raise ValueError(
                'lead_mismatch has a meaning for wiring = "three-wire" only, not for '
                f'"{self.wiring}"'
            )

    def resistance(self, temperature: Real) -> Real:
        """Return the resistance of the thermometer alone [ohm] at temperatures [K]."""
        return self.nominal_resistance * resistance_ratio(temperature)

    def curve(self, signal: Real) -> Real:
        """Return the voltage at temperatures [K]."""
        seen = self.resistance(signal) + self._error()
        if self.excitation_current is not None:
            return self.excitation_current * seen
        voltage, series = self._divider()
        return voltage * seen / (seen + series)

    def derivative(self, signal: Real) -> Real:
        """Return dv/dT at temperatures [K]."""
        by_kelvin = self.nominal_resistance * ratio_slope(signal)
        if self.excitation_current is not None:
            return self.excitation_current * by_kelvin
        voltage, series = self._divider()
        seen = self.resistance(signal) + self._error()
        return voltage * series / (seen + series) ** 2 * by_kelvin

    def resistance_at_rest(self) -> float:
        """Return the resistance between the measuring leads, at the operating temperature [ohm].

        A source of current adds nothing to it; the resistor of a divider stands beside it.
        """
        seen = float(self.resistance(np.array(self.operating_temperature))) + self._error()
        if self.excitation_current is not None:
            return seen
        _, series = self._divider()
        return seen * series / (seen + series)

    def ends(self) -> tuple[float, float]:
        """Return the range of the standard [K]."""
        return LOWEST, HIGHEST

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return the thermal noise of the thermometer, and of the resistor in series with it."""
        own = float(self.resistance(np.array(self.operating_temperature)))
        density = thermal_density(own, self.operating_temperature)
        if self.excitation_current is not None:
            return (at_output("thermal noise of the thermometer", density),)
        _, series = self._divider()
        assert self.series_resistance is not None
        share = series / (own + self._error() + series)
        other = thermal_density(self.series_resistance, temperature)
        return (
            at_output("thermal noise of the thermometer", density, share),
            at_output("thermal noise of series_resistance", other, 1.0 - share),
        )

    def _error(self) -> float:
        """Return what the wiring leaves of the leads in the measured voltage [ohm]."""
        if self.wiring == "two-wire":
            return 2.0 * self.lead_resistance
        return self.lead_mismatch if self.wiring == "three-wire" else 0.0

    def _divider(self) -> tuple[float, float]:
        """Return the excitation, and the resistance of the loop outside of what is measured."""
        assert self.excitation_voltage is not None
        assert self.series_resistance is not None
        wires = 2.0 * self.lead_resistance if self.wiring != "two-wire" else 0.0
        return self.excitation_voltage, self.series_resistance + wires
