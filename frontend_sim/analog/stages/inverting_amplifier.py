"""Inverting amplifier."""

from __future__ import annotations

from fractions import Fraction
from typing import Annotated, ClassVar, Literal

from pydantic import Field

from frontend_sim.analog.network import SIGNAL, Capacitor, Circuit, Held, Resistor
from frontend_sim.analog.stages.amplifier_stage import REFERENCE
from frontend_sim.analog.stages.feedback_amplifier import FeedbackAmplifier, held_behind
from frontend_sim.analog.stages.operational_amplifier import OUTPUT
from frontend_sim.quantities import Ratio, Resistance, Voltage


class InvertingAmplifier(FeedbackAmplifier):
    """Inverting amplifier of gain G = -R_feedback / R_input, without further poles

        H(s) = G / (1 + s (1 - G) / (2 pi f_u)),    H(s) = G without a gain-bandwidth product f_u.

    The pole follows the noise gain 1 - G, not the gain. A feedback capacitance C makes an ideal
    one the low pass G / (1 + s R_feedback C). The noninverting input lies at ``reference_voltage``,
    which reaches the output 1 - G times. With ``gain`` alone the two resistances are without noise,
    and too small to turn an input current into a voltage.

    Source: feedback theory, common practice.
    """

    second_resistor: ClassVar[str] = "input_resistance"

    kind: Literal["inverting-amplifier"] = "inverting-amplifier"
    gain: Annotated[Ratio, Field(lt=0.0)] | None = Field(
        default=None, description="gain, below 0; or give the two resistors"
    )
    input_resistance: Resistance | None = Field(
        default=None, description="resistor from the source to the inverting input"
    )
    compensation_resistance: Resistance | None = Field(
        default=None,
        description="resistor from the reference to the noninverting input, against bias current",
    )
    reference_voltage: Voltage = Field(
        default=0.0, description="constant voltage at the noninverting input"
    )

    def closed_loop_gain(self) -> float:
        """Return the gain at low frequency, below zero [1]."""
        if self.resistors is None:
            assert self.gain is not None  # see ``check``
            return self.gain
        r_feedback, r_input = self.resistors
        return -r_feedback / r_input

    def noise_gain(self) -> float:
        """Return the gain from the noninverting input [1]."""
        return 1.0 - self.closed_loop_gain()

    def constants(self, temperature: float) -> dict[str, float]:
        """Return the constant inputs of the circuit, see ``AmplifierStage``."""
        return {**super().constants(temperature), REFERENCE: self.reference_voltage}

    def circuit(self) -> Circuit:
        """Return the amplifier with its two resistors."""
        parts, plus = held_behind(
            "reference", REFERENCE, "compensation_resistance", self.compensation_resistance
        )
        parts.append(Held("source", SIGNAL))
        if self.resistors is None:
            # The inverting input of an ideal divider between the source and the output.
            share = 1 / (1 - Fraction(self.closed_loop_gain()))
            senses = [(plus, Fraction(1)), ("source", share - 1), (OUTPUT, -share)]
            parts += self.amplifier(senses, (plus, None))
            return Circuit((*parts, *self.load()), OUTPUT)
        r_feedback, r_input = self.resistors
        parts += [
            Resistor("input_resistance", "source", "minus", r_input),
            Resistor("feedback_resistance", "minus", OUTPUT, r_feedback),
        ]
        if self.feedback_capacitance is not None:
            parts.append(Capacitor("minus", OUTPUT, self.feedback_capacitance))
        parts += self.amplifier([(plus, 1.0), ("minus", -1.0)], (plus, "minus"))
        return Circuit((*parts, *self.load()), OUTPUT)
