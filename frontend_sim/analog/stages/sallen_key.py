"""Sallen-Key section."""

from __future__ import annotations

import math
from typing import Literal

from pydantic import Field

from frontend_sim.analog.network import GROUND, SIGNAL, Capacitor, Circuit, Held, Part, Resistor
from frontend_sim.analog.stages.active_filter import ActiveFilter
from frontend_sim.analog.stages.operational_amplifier import OUTPUT
from frontend_sim.quantities import Capacitance, Resistance


class SallenKey(ActiveFilter):
    """Sallen-Key section around an amplifier of gain K = 1 + R_feedback / R_ground, or 1.

    Low pass: resistance_1 from the source to a node, capacitance_1 from the node to the output,
    resistance_2 from the node to the noninverting input, capacitance_2 from there to ground. High
    pass: the same with resistances and capacitances exchanged. With an ideal amplifier

        w0 = 1 / sqrt(R1 R2 C1 C2)
        low pass   K w0² / (s² + s w0/Q + w0²),   1/Q = w0 (C2 (R1 + R2) + R1 C1 (1 - K))
        high pass  K s² / (s² + s w0/Q + w0²),    1/Q = w0 (R1 (C1 + C2) + R2 C2 (1 - K))

    With an output resistance the low pass lets high frequencies through again, past resistance_1,
    capacitance_1 and the output resistance. Source: R. P. Sallen and E. L. Key 1955, "A practical
    method of designing RC active filters" (from memory); equations by nodal analysis.
    """

    kind: Literal["sallen-key"] = "sallen-key"
    response: Literal["low-pass", "high-pass"] = Field(
        default="low-pass", description="what the section passes"
    )
    resistance_1: Resistance = Field(
        description="R1: from the source to the middle node; high pass: from there to the output"
    )
    resistance_2: Resistance = Field(
        description="R2: from the middle node to the noninverting input; high pass: from there to "
        "ground"
    )
    capacitance_1: Capacitance = Field(
        description="C1: from the middle node to the output; high pass: from the source to it"
    )
    capacitance_2: Capacitance = Field(
        description="C2: from the noninverting input to ground; high pass: from the middle node "
        "to it"
    )
    feedback_resistance: Resistance | None = Field(
        default=None, description="resistor from the output to the inverting input; left out, K = 1"
    )
    ground_resistance: Resistance | None = Field(
        default=None, description="resistor from the inverting input to ground; left out, K = 1"
    )

    def check(self) -> None:
        """Raise ValueError if one of the two gain resistors is missing, see ``NetworkStage``."""
        if (self.feedback_resistance is None) != (self.ground_resistance is None):
            raise ValueError(
                "give feedback_resistance and ground_resistance together, or neither for a gain "
                "of one"
            )
        if not 0.0 < self.nominal_quality_factor < math.inf:
            raise ValueError(
                f"the gain K = {self.noise_gain():.4g} is too large for these parts: the section "
                f"oscillates from K = {self._largest_gain():.4g} on; take a smaller "
                "feedback_resistance"
            )
        super().check()

    def _largest_gain(self) -> float:
        """Return the K at which the damping vanishes [1]."""
        r1, r2 = self.resistance_1, self.resistance_2
        c1, c2 = self.capacitance_1, self.capacitance_2
        if self.response == "low-pass":
            return 1.0 + c2 * (r1 + r2) / (r1 * c1)
        return 1.0 + r1 * (c1 + c2) / (r2 * c2)

    def noise_gain(self) -> float:
        """Return K [1]."""
        if self.feedback_resistance is None or self.ground_resistance is None:
            return 1.0
        return 1.0 + self.feedback_resistance / self.ground_resistance

    @property
    def nominal_corner(self) -> float:
        """1 / (2 pi sqrt(R1 R2 C1 C2)) [Hz]."""
        return 1.0 / (2.0 * math.pi * self._time())

    @property
    def nominal_quality_factor(self) -> float:
        """Q of the equations above; infinite or below zero where K is too large [1]."""
        r1, r2, c1, c2 = (
            self.resistance_1,
            self.resistance_2,
            self.capacitance_1,
            self.capacitance_2,
        )
        excess = 1.0 - self.noise_gain()
        if self.response == "low-pass":
            damping = c2 * (r1 + r2) + r1 * c1 * excess
        else:
            damping = r1 * (c1 + c2) + r2 * c2 * excess
        return self._time() / damping if damping else math.inf

    def _time(self) -> float:
        return math.sqrt(self.resistance_1 * self.capacitance_1) * math.sqrt(
            self.resistance_2 * self.capacitance_2
        )

    def circuit(self) -> Circuit:
        """Return the section: source, middle node, noninverting input, output."""
        parts: list[Part] = [Held("source", SIGNAL)]
        if self.response == "low-pass":
            parts += [
                Resistor("resistance_1", "source", "middle", self.resistance_1),
                Resistor("resistance_2", "middle", "plus", self.resistance_2),
                Capacitor("middle", OUTPUT, self.capacitance_1),
                Capacitor("plus", GROUND, self.capacitance_2),
            ]
        else:
            parts += [
                Capacitor("source", "middle", self.capacitance_1),
                Capacitor("middle", "plus", self.capacitance_2),
                Resistor("resistance_1", "middle", OUTPUT, self.resistance_1),
                Resistor("resistance_2", "plus", GROUND, self.resistance_2),
            ]
        minus = OUTPUT
        if self.feedback_resistance is not None and self.ground_resistance is not None:
            minus = "minus"
            parts += [
                Resistor("feedback_resistance", OUTPUT, minus, self.feedback_resistance),
                Resistor("ground_resistance", minus, GROUND, self.ground_resistance),
            ]
        parts += self.amplifier([("plus", 1.0), (minus, -1.0)], ("plus", minus))
        return Circuit((*parts, *self.load()), OUTPUT)
