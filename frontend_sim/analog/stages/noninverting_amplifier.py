"""Noninverting amplifier."""

from __future__ import annotations

from typing import Annotated, Literal, Self

from pydantic import Field, model_validator

from frontend_sim.analog.block import Block
from frontend_sim.analog.stages.amplifier import closed_loop
from frontend_sim.analog.stages.base import Stage
from frontend_sim.quantities import Frequency, Ratio, Resistance


class NoninvertingAmplifier(Stage):
    """Noninverting amplifier of gain G = 1 + R_feedback / R_ground

        H(s) = G / (1 + s G / (2 pi f_u)),    H(s) = G without a gain-bandwidth product f_u.

    The source is not loaded. Source: feedback theory, common practice.
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
    gain_bandwidth: Frequency | None = Field(
        default=None, description="gain-bandwidth product f_u; left out, the amplifier is ideal"
    )

    @model_validator(mode="after")
    def _one_way_to_give_the_gain(self) -> Self:
        resistors = (self.feedback_resistance is not None, self.ground_resistance is not None)
        if (self.gain is not None) == any(resistors) or any(resistors) != all(resistors):
            raise ValueError(
                "give either gain, or feedback_resistance and ground_resistance together"
            )
        return self

    def closed_loop_gain(self) -> float:
        """Return the gain at low frequency [1]."""
        if self.gain is not None:
            return self.gain
        assert self.feedback_resistance is not None
        assert self.ground_resistance is not None
        return 1.0 + self.feedback_resistance / self.ground_resistance

    def blocks(self) -> tuple[Block, ...]:
        """Return the closed loop, whose noise gain is its gain."""
        gain = self.closed_loop_gain()
        return closed_loop(gain, gain, self.gain_bandwidth)
