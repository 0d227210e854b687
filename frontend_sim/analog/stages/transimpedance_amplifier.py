"""Transimpedance amplifier."""

from __future__ import annotations

import math
from typing import Literal

from pydantic import Field

from frontend_sim.analog.network import (
    GROUND,
    SIGNAL,
    Capacitor,
    Circuit,
    Held,
    Injected,
    Part,
    Resistor,
)
from frontend_sim.analog.stages.amplifier_stage import REFERENCE, AmplifierStage
from frontend_sim.analog.stages.loop_bandwidth import feedback_times
from frontend_sim.analog.stages.operational_amplifier import OUTPUT
from frontend_sim.quantities import Capacitance, Resistance, Voltage


class TransimpedanceAmplifier(AmplifierStage):
    """Transimpedance amplifier: a current i into the inverting input becomes, ideally,

        v_out = v_reference - i R_feedback / (1 + s R_feedback C_feedback).

    With the capacitance C_in at the input, the loop of a gain-bandwidth product f_u has a corner
    near sqrt(f_u / (2 pi R_feedback (C_in + C_feedback))) and rings without C_feedback. The input
    of the stage is in amperes. Source: feedback theory, common practice.
    """

    kind: Literal["transimpedance-amplifier"] = "transimpedance-amplifier"
    feedback_resistance: Resistance = Field(
        description="resistor from the output to the inverting input"
    )
    feedback_capacitance: Capacitance | None = Field(
        default=None, description="capacitor across feedback_resistance"
    )
    input_capacitance: Capacitance | None = Field(
        default=None,
        description="capacitance from the inverting input to ground: source, cable and amplifier",
    )
    shunt_resistance: Resistance | None = Field(
        default=None, description="resistance of the source, from the inverting input to ground"
    )
    reference_voltage: Voltage = Field(
        default=0.0, description="constant voltage at the noninverting input"
    )

    def units(self) -> tuple[str, str]:
        """Return amperes in, volts out."""
        return ("A", "V")

    def check(self) -> None:
        """Raise ValueError if an ideal amplifier would differentiate, see ``NetworkStage``."""
        if (
            self.input_capacitance is not None
            and self.feedback_capacitance is None
            and self.open_loop().ideal
        ):
            raise ValueError(
                "input_capacitance at the input of an ideal amplifier makes its noise gain grow "
                "without bound; give gain_bandwidth, or feedback_capacitance, or leave "
                "input_capacitance out"
            )
        super().check()

    def noise_gain(self) -> float:
        """Return the gain from the noninverting input at low frequency [1]."""
        if self.shunt_resistance is None:
            return 1.0
        return 1.0 + self.feedback_resistance / self.shunt_resistance

    def noise_gain_times(self) -> tuple[float, float]:
        """Return the zero that the input's capacitance makes, and the pole of the feedback [s]."""
        shunt = math.inf if self.shunt_resistance is None else self.shunt_resistance
        across, at_input = self.feedback_capacitance, self.input_capacitance
        return feedback_times(self.feedback_resistance, shunt, across, at_input)

    def constants(self, temperature: float) -> dict[str, float]:
        """Return the constant inputs of the circuit, see ``AmplifierStage``."""
        return {**super().constants(temperature), REFERENCE: self.reference_voltage}

    def circuit(self) -> Circuit:
        """Return the amplifier with its feedback and what hangs on its input."""
        parts: list[Part] = [
            Held("reference", REFERENCE),
            Injected("minus", SIGNAL),
            Resistor("feedback_resistance", "minus", OUTPUT, self.feedback_resistance),
            *self.amplifier([("reference", 1.0), ("minus", -1.0)], ("reference", "minus")),
            *self.load(),
        ]
        if self.feedback_capacitance is not None:
            parts.append(Capacitor("minus", OUTPUT, self.feedback_capacitance))
        if self.input_capacitance is not None:
            parts.append(Capacitor("minus", GROUND, self.input_capacitance))
        if self.shunt_resistance is not None:
            parts.append(Resistor("shunt_resistance", "minus", GROUND, self.shunt_resistance))
        return Circuit(tuple(parts), OUTPUT)
