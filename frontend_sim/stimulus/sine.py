"""A sine."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from pydantic import Field

from frontend_sim.quantities import Angle, Frequency, SignalDifference, SignalLevel
from frontend_sim.stimulus.base import Key, Stimulus
from frontend_sim.stimulus.drive import Drive, PiecewiseDrive, Real
from frontend_sim.stimulus.phase import cycles

FRESH = 1000.0
"""Cycles after which a rotating state has lost at most 1e-12 of its phase and is set anew."""


@dataclass(frozen=True, eq=False)
class Tone(PiecewiseDrive):
    """u = offset + amplitude · sin(2 pi f t + phase), from a rotating pair of states."""

    amplitude: float
    frequency: float
    phase: float
    offset: float

    @property
    def generator(self) -> Real:
        """A rotation by 2 pi f, and a held offset."""
        w = 2.0 * np.pi * self.frequency
        return np.array([[0.0, w, 0.0], [-w, 0.0, 0.0], [0.0, 0.0, 0.0]])

    @property
    def readout(self) -> Real:
        """Sine and offset."""
        return np.array([1.0, 0.0, 1.0])

    @property
    def initial(self) -> float:
        """Return the value at t = 0."""
        return self.offset + self.amplitude * float(np.sin(self.phase))

    def events(self, start: float, stop: float) -> Real:
        """Return no event: the sine goes on for ever."""
        return np.empty(0)

    @property
    def fresh(self) -> float:
        """``FRESH`` cycles."""
        return FRESH / self.frequency

    def states(self, times: Real) -> Real:
        """Return sine, cosine and offset."""
        angle = 2.0 * np.pi * cycles(self.frequency, times) + self.phase
        return np.column_stack(
            [
                self.amplitude * np.sin(angle),
                self.amplitude * np.cos(angle),
                np.full(len(times), self.offset),
            ]
        )


class Sine(Stimulus):
    """u = offset + amplitude · sin(2 pi frequency t + phase)."""

    kind: Literal["sine"] = "sine"
    amplitude: SignalDifference = Field(description="peak value of the sine")
    frequency: Frequency = Field(description="frequency of the sine")
    phase: Angle = Field(default=0.0, description="phase at t = 0")
    offset: SignalLevel = Field(default=0.0, description="value that the sine swings around")

    def drives(self, key: Key) -> tuple[Drive, ...]:
        """Return one tone."""
        return (Tone(self.amplitude, self.frequency, self.phase, self.offset),)

    def highest_frequency(self) -> float:
        """Return the frequency of the sine [Hz]."""
        return self.frequency
