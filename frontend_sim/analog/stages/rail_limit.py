"""An output that cannot leave its supply rails."""

from __future__ import annotations

import math
from typing import Literal, Self

from pydantic import Field, model_validator

from frontend_sim.analog.block import Block, gain_block
from frontend_sim.analog.limits import Clipping, Limiter
from frontend_sim.analog.stages.base import Stage
from frontend_sim.quantities import REFERENCE_TEMPERATURE, Voltage


class RailLimit(Stage):
    """An ideal follower between two rails, y = min(max(u, low), high).

    It has no memory: it leaves a rail at the instant its input does. An amplifier with a pole of
    its own is limited by its own keys ``output_low`` and ``output_high``.
    """

    kind: Literal["rail-limit"] = "rail-limit"
    low: Voltage | None = Field(default=None, description="lower rail; left out, there is none")
    high: Voltage | None = Field(default=None, description="upper rail; left out, there is none")

    @model_validator(mode="after")
    def _in_order(self) -> Self:
        refuse_levels(self.low, self.high)
        return self

    def blocks(self) -> tuple[Block, ...]:
        """Return a gain of one, the model while no rail is touched."""
        return (gain_block(1.0),)

    def rails(self) -> tuple[float, float]:
        """Return the two rails [V]."""
        return levels(self.low, self.high)

    def limiter(self, temperature: float = REFERENCE_TEMPERATURE) -> Limiter:
        """Return the two rails."""
        return Clipping(range(1), 1.0, *self.rails())


def levels(low: float | None, high: float | None) -> tuple[float, float]:
    """Return two levels, infinite where there is none [V]."""
    return -math.inf if low is None else low, math.inf if high is None else high


def refuse_levels(low: float | None, high: float | None) -> None:
    """Raise ValueError if no level is given, or they are reversed [V]."""
    if low is None and high is None:
        raise ValueError("give low, high or both; without them nothing limits")
    if low is not None and high is not None and not low < high:
        raise ValueError(
            f"the levels are reversed or equal: low {low:g} V must lie below high {high:g} V"
        )
