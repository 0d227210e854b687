"""Inverting amplifier."""

from __future__ import annotations

from typing import Annotated, Literal, Self

from pydantic import Field, model_validator

from frontend_sim.analog.block import Block
from frontend_sim.analog.stages.amplifier import closed_loop
from frontend_sim.analog.stages.base import Stage
from frontend_sim.quantities import Frequency, Ratio, Resistance


class InvertingAmplifier(Stage):
    """Inverting amplifier of gain G = -R_feedback / R_input

        H(s) = G / (1 + s (1 - G) / (2 pi f_u)),    H(s) = G without a gain-bandwidth product f_u.

    The pole follows the noise gain 1 - G, not the gain. Source: feedback theory, common practice.
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
    gain_bandwidth: Frequency | None = Field(
        default=None, description="gain-bandwidth product f_u; left out, the amplifier is ideal"
    )

    @model_validator(mode="after")
    def _one_way_to_give_the_gain(self) -> Self:
        resistors = (self.feedback_resistance is not None, self.input_resistance is not None)
        if (self.gain is not None) == any(resistors) or any(resistors) != all(resistors):
            raise ValueError(
                "give either gain, or feedback_resistance and input_resistance together"
            )
        return self

    def closed_loop_gain(self) -> float:
        """Return the gain at low frequency, below zero [1]."""
        if self.gain is not None:
            return self.gain
        assert self.feedback_resistance is not None
        assert self.input_resistance is not None
        return -self.feedback_resistance / self.input_resistance

    def blocks(self) -> tuple[Block, ...]:
        """Return the closed loop, whose noise gain is one minus its gain."""
        gain = self.closed_loop_gain()
        return closed_loop(gain, 1.0 - gain, self.gain_bandwidth)
