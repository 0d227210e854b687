"""A ramp."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import PositiveTime, SignalLevel, SignalSlope, Time
from frontend_sim.stimulus.base import Key, Stimulus
from frontend_sim.stimulus.drive import Drive, Lines


class Ramp(Stimulus):
    """u = before until t = at, then before + slope (t - at), held again after ``length``."""

    kind: Literal["ramp"] = "ramp"
    before: SignalLevel = Field(default=0.0, description="value before the ramp")
    slope: SignalSlope = Field(description="slope of the ramp")
    at: Time = Field(default=0.0, description="instant at which the ramp starts")
    length: PositiveTime | None = Field(
        default=None, description="how long it ramps; left out, it never ends"
    )

    def drives(self, key: Key) -> tuple[Drive, ...]:
        """Return one line, and a held level after its end."""
        if self.length is None:
            return (Lines.of(self.before, [self.at], [self.before], [self.slope]),)
        end = self.before + self.slope * self.length
        breaks = [self.at, self.at + self.length]
        return (Lines.of(self.before, breaks, [self.before, end], [self.slope, 0.0]),)
