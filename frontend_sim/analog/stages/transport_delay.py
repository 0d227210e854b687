"""A pure delay."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.analog.block import Block
from frontend_sim.analog.stages.base import AnyUnitStage
from frontend_sim.quantities import Time


class TransportDelay(AnyUnitStage):
    """A pure delay, H(s) = exp(-s T): a cable, a column of fluid, an isolator.

    In the exact mode the delay is exact, not an approximation by poles and zeros.
    """

    kind: Literal["transport-delay"] = "transport-delay"
    delay: Time = Field(description="delay T")

    def blocks(self) -> tuple[Block, ...]:
        """Return no block: a delay has no lumped states."""
        return ()

    def transport_delay(self) -> float:
        """Return the delay [s]."""
        return self.delay
