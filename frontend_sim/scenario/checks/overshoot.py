"""How far the signal goes beyond where it ends."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import NotNegativeLimit, Time
from frontend_sim.scenario.checks.base import PointCheck


class OvershootCheck(PointCheck):
    """The signal goes beyond its final value by no more than the limit, after an event."""

    instants = ("after",)

    kind: Literal["overshoot"] = "overshoot"
    at_most: NotNegativeLimit = Field(
        description="largest excursion beyond the final value; a share is one of the change from "
        "before the event to the final value"
    )
    after: Time | None = Field(
        default=None,
        description="instant of the event; left out, the last event of a stimulus that comes to "
        "rest, else the start of the run",
    )
