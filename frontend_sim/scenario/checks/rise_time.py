"""How long an edge takes."""

from __future__ import annotations

from typing import Literal, Self

from pydantic import Field, model_validator

from frontend_sim.quantities import PositiveShare, PositiveTime, Time
from frontend_sim.scenario.checks.base import PointCheck
from frontend_sim.scenario.checks.bounds import refuse_bounds
from frontend_sim.scenario.checks.overshoot import OvershootCheck
from frontend_sim.scenario.rules import fault

EVENT = OvershootCheck.model_fields["after"].description


class RiseTimeCheck(PointCheck):
    """An edge takes its time between two shares of the way, rising or falling.

    From the last passage of the lower share before the first passage of the upper one.
    """

    instants = ("after",)

    kind: Literal["rise-time"] = "rise-time"
    at_most: PositiveTime | None = Field(default=None, description="longest time allowed")
    at_least: PositiveTime | None = Field(default=None, description="shortest time allowed")
    lower: PositiveShare = Field(default=0.1, description="share of the way where it begins")
    upper: PositiveShare = Field(default=0.9, description="share of the way where it ends")
    after: Time | None = Field(default=None, description=EVENT)

    @model_validator(mode="after")
    def _limits_agree(self) -> Self:
        refuse_bounds(self.at_least, self.at_most, "s")
        if not self.lower < self.upper:
            raise fault(["upper"], f"upper {self.upper:.4g} must lie above lower {self.lower:.4g}")
        return self
