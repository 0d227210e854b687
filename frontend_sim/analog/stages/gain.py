"""An ideal gain."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.analog.block import Block, gain_block
from frontend_sim.analog.stages.base import AnyUnitStage
from frontend_sim.quantities import PartRatio


class Gain(AnyUnitStage):
    """An ideal gain, H(s) = gain, of either sign."""

    kind: Literal["gain"] = "gain"
    gain: PartRatio = Field(description="output over input; text in dB is read as 20 lg of it")

    def blocks(self) -> tuple[Block, ...]:
        """Return one block without states."""
        return (gain_block(self.gain),)
