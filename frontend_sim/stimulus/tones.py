"""Several sines at once."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import Angle, Frequency, SignalDifference, SignalLevel
from frontend_sim.stimulus.base import Key, Stimulus
from frontend_sim.stimulus.drive import Drive
from frontend_sim.stimulus.sine import Tone
from frontend_sim.values import Value


class ToneValue(Value):
    """One of several sines."""

    amplitude: SignalDifference = Field(description="peak value of this tone")
    frequency: Frequency = Field(description="frequency of this tone")
    phase: Angle = Field(default=0.0, description="phase of this tone at t = 0")


class Tones(Stimulus):
    """u = offset + sum of amplitude_i · sin(2 pi frequency_i t + phase_i)."""

    kind: Literal["tones"] = "tones"
    tone: tuple[ToneValue, ...] = Field(min_length=1, max_length=1000, description="the tones")
    offset: SignalLevel = Field(default=0.0, description="value that the tones swing around")

    def drives(self, key: Key) -> tuple[Drive, ...]:
        """Return one drive for each tone; the first carries the offset."""
        return tuple(
            Tone(tone.amplitude, tone.frequency, tone.phase, 0.0 if index else self.offset)
            for index, tone in enumerate(self.tone)
        )

    def highest_frequency(self) -> float:
        """Return the highest of the tones [Hz]."""
        return max(tone.frequency for tone in self.tone)
