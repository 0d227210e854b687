"""Bridge of strain gauges or piezoresistors."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.analog.block import Block, gain_block
from frontend_sim.analog.noise import NoiseInput, at_output, thermal_density
from frontend_sim.analog.stages.base import Stage
from frontend_sim.quantities import (
    Level,
    NotNegativeResistance,
    PartRatio,
    PartVoltage,
    Ratio,
    SignalSpan,
    Time,
)


class ResistiveBridge(Stage):
    """A resistive bridge: pressure, force, strain or acceleration q to a difference of voltages

        v = excitation · (sensitivity · q / full_scale + zero_balance).

    The unit of ``full_scale`` is that of the stimulus. Source: data sheets of load cells and
    pressure bridges give just these values; common practice.
    """

    kind: Literal["resistive-bridge"] = "resistive-bridge"
    sensitivity: PartRatio = Field(
        description="output at full scale over excitation",
        json_schema_extra={"examples": ["2 mV/V"]},
    )
    full_scale: SignalSpan = Field(
        description="quantity that gives full output, with its unit",
        json_schema_extra={"examples": ["10 bar", "500 N"]},
    )
    excitation: PartVoltage = Field(description="voltage across the bridge")
    zero_balance: Ratio = Field(
        default=0.0,
        description="output without a load over excitation",
        json_schema_extra={"examples": ["0.05 mV/V"]},
    )
    resistance: NotNegativeResistance = Field(
        default=0.0, description="resistance between the two outputs, for its thermal noise"
    )
    ratiometric: bool = Field(
        default=False,
        description="true where the converter takes its reference from the excitation, so that "
        "both spread together; environment.supply then moves the excitation, and a nominal run "
        "without one is the same",
    )
    excitation_time_constant: Time = Field(
        default=0.0,
        description="R times C of the filter between environment.supply and the bridge; 0, or left "
        "out, there is none",
    )

    def units(self) -> tuple[str, str]:
        """Return the unit of ``full_scale`` in, volts out."""
        unit = self.full_scale.unit if isinstance(self.full_scale, Level) else None
        return (unit or "", "V")

    def blocks(self) -> tuple[Block, ...]:
        """Return the gain, in volts per unit of the quantity."""
        return (gain_block(self.excitation * self.sensitivity / self.full_scale),)

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return the thermal noise of the bridge."""
        if self.resistance == 0.0:
            return ()
        density = thermal_density(self.resistance, temperature)
        return (at_output("thermal noise of the bridge", density),)

    def resistance_at_rest(self) -> float:
        """Return the resistance between the two outputs [ohm]."""
        return self.resistance

    def offset(self, temperature: float) -> float:
        """Return the output without a load [V]."""
        return self.excitation * self.zero_balance
