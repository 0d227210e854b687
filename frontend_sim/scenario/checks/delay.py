"""How late the signal is."""

from __future__ import annotations

from typing import Literal, Self

from pydantic import Field, model_validator

from frontend_sim.quantities import PositiveShare, PositiveTime, Time
from frontend_sim.scenario.checks.base import PointCheck
from frontend_sim.scenario.checks.bounds import refuse_bounds
from frontend_sim.scenario.checks.rise_time import EVENT

SHARE = "share of the way from the value before the event to the final value that ends it"


class DelayCheck(PointCheck):
    """A point of the chain has gone half the way within some time after an event."""

    instants = ("after",)

    kind: Literal["delay"] = "delay"
    at_most: PositiveTime | None = Field(default=None, description="longest delay allowed")
    at_least: PositiveTime | None = Field(default=None, description="shortest delay allowed")
    share: PositiveShare = Field(default=0.5, description=SHARE)
    after: Time | None = Field(default=None, description=EVENT)

    @model_validator(mode="after")
    def _limits_agree(self) -> Self:
        refuse_bounds(self.at_least, self.at_most, "s")
        return self
