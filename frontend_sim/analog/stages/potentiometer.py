"""Potentiometer as a sensor of position."""

from __future__ import annotations

from typing import Literal

import numpy as np
from pydantic import Field

from frontend_sim.analog.block import Block, Real, first_order
from frontend_sim.analog.limits import Limiter
from frontend_sim.analog.limits.variable_pole import VariablePole
from frontend_sim.analog.noise import NoiseInput, at_output, thermal_density
from frontend_sim.analog.stages.curved_sensor import CurvedSensor
from frontend_sim.quantities import (
    REFERENCE_TEMPERATURE,
    Capacitance,
    NotNegativeResistance,
    PartVoltage,
    Position,
    Resistance,
)


class Potentiometer(CurvedSensor):
    """Potentiometer at a position p from 0 to 1, with wiper resistance R_w, load R_l and C

        R_s(p) = R p (1 - p) + R_w,    v = E p R_l / (R_l + R_s)              at rest,
        C dv/dt = (E p - v) / R_s - v / R_l                                   with a capacitance.

    Load and capacitance see a source whose resistance depends on the position: the load bends the
    characteristic, and the capacitance settles slowest in the middle. Source: Thevenin's
    equivalent of the divider; common practice.
    """

    stops = True
    margin = 0.25

    kind: Literal["potentiometer"] = "potentiometer"
    resistance: Resistance = Field(description="resistance R from end to end")
    excitation_voltage: PartVoltage = Field(description="voltage E from end to end")
    wiper_resistance: NotNegativeResistance = Field(
        default=0.0, description="resistance R_w of the wiper's contact"
    )
    load_resistance: Resistance | None = Field(
        default=None, description="load R_l from the wiper to ground; left out, there is none"
    )
    load_capacitance: Capacitance | None = Field(
        default=None,
        description="capacitance C from the wiper to ground; it needs wiper_resistance",
    )
    operating_position: Position = Field(
        default=0.5, description="position at which inspect and noise take the tangent"
    )

    def units(self) -> tuple[str, str]:
        """Return position in, volts out."""
        return ("", "V")

    def check(self) -> None:
        """Refuse a capacitor on a source without resistance."""
        if self.load_capacitance is not None and self.wiper_resistance == 0.0:
            raise ValueError(
                "load_capacitance needs wiper_resistance: at both ends the capacitor would stand "
                "on a source without resistance"
            )

    def source_resistance(self, position: Real) -> Real:
        """Return R_s at positions [ohm]."""
        return self.resistance * position * (1.0 - position) + self.wiper_resistance

    def resistance_at_rest(self) -> float:
        """Return R_s with the load beside it, at the operating position [ohm]."""
        source = float(self.source_resistance(np.array(self.operating_position)))
        return source / (1.0 + source * self._load())

    def curve(self, signal: Real) -> Real:
        """Return the voltage at rest at positions [V]."""
        loaded = 1.0 + self.source_resistance(signal) * self._load()
        return self.excitation_voltage * signal / loaded

    def derivative(self, signal: Real) -> Real:
        """Return dv/dp at rest at positions [V]."""
        loaded = 1.0 + self.source_resistance(signal) * self._load()
        bend = signal * self.resistance * (1.0 - 2.0 * signal) * self._load() / loaded
        return self.excitation_voltage / loaded * (1.0 - bend)

    def rate(self, signal: Real) -> Real:
        """Return the inverse time constant with the capacitance at positions [1/s]."""
        assert self.load_capacitance is not None
        conductance = 1.0 / self.source_resistance(self.inside(signal)) + self._load()
        return conductance / self.load_capacitance

    def ends(self) -> tuple[float, float]:
        """Return the stops of the wiper."""
        return 0.0, 1.0

    def operating_point(self) -> float:
        """Return the operating position."""
        return self.operating_position

    def shown(self, signal: float) -> str:
        """Return a position."""
        return f"a position of {signal:g}"

    def span(self) -> str:
        """Return the range of the wiper."""
        return "its stops at 0 and 1"

    def blocks(self) -> tuple[Block, ...]:
        """Return the tangent, with the pole of the capacitance at the operating position."""
        if self.load_capacitance is None:
            return super().blocks()
        rate = float(self.rate(np.array(self.operating_position)))
        return (first_order(-rate, (0.0, self.slope() * rate)),)

    def limiter(self, temperature: float = REFERENCE_TEMPERATURE) -> Limiter:
        """Return the curve, and the pole that moves with the position."""
        if self.load_capacitance is None:
            return super().limiter(temperature)
        return VariablePole(range(1), self.rate, self.output, *self.ends())

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return the thermal noise of track, wiper and load at the operating position."""
        density = thermal_density(self.resistance_at_rest(), temperature)
        (block,) = self.blocks()
        name = "thermal noise of the potentiometer and its load"
        if block.order == 0:
            return (at_output(name, density),)
        column = np.array([-block.a[0, 0] / block.c[0]])
        return (NoiseInput(name, density, 0.0, 0, column, 0.0),)

    def _load(self) -> float:
        return 0.0 if self.load_resistance is None else 1.0 / self.load_resistance
