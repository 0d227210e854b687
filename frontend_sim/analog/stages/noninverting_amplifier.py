"""Noninverting amplifier."""

from __future__ import annotations

from fractions import Fraction
from typing import Annotated, ClassVar, Literal

from pydantic import Field

from frontend_sim.analog.network import GROUND, SIGNAL, Capacitor, Circuit, Resistor
from frontend_sim.analog.stages.feedback_amplifier import FeedbackAmplifier, held_behind
from frontend_sim.analog.stages.operational_amplifier import OUTPUT
from frontend_sim.quantities import Ratio, Resistance


class NoninvertingAmplifier(FeedbackAmplifier):
    """Noninverting amplifier of gain G = 1 + R_feedback / R_ground, with A(s) of its amplifier

        H(s) = G / (1 + G / A(s)),

    that is G / (1 + s G / (2 pi f_u)) with a gain-bandwidth product f_u alone, and of second order
    with a second pole. The source is not loaded. With ``gain`` alone the feedback divider is ideal:
    without noise, and of a resistance too small to turn an input current into a voltage.

    Source: feedback theory, common practice.
    """

    second_resistor: ClassVar[str] = "ground_resistance"

    kind: Literal["noninverting-amplifier"] = "noninverting-amplifier"
    gain: Annotated[Ratio, Field(ge=1.0)] | None = Field(
        default=None, description="gain, at least 1; or give the two resistors"
    )
    ground_resistance: Resistance | None = Field(
        default=None, description="resistor from the inverting input to ground"
    )
    source_resistance: Resistance | None = Field(
        default=None, description="resistance from the source to the noninverting input"
    )

    def closed_loop_gain(self) -> float:
        """Return the gain at low frequency [1]."""
        if self.resistors is None:
            assert self.gain is not None  # see ``check``
            return self.gain
        r_feedback, r_ground = self.resistors
        return 1.0 + r_feedback / r_ground

    def noise_gain(self) -> float:
        """Return the gain from the noninverting input, which is the gain of the stage [1]."""
        return self.closed_loop_gain()

    def circuit(self) -> Circuit:
        """Return the amplifier with its feedback divider."""
        parts, plus = held_behind("source", SIGNAL, "source_resistance", self.source_resistance)
        if self.resistors is None:
            divided = (OUTPUT, -1 / Fraction(self.closed_loop_gain()))
            parts += self.amplifier([(plus, 1.0), divided], (plus, None))
            return Circuit((*parts, *self.load()), OUTPUT)
        r_feedback, r_ground = self.resistors
        parts += [
            Resistor("feedback_resistance", OUTPUT, "minus", r_feedback),
            Resistor("ground_resistance", "minus", GROUND, r_ground),
        ]
        if self.feedback_capacitance is not None:
            parts.append(Capacitor(OUTPUT, "minus", self.feedback_capacitance))
        parts += self.amplifier([(plus, 1.0), ("minus", -1.0)], (plus, "minus"))
        return Circuit((*parts, *self.load()), OUTPUT)
