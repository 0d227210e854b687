"""Twin-T notch."""

from __future__ import annotations

import math
from typing import Annotated, Literal

import numpy as np
from pydantic import Field

from frontend_sim.analog.network import GROUND, SIGNAL, Capacitor, Circuit, Held, Part, Resistor
from frontend_sim.analog.stages.active_filter import (
    ActiveFilter,
    corner_of,
    nearest_pair,
    quality_factor_of,
)
from frontend_sim.analog.stages.operational_amplifier import OUTPUT
from frontend_sim.quantities import Capacitance, Fraction, Resistance


class TwinTNotch(ActiveFilter):
    """Twin-T notch behind a buffer, its foot at ground or driven with a share k of the output.

    One T has resistance_1 and resistance_2 in series and shunt_capacitance from their middle to
    the foot; the other capacitance_1 and capacitance_2 in series and shunt_resistance. With R, R,
    R/2 and C, C, 2C and ideal amplifiers

        H = (s² + w0²) / (s² + s w0/Q + w0²),    w0 = 1 / (R C),    Q = 1 / (4 (1 - k)).

    Parts that do not match fill the notch up and shift it. A second amplifier of the same data
    drives the foot with k times the output; the divider before it is ideal and without noise.
    Source: common practice; equations by nodal analysis.
    """

    kind: Literal["twin-t-notch"] = "twin-t-notch"
    resistance_1: Resistance = Field(description="from the source to the middle of the first T")
    resistance_2: Resistance = Field(description="from there to the buffer")
    shunt_resistance: Resistance = Field(
        description="from the middle of the second T to the foot, ideally half of resistance_1"
    )
    capacitance_1: Capacitance = Field(description="from the source to the middle of the second T")
    capacitance_2: Capacitance = Field(description="from there to the buffer")
    shunt_capacitance: Capacitance = Field(
        description="from the middle of the first T to the foot, ideally twice capacitance_1"
    )
    feedback: Annotated[Fraction, Field(ge=0.0, lt=1.0)] = Field(
        default=0.0, description="share k of the output that drives the foot, below 1; 0: ground"
    )

    def check(self) -> None:
        """Raise ValueError if the foot's amplifier would stand at a rail, see ``NetworkStage``."""
        super().check()
        within = self.limits()
        if self.feedback > 0.0 and not within.low <= 0.0 <= within.high:
            raise ValueError(
                f"output_low {within.low:g} V and output_high {within.high:g} V leave 0 V out: the "
                "amplifier of the foot gives a share of the output and would stand at its own "
                "rail; give rails on both sides of 0 V, or take feedback out"
            )

    def noise_gain(self) -> float:
        """Return one, the gain of the buffers."""
        return 1.0

    @property
    def nominal_corner(self) -> float:
        """Frequency of the notch with ideal amplifiers [Hz]."""
        r = math.sqrt(self.resistance_1 * self.resistance_2)
        c = math.sqrt(self.capacitance_1 * self.capacitance_2)
        return self._notch_of(self.with_ideal_amplifier(), 1.0 / (2.0 * math.pi * r * c))

    @property
    def nominal_quality_factor(self) -> float:
        """Quality factor with ideal amplifiers [1]."""
        poles = self.with_ideal_amplifier().solution().block.poles.tolist()
        return quality_factor_of(*nearest_pair(poles, self.nominal_corner))

    @property
    def notch_frequency(self) -> float:
        """Frequency of the notch with the amplifiers as they are [Hz]."""
        return self._notch_of(self, self.nominal_corner)

    @property
    def notch_gain(self) -> float:
        """What is left of the signal at the notch, |H| there [1]."""
        s = np.array(2j * math.pi * self.notch_frequency)
        return float(abs(self.solution().block.response(s)))

    def _notch_of(self, stage: TwinTNotch, near: float) -> float:
        return corner_of(*nearest_pair(stage.solution().block.zeros.tolist(), near))

    def circuit(self) -> Circuit:
        """Return the two Ts, the buffer and what drives the foot."""
        foot = GROUND if self.feedback == 0.0 else "foot"
        parts: list[Part] = [
            Held("source", SIGNAL),
            Resistor("resistance_1", "source", "first middle", self.resistance_1),
            Resistor("resistance_2", "first middle", "plus", self.resistance_2),
            Capacitor("first middle", foot, self.shunt_capacitance),
            Capacitor("source", "second middle", self.capacitance_1),
            Capacitor("second middle", "plus", self.capacitance_2),
            Resistor("shunt_resistance", "second middle", foot, self.shunt_resistance),
            *self.amplifier([("plus", 1.0), (OUTPUT, -1.0)], ("plus", OUTPUT)),
            *self.load(),
        ]
        if self.feedback > 0.0:
            parts += self.amplifier(
                [(OUTPUT, self.feedback), (foot, -1.0)], (None, foot), foot, "the foot's amplifier"
            )
        return Circuit(tuple(parts), OUTPUT)
