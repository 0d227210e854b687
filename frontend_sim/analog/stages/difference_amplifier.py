"""Difference amplifier."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.analog.network import SIGNAL, Capacitor, Circuit, Held, Resistor
from frontend_sim.analog.stages.amplifier_stage import REFERENCE, AmplifierStage
from frontend_sim.analog.stages.loop_bandwidth import feedback_times
from frontend_sim.analog.stages.operational_amplifier import OUTPUT
from frontend_sim.quantities import Capacitance, Resistance, Voltage

COMMON_MODE = "common-mode voltage"
"""Input of the circuit that both inputs rest at."""


class DifferenceAmplifier(AmplifierStage):
    """Difference amplifier with R1 = input_resistance, R2 = feedback_resistance,
    R3 = noninverting_input_resistance, R4 = reference_resistance, ideally

        v_out = (1 + R2/R1) (R4 v_plus + R3 v_reference) / (R3 + R4) - (R2/R1) v_minus.

    The stage's input u is the difference: v_plus = v_common + u/2, v_minus = v_common - u/2. With
    R4/R3 = R2/R1 that is v_out = (R2/R1) u + v_reference; a mismatch lets the constant common-mode
    voltage through. Source: superposition; common practice.
    """

    kind: Literal["difference-amplifier"] = "difference-amplifier"
    input_resistance: Resistance = Field(
        description="resistor R1 from the negative source to the inverting input"
    )
    feedback_resistance: Resistance = Field(
        description="resistor R2 from the output to the inverting input"
    )
    noninverting_input_resistance: Resistance = Field(
        description="resistor R3 from the positive source to the noninverting input"
    )
    reference_resistance: Resistance = Field(
        description="resistor R4 from the noninverting input to the reference"
    )
    feedback_capacitance: Capacitance | None = Field(
        default=None, description="capacitor across feedback_resistance"
    )
    reference_capacitance: Capacitance | None = Field(
        default=None, description="capacitor across reference_resistance"
    )
    common_mode_voltage: Voltage = Field(
        default=0.0, description="constant voltage of both sources"
    )
    reference_voltage: Voltage = Field(
        default=0.0, description="constant voltage that the output is raised to"
    )

    def noise_gain(self) -> float:
        """Return the gain from the noninverting input [1]."""
        return 1.0 + self.feedback_resistance / self.input_resistance

    def noise_gain_times(self) -> tuple[float, float]:
        """Return zero and pole that ``feedback_capacitance`` makes [s]."""
        resistances = self.feedback_resistance, self.input_resistance
        return feedback_times(*resistances, self.feedback_capacitance)

    def constants(self, temperature: float) -> dict[str, float]:
        """Return the constant inputs of the circuit, see ``AmplifierStage``."""
        return {
            **super().constants(temperature),
            COMMON_MODE: self.common_mode_voltage,
            REFERENCE: self.reference_voltage,
        }

    def circuit(self) -> Circuit:
        """Return the amplifier with its four resistors."""
        parts = [
            Held("positive source", SIGNAL, 0.5),
            Held("negative source", SIGNAL, -0.5),
            Held("positive source", COMMON_MODE),
            Held("negative source", COMMON_MODE),
            Held("reference", REFERENCE),
            Resistor("input_resistance", "negative source", "minus", self.input_resistance),
            Resistor("feedback_resistance", "minus", OUTPUT, self.feedback_resistance),
            Resistor(
                "noninverting_input_resistance",
                "positive source",
                "plus",
                self.noninverting_input_resistance,
            ),
            Resistor("reference_resistance", "plus", "reference", self.reference_resistance),
            *self.amplifier([("plus", 1.0), ("minus", -1.0)], ("plus", "minus")),
            *self.load(),
        ]
        if self.feedback_capacitance is not None:
            parts.append(Capacitor("minus", OUTPUT, self.feedback_capacitance))
        if self.reference_capacitance is not None:
            parts.append(Capacitor("plus", "reference", self.reference_capacitance))
        return Circuit(tuple(parts), OUTPUT)
