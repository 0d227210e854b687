"""How long it takes until the codes tell."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import PositiveShare, PositiveTime, Time
from frontend_sim.scenario.checks.base import Check
from frontend_sim.scenario.checks.delay import SHARE
from frontend_sim.scenario.checks.rise_time import EVENT


class LatencyCheck(Check):
    """A code has gone half the way within some time after an event.

    The time ends with the look that completes the first such code; chain, converter's filter and
    the wait for the next conversion are in it.
    """

    instants = ("after",)

    kind: Literal["latency"] = "latency"
    at_most: PositiveTime = Field(description="longest latency allowed")
    share: PositiveShare = Field(default=0.5, description=SHARE)
    after: Time | None = Field(default=None, description=EVENT)
