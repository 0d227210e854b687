"""How well a frequency is kept out."""

from __future__ import annotations

from typing import Annotated, Literal, Self

from pydantic import Field, model_validator

from frontend_sim.quantities import Frequency, PositiveDecibel, Share
from frontend_sim.scenario.checks.base import Check
from frontend_sim.scenario.rules import fault

Reference = Literal["largest", "dc"]

AGAINST = "what the attenuation counts from: the largest gain of the chain, or its gain at dc"


class RejectionCheck(Check):
    """The chain attenuates a frequency, and its harmonics, by enough."""

    kind: Literal["rejection"] = "rejection"
    frequency: Frequency = Field(description="frequency that is to be kept out")
    at_least: PositiveDecibel = Field(description="least attenuation")
    deviation: Share = Field(
        default=0.0, description="how far the true frequency may lie from it, as a share"
    )
    harmonics: Annotated[int, Field(ge=1, le=1000, strict=True)] = Field(
        default=1, description="how many multiples of it are looked at, itself included"
    )
    against: Reference = Field(default="largest", description=AGAINST)

    @model_validator(mode="after")
    def _frequency_stays_above_zero(self) -> Self:
        if self.deviation >= 0.5:
            raise fault(["deviation"], f"deviation {self.deviation:.0%} must be below 50 %")
        return self
