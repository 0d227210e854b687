"""Inverting amplifier."""

from __future__ import annotations

from fractions import Fraction
from typing import Annotated, Literal

from pydantic import Field

from frontend_sim.analog.network import SIGNAL, Capacitor, Circuit, Held, Part, Resistor
from frontend_sim.analog.stages.amplifier_stage import OUTPUT, REFERENCE, AmplifierStage
from frontend_sim.analog.stages.loop_bandwidth import feedback_times
from frontend_sim.quantities import Capacitance, Ratio, Resistance, Voltage


class InvertingAmplifier(AmplifierStage):
    """Inverting amplifier of gain G = -R_feedback / R_input, without further poles

        H(s) = G / (1 + s (1 - G) / (2 pi f_u)),    H(s) = G without a gain-bandwidth product f_u.

    The pole follows the noise gain 1 - G, not the gain. A feedback capacitance C makes an ideal
    one the low pass G / (1 + s R_feedback C). The noninverting input lies at ``reference_voltage``,
    which reaches the output 1 - G times. With ``gain`` alone the two resistances are without noise,
    and too small to turn an input current into a voltage.

    Source: feedback theory, common practice.
    """

    kind: Literal["inverting-amplifier"] = "inverting-amplifier"
    gain: Annotated[Ratio, Field(lt=0.0)] | None = Field(
        default=None, description="gain, below 0; or give the two resistors"
    )
    feedback_resistance: Resistance | None = Field(
        default=None, description="resistor from the output to the inverting input"
    )
    input_resistance: Resistance | None = Field(
        default=None, description="resistor from the source to the inverting input"
    )
    feedback_capacitance: Capacitance | None = Field(
        default=None, description="capacitor across feedback_resistance; needs the resistors"
    )
    compensation_resistance: Resistance | None = Field(
        default=None,
        description="resistor from the reference to the noninverting input, against bias current",
    )
    reference_voltage: Voltage = Field(
        default=0.0, description="constant voltage at the noninverting input"
    )

    def check(self) -> None:
        """Raise ValueError if the gain is given twice or not at all, see ``NetworkStage``."""
        resistors = (self.feedback_resistance is not None, self.input_resistance is not None)
        if (self.gain is not None) == any(resistors) or any(resistors) != all(resistors):
            raise ValueError(
                "give either gain, or feedback_resistance and input_resistance together"
            )
        if self.feedback_capacitance is not None and not all(resistors):
            raise ValueError(
                "feedback_capacitance needs feedback_resistance and input_resistance; give these "
                "instead of gain"
            )
        super().check()

    def closed_loop_gain(self) -> float:
        """Return the gain at low frequency, below zero [1]."""
        if self.gain is not None:
            return self.gain
        assert self.feedback_resistance is not None
        assert self.input_resistance is not None
        return -self.feedback_resistance / self.input_resistance

    def noise_gain(self) -> float:
        """Return the gain from the noninverting input [1]."""
        return 1.0 - self.closed_loop_gain()

    def noise_gain_times(self) -> tuple[float, float]:
        """Return zero and pole that ``feedback_capacitance`` makes [s]."""
        if self.feedback_resistance is None or self.input_resistance is None:
            return 0.0, 0.0
        resistances = self.feedback_resistance, self.input_resistance
        return feedback_times(*resistances, self.feedback_capacitance)

    def constants(self, temperature: float) -> dict[str, float]:
        """Return the constant inputs of the circuit, see ``AmplifierStage``."""
        return {**super().constants(temperature), REFERENCE: self.reference_voltage}

    def circuit(self) -> Circuit:
        """Return the amplifier with its two resistors."""
        parts, plus = reference(self.compensation_resistance)
        parts.append(Held("source", SIGNAL))
        if self.gain is not None:
            # The inverting input of an ideal divider between the source and the output.
            share = 1 / (1 - Fraction(self.gain))
            senses = [(plus, Fraction(1)), ("source", share - 1), (OUTPUT, -share)]
            parts += self.amplifier(senses, (plus, None))
            return Circuit((*parts, *self.load()), OUTPUT)
        assert self.feedback_resistance is not None
        assert self.input_resistance is not None
        parts += [
            Resistor("input_resistance", "source", "minus", self.input_resistance),
            Resistor("feedback_resistance", "minus", OUTPUT, self.feedback_resistance),
        ]
        if self.feedback_capacitance is not None:
            parts.append(Capacitor("minus", OUTPUT, self.feedback_capacitance))
        parts += self.amplifier([(plus, 1.0), ("minus", -1.0)], (plus, "minus"))
        return Circuit((*parts, *self.load()), OUTPUT)


def reference(resistance: float | None) -> tuple[list[Part], str]:
    """Return the reference behind a resistance [ohm], or none, and the node of the input."""
    held = Held("reference", REFERENCE)
    if resistance is None:
        return [held], "reference"
    return [held, Resistor("compensation_resistance", "reference", "plus", resistance)], "plus"
