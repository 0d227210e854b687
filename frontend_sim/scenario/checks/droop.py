"""How far the top of a pulse sinks."""

from __future__ import annotations

from typing import Literal, Self

from pydantic import Field, model_validator

from frontend_sim.quantities import PositiveTime, Share, Time, Voltage
from frontend_sim.scenario.checks.base import PointCheck
from frontend_sim.scenario.rules import fault


class DroopCheck(PointCheck):
    """The top of a pulse sinks by no more than a share of its height, as behind a high pass.

    The droop is (first - last) / (first - baseline); a top that rises counts by its size too.
    """

    instants = ("start", "stop")

    kind: Literal["droop"] = "droop"
    start: Time = Field(description="first instant on the top, after the rise has settled")
    stop: PositiveTime = Field(description="last instant on the top, before the fall")
    at_most: Share = Field(description="largest share of the height that may be lost")
    baseline: Voltage | None = Field(
        default=None,
        description="value that the height counts from; left out, that of the point before the run",
    )

    @model_validator(mode="after")
    def _in_order(self) -> Self:
        if not self.start < self.stop:
            raise fault(["stop"], f"stop {self.stop:g} s must lie behind start {self.start:g} s")
        return self
