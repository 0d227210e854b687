"""What a sampling converter is at its pin: a capacitor behind a switch."""

from __future__ import annotations

from typing import Literal, Self

from pydantic import Field, StrictBool, model_validator

from frontend_sim.quantities import (
    Capacitance,
    NotNegativeCapacitance,
    NotNegativeResistance,
    PositiveTime,
    Resistance,
    Share,
    Voltage,
)
from frontend_sim.values import Value

Holds = Literal["previous", "zero", "mid-scale", "voltage"]


class InputNetwork(Value):
    """The pin, a switch and the sampling capacitor that is converted,

        source - source_resistance - pin (pin_capacitance) - switch_resistance - C_s

    The switch closes ``acquisition_time`` before each sampling instant and opens at it; what C_s
    holds then is converted. When it closes, C_s has s0 = h + precharge_share · (pin - h), where h
    is what ``holds`` says. Source: charge sharing and Kirchhoff's laws; common practice.
    """

    source_resistance: NotNegativeResistance = Field(
        default=0.0, description="resistance between the last stage and the pin"
    )
    pin_capacitance: NotNegativeCapacitance = Field(
        default=0.0, description="capacitance from the pin to ground, a capacitor outside included"
    )
    switch_resistance: Resistance = Field(description="resistance of the closed switch")
    sampling_capacitance: Capacitance = Field(description="the capacitor C_s that is converted")
    acquisition_time: PositiveTime = Field(
        description="how long the switch is closed before each sampling instant"
    )
    holds: Holds = Field(
        default="previous",
        description="what C_s has before the switch closes: the voltage of the conversion before, "
        "zero, the middle of the range, or held_voltage",
    )
    held_voltage: Voltage | None = Field(
        default=None, description='voltage that C_s has, for holds = "voltage"'
    )
    precharge_share: Share = Field(
        default=0.0,
        description="share of the way to the pin's voltage that a buffer takes C_s before the "
        "switch closes; 0: there is none",
    )
    noise: StrictBool = Field(
        default=True,
        description="whether conversions carry the thermal noise k T / C_s of switch and source "
        "(where simulation.noise is on)",
    )

    @model_validator(mode="after")
    def _voltage_where_it_is_held(self) -> Self:
        if self.holds == "voltage" and self.held_voltage is None:
            raise ValueError('holds = "voltage" needs held_voltage, for instance "0.5 V"')
        if self.holds != "voltage" and self.held_voltage is not None:
            raise ValueError(
                f'held_voltage has a meaning for holds = "voltage" only, not for "{self.holds}"'
            )
        return self

    def starts(self, low: float, high: float) -> tuple[float, float, float]:
        """Return (m, c, p): before it is connected C_s has m · previous + c + p · pin.

        Parameters
        ----------
        low, high : range of the converter [V]
        """
        left = 1.0 - self.precharge_share
        if self.holds == "previous":
            return left, 0.0, self.precharge_share
        levels = {"zero": 0.0, "mid-scale": 0.5 * (low + high), "voltage": self.held_voltage}
        return 0.0, left * float(levels[self.holds] or 0.0), self.precharge_share

    def furthest(self, low: float, high: float) -> float:
        """Return the largest distance that C_s may have to go, for inputs within the range [V]."""
        memory, constant, share = self.starts(low, high)
        left = 1.0 - share
        if memory > 0.0 or left == 0.0:
            return left * (high - low)
        level = constant / left
        return left * max(abs(high - level), abs(level - low))
