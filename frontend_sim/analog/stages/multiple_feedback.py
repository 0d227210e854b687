"""Multiple-feedback section."""

from __future__ import annotations

import math
from typing import Literal

from pydantic import Field

from frontend_sim.analog.network import GROUND, SIGNAL, Capacitor, Circuit, Held, Part, Resistor
from frontend_sim.analog.stages.active_filter import ActiveFilter
from frontend_sim.analog.stages.operational_amplifier import OUTPUT
from frontend_sim.quantities import Capacitance, Resistance


class MultipleFeedback(ActiveFilter):
    """Multiple-feedback section; its noninverting input lies at ground.

    Low pass, with R1 = input_resistance from the source to a middle node, R2 = feedback_resistance
    from the output to it, R3 = middle_resistance from it to the inverting input, C1 =
    ground_capacitance from it to ground, C2 = feedback_capacitance across the amplifier:

        H = -(R2/R1) w0² / (s² + s w0/Q + w0²),    w0 = 1 / sqrt(R2 R3 C1 C2),
        Q = w0 C1 / (1/R1 + 1/R2 + 1/R3).

    Band pass, with R1 = input_resistance, optional R2 = ground_resistance from the middle node to
    ground, R3 = feedback_resistance across the amplifier, C1 = feedback_capacitance from the output
    to the middle node, C2 = middle_capacitance from it to the inverting input:

        H = -s/(R1 C1) / (s² + s w0/Q + w0²),    w0 = 1 / sqrt(R R3 C1 C2),  1/R = 1/R1 + 1/R2,
        Q = w0 R3 C1 C2 / (C1 + C2).

    Equations for an ideal amplifier, by nodal analysis; common practice.
    """

    kind: Literal["multiple-feedback"] = "multiple-feedback"
    response: Literal["low-pass", "band-pass"] = Field(
        default="low-pass", description="what the section passes"
    )
    input_resistance: Resistance = Field(description="R1, from the source to the middle node")
    feedback_resistance: Resistance = Field(
        description="R2, from the output to the middle node; band pass: R3, to the inverting input"
    )
    feedback_capacitance: Capacitance = Field(
        description="C2, from the output to the inverting input; band pass: C1, to the middle node"
    )
    middle_resistance: Resistance | None = Field(
        default=None, description="low pass: R3, from the middle node to the inverting input"
    )
    ground_capacitance: Capacitance | None = Field(
        default=None, description="low pass: C1, from the middle node to ground"
    )
    middle_capacitance: Capacitance | None = Field(
        default=None, description="band pass: C2, from the middle node to the inverting input"
    )
    ground_resistance: Resistance | None = Field(
        default=None, description="band pass: R2, from the middle node to ground; optional"
    )

    def check(self) -> None:
        """Raise ValueError if the parts are not those of the response, see ``NetworkStage``."""
        low = {"middle_resistance": True, "ground_capacitance": True}
        band = {"middle_capacitance": True, "ground_resistance": False}
        own, other = (low, band) if self.response == "low-pass" else (band, low)
        for key, needed in own.items():
            if needed and getattr(self, key) is None:
                raise ValueError(f"{key} is missing; a {self.response} response needs it")
        for key in other:
            if getattr(self, key) is not None:
                raise ValueError(f"a {self.response} response has no {key}; take it out")
        super().check()

    def noise_gain(self) -> float:
        """Return the largest gain from the noninverting input that the section asks for [1].

        Of a low pass at low frequency, 1 + R2/R1; of a band pass at its centre, where the gain is
        -R3 C2 / (R1 (C1 + C2)), 1 + (1/R1 + 1/R2) R3 C2 / (C1 + C2) = 1 + Q² (C1 + C2) / C1.
        """
        if self.middle_capacitance is None:
            return 1.0 + self.feedback_resistance / self.input_resistance
        c1, c2 = self.feedback_capacitance, self.middle_capacitance
        return 1.0 + self._input_conductance() * self.feedback_resistance * (c2 / (c1 + c2))

    def closed_loop_bandwidth(self) -> float | None:
        """Return up to which frequency the loop has gain, see ``AmplifierStage`` [Hz].

        Away from its centre a band pass asks for a noise gain of one only.
        """
        return (
            super().closed_loop_bandwidth()
            if self.middle_capacitance is None
            else (self.gain_bandwidth)
        )

    def _input_conductance(self) -> float:
        """Return 1/R1 + 1/R2 of a band pass [S]."""
        conductance = 1.0 / self.input_resistance
        if self.ground_resistance is not None:
            conductance += 1.0 / self.ground_resistance
        return conductance

    @property
    def nominal_corner(self) -> float:
        """w0 / (2 pi) of the equations above, the centre of a band pass [Hz]."""
        return self._natural() / (2.0 * math.pi)

    @property
    def nominal_quality_factor(self) -> float:
        """Q of the equations above [1]."""
        if self.middle_capacitance is not None:
            c1, c2 = self.feedback_capacitance, self.middle_capacitance
            return self._natural() * self.feedback_resistance * (c1 * c2 / (c1 + c2))
        assert self.ground_capacitance is not None
        return self._natural() * self.ground_capacitance / self._middle_conductance()

    def _middle_conductance(self) -> float:
        resistances = (self.input_resistance, self.feedback_resistance, self.middle_resistance)
        return sum(1.0 / value for value in resistances if value is not None)

    def _natural(self) -> float:
        """Return w0 [rad/s]."""
        if self.middle_capacitance is not None:
            conductance = self._input_conductance()
            return math.sqrt(conductance / self.feedback_resistance) / math.sqrt(
                self.feedback_capacitance * self.middle_capacitance
            )
        assert self.middle_resistance is not None
        assert self.ground_capacitance is not None
        return 1.0 / (
            math.sqrt(self.feedback_resistance * self.middle_resistance)
            * math.sqrt(self.ground_capacitance * self.feedback_capacitance)
        )

    def circuit(self) -> Circuit:
        """Return the section: source, middle node, inverting input, output."""
        parts: list[Part] = [
            Held("source", SIGNAL),
            Resistor("input_resistance", "source", "middle", self.input_resistance),
        ]
        across, back = ("minus", "middle")
        if self.response == "band-pass":
            across, back = back, across
        parts += [
            Resistor("feedback_resistance", back, OUTPUT, self.feedback_resistance),
            Capacitor(across, OUTPUT, self.feedback_capacitance),
        ]
        if self.middle_resistance is not None:
            parts.append(Resistor("middle_resistance", "middle", "minus", self.middle_resistance))
        if self.ground_capacitance is not None:
            parts.append(Capacitor("middle", GROUND, self.ground_capacitance))
        if self.middle_capacitance is not None:
            parts.append(Capacitor("middle", "minus", self.middle_capacitance))
        if self.ground_resistance is not None:
            parts.append(Resistor("ground_resistance", "middle", GROUND, self.ground_resistance))
        parts += self.amplifier([("minus", -1.0)], (None, "minus"))
        return Circuit((*parts, *self.load()), OUTPUT)
