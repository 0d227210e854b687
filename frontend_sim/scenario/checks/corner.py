"""Where the pass band ends."""

from __future__ import annotations

from typing import Literal, Self

from pydantic import Field, model_validator

from frontend_sim.quantities import Frequency
from frontend_sim.scenario.checks.base import Check
from frontend_sim.scenario.checks.bounds import refuse_bounds


class CornerCheck(Check):
    """An end of the chain's pass band, where the gain is 3 dB below the largest, lies right.

    A band that reaches down to zero frequency has its lower corner there, one that never ends has
    its upper corner at infinity.
    """

    kind: Literal["corner"] = "corner"
    side: Literal["upper", "lower"] = Field(
        default="upper", description="which end of the pass band"
    )
    at_least: Frequency | None = Field(default=None, description="lowest frequency allowed")
    at_most: Frequency | None = Field(default=None, description="highest frequency allowed")

    @model_validator(mode="after")
    def _some_limit(self) -> Self:
        refuse_bounds(self.at_least, self.at_most, "Hz")
        return self
