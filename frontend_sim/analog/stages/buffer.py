"""Buffer amplifier."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.analog.network import SIGNAL, Circuit
from frontend_sim.analog.stages.amplifier_stage import AmplifierStage
from frontend_sim.analog.stages.feedback_amplifier import held_behind
from frontend_sim.analog.stages.operational_amplifier import OUTPUT
from frontend_sim.quantities import Resistance


class Buffer(AmplifierStage):
    """Buffer, an amplifier whose output is its inverting input,

        H(s) = A(s) / (1 + A(s)),    1 / (1 + s / (2 pi f_u)) with a gain-bandwidth product alone.

    Source: feedback theory, common practice.
    """

    kind: Literal["buffer"] = "buffer"
    source_resistance: Resistance | None = Field(
        default=None, description="resistance from the source to the noninverting input"
    )

    def noise_gain(self) -> float:
        """Return one."""
        return 1.0

    def circuit(self) -> Circuit:
        """Return the amplifier with its output as the inverting input."""
        parts, plus = held_behind("source", SIGNAL, "source_resistance", self.source_resistance)
        parts += self.amplifier([(plus, 1.0), (OUTPUT, -1.0)], (plus, OUTPUT))
        return Circuit((*parts, *self.load()), OUTPUT)
