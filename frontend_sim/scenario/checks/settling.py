"""When the signal has settled."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import Frequency, PositiveLimit, PositiveTime, Time, Voltage
from frontend_sim.scenario.checks.base import PointCheck


class SettlingCheck(PointCheck):
    """The signal stays within a band around its final value, from some time after an event on.

    The time runs from the event until the signal leaves the band for the last time.
    """

    instants = ("after",)

    kind: Literal["settling"] = "settling"
    within: PositiveLimit = Field(
        description="half the width of the band around the final value; a share is one of the "
        "change from before the event to the final value, or, where both are equal, of the largest "
        "excursion between"
    )
    before: PositiveTime = Field(description="longest time that the signal may take")
    after: Time | None = Field(
        default=None,
        description="instant of the event, from which the time runs; left out, the last event of a "
        "stimulus that comes to rest (the step, the end of the pulse), else the start of the run",
    )
    final: Voltage | None = Field(
        default=None,
        description="value that the band lies around; left out, where the signal ends if the "
        "stimulus rests, else its value at the last conversion",
    )
    timer_clock: Frequency | None = Field(
        default=None, description="clock of the timer that waits, to tell the time in its ticks"
    )

    def latest(self) -> tuple[str, float]:
        """Return the end of the time that is granted."""
        return "before", (self.after or 0.0) + self.before
