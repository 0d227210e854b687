"""A step."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import SignalLevel, Time
from frontend_sim.stimulus.base import Key, Stimulus
from frontend_sim.stimulus.drive import Drive, Lines


class Step(Stimulus):
    """u = before until t = at, u = after from t = at on."""

    kind: Literal["step"] = "step"
    before: SignalLevel = Field(default=0.0, description="value before the step")
    after: SignalLevel = Field(description="value from the step on")
    at: Time = Field(default=0.0, description="instant of the step; there it has the new value")

    def drives(self, key: Key) -> tuple[Drive, ...]:
        """Return one held level with one event."""
        return (Lines.of(self.before, [self.at], [self.after]),)
