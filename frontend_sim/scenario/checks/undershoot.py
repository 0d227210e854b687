"""How far the signal first goes the wrong way."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import NotNegativeLimit, Time
from frontend_sim.scenario.checks.base import PointCheck
from frontend_sim.scenario.checks.overshoot import OvershootCheck


class UndershootCheck(PointCheck):
    """The signal goes behind where it came from by no more than the limit, after an event."""

    instants = ("after",)

    kind: Literal["undershoot"] = "undershoot"
    at_most: NotNegativeLimit = Field(
        description="largest excursion behind the value before the event, away from the final "
        "value; a share is one of the change between both"
    )
    after: Time | None = Field(
        default=None, description=OvershootCheck.model_fields["after"].description
    )
