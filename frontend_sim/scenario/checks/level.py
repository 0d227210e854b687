"""The signal at an instant."""

from __future__ import annotations

from typing import Literal, Self

from pydantic import Field, model_validator

from frontend_sim.quantities import Time, Voltage
from frontend_sim.scenario.checks.base import PointCheck
from frontend_sim.scenario.checks.bounds import refuse_bounds


class LevelCheck(PointCheck):
    """At an instant the signal lies between two limits, or on the right side of one."""

    instants = ("at",)

    kind: Literal["level"] = "level"
    at: Time = Field(description="instant at which the signal is looked at")
    at_least: Voltage | None = Field(default=None, description="lowest value allowed")
    at_most: Voltage | None = Field(default=None, description="highest value allowed")

    @model_validator(mode="after")
    def _some_limit(self) -> Self:
        refuse_bounds(self.at_least, self.at_most, "V")
        return self
