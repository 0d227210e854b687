"""How long the signal is wrong after an overload."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import PositiveLimit, PositiveTime, Time
from frontend_sim.scenario.checks.base import PointCheck


class RecoveryCheck(PointCheck):
    """After an overload the point is soon what it would be if nothing had been limited.

    The time runs from the end of the overload to the last conversion at which the point differs
    from the answer of the chain without its limits, or at which the code is clipped.
    """

    instants = ("after",)

    kind: Literal["recovery"] = "recovery"
    within: PositiveLimit = Field(
        description="difference that counts as none; a share is one of the range"
    )
    at_most: PositiveTime = Field(description="longest time to recover")
    after: Time | None = Field(
        default=None,
        description="instant at which the overload ends; left out, the last conversion at which "
        "the pin would be beyond the converter's range if the chain had no limits",
    )
