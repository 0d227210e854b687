"""Noninverting amplifier."""

from __future__ import annotations

from fractions import Fraction
from typing import Annotated, Literal

from pydantic import Field

from frontend_sim.analog.network import GROUND, SIGNAL, Capacitor, Circuit, Held, Part, Resistor
from frontend_sim.analog.stages.amplifier_stage import OUTPUT, AmplifierStage
from frontend_sim.analog.stages.loop_bandwidth import feedback_times
from frontend_sim.quantities import Capacitance, Ratio, Resistance


class NoninvertingAmplifier(AmplifierStage):
    """Noninverting amplifier of gain G = 1 + R_feedback / R_ground, with A(s) of its amplifier

        H(s) = G / (1 + G / A(s)),

    that is G / (1 + s G / (2 pi f_u)) with a gain-bandwidth product f_u alone, and of second order
    with a second pole. The source is not loaded. With ``gain`` alone the feedback divider is ideal:
    without noise, and of a resistance too small to turn an input current into a voltage.

    Source: feedback theory, common practice.
    """

    kind: Literal["noninverting-amplifier"] = "noninverting-amplifier"
    gain: Annotated[Ratio, Field(ge=1.0)] | None = Field(
        default=None, description="gain, at least 1; or give the two resistors"
    )
    feedback_resistance: Resistance | None = Field(
        default=None, description="resistor from the output to the inverting input"
    )
    ground_resistance: Resistance | None = Field(
        default=None, description="resistor from the inverting input to ground"
    )
    feedback_capacitance: Capacitance | None = Field(
        default=None, description="capacitor across feedback_resistance; needs the resistors"
    )
    source_resistance: Resistance | None = Field(
        default=None, description="resistance from the source to the noninverting input"
    )

    def check(self) -> None:
        """Raise ValueError if the gain is given twice or not at all, see ``NetworkStage``."""
        resistors = (self.feedback_resistance is not None, self.ground_resistance is not None)
        if (self.gain is not None) == any(resistors) or any(resistors) != all(resistors):
            raise ValueError(
                "give either gain, or feedback_resistance and ground_resistance together"
            )
        if self.feedback_capacitance is not None and not all(resistors):
            raise ValueError(
                "feedback_capacitance needs feedback_resistance and ground_resistance; give these "
                "instead of gain"
            )
        super().check()

    def closed_loop_gain(self) -> float:
        """Return the gain at low frequency [1]."""
        if self.gain is not None:
            return self.gain
        assert self.feedback_resistance is not None
        assert self.ground_resistance is not None
        return 1.0 + self.feedback_resistance / self.ground_resistance

    def noise_gain(self) -> float:
        """Return the gain from the noninverting input, which is the gain of the stage [1]."""
        return self.closed_loop_gain()

    def noise_gain_times(self) -> tuple[float, float]:
        """Return zero and pole that ``feedback_capacitance`` makes [s]."""
        if self.feedback_resistance is None or self.ground_resistance is None:
            return 0.0, 0.0
        resistances = self.feedback_resistance, self.ground_resistance
        return feedback_times(*resistances, self.feedback_capacitance)

    def circuit(self) -> Circuit:
        """Return the amplifier with its feedback divider."""
        parts, plus = source(self.source_resistance)
        if self.gain is not None:
            feedback = (OUTPUT, -1 / Fraction(self.gain))
            parts += self.amplifier([(plus, 1.0), feedback], (plus, None))
            return Circuit((*parts, *self.load()), OUTPUT)
        assert self.feedback_resistance is not None
        assert self.ground_resistance is not None
        parts += [
            Resistor("feedback_resistance", OUTPUT, "minus", self.feedback_resistance),
            Resistor("ground_resistance", "minus", GROUND, self.ground_resistance),
        ]
        if self.feedback_capacitance is not None:
            parts.append(Capacitor(OUTPUT, "minus", self.feedback_capacitance))
        parts += self.amplifier([(plus, 1.0), ("minus", -1.0)], (plus, "minus"))
        return Circuit((*parts, *self.load()), OUTPUT)


def source(resistance: float | None) -> tuple[list[Part], str]:
    """Return the source behind a resistance [ohm], or none, and the node of the input."""
    held = Held("source", SIGNAL)
    if resistance is None:
        return [held], "source"
    return [held, Resistor("source_resistance", "source", "plus", resistance)], "plus"
