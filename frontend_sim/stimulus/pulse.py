"""A pulse, or a train of pulses."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, Self

import numpy as np
from pydantic import Field, model_validator

from frontend_sim.quantities import PositiveTime, SignalLevel, Time
from frontend_sim.stimulus.base import Key, Stimulus
from frontend_sim.stimulus.drive import Drive, LineDrive, Lines, Real


@dataclass(frozen=True, eq=False)
class Train(LineDrive):
    """A cycle of straight pieces that repeats.

    Parameters
    ----------
    initial : value before the first cycle
    at : start of the first cycle [s]
    period : length of a cycle [s]
    count : number of cycles, or infinity
    offsets, levels, slopes : pieces of one cycle, offsets from its start [s], the first at 0
    """

    initial: float
    at: float
    period: float
    count: float
    offsets: Real
    levels: Real
    slopes: Real

    def _breaks(self, first: int, last: int) -> Real:
        cycle = np.arange(first, last, dtype=np.float64)
        return (self.at + cycle[:, None] * self.period) + self.offsets[None, :]

    def _cycle(self, time: float) -> int:
        bounded = min(max((time - self.at) / self.period, 0.0), self.count, 2.0**53)
        return int(bounded)

    def events(self, start: float, stop: float) -> Real:
        """Return the breaks in (start, stop]."""
        last = int(min(self._cycle(stop) + 2, self.count))
        # A cycle that ends where the next begins may do so one rounding later.
        times = np.unique(self._breaks(max(self._cycle(start) - 1, 0), last))
        return times[(times > start) & (times <= stop)]

    def states(self, times: Real) -> Real:
        """Return value and slope."""
        highest = self.count - 1.0
        cycle = np.clip(np.floor((times - self.at) / self.period), 0.0, highest)
        # The start of a cycle is compared as `events` computes it, so no rounding falls between.
        cycle = np.where(times >= self.at + (cycle + 1.0) * self.period, cycle + 1.0, cycle)
        cycle = np.where(times < self.at + cycle * self.period, cycle - 1.0, cycle)
        cycle = np.clip(cycle, 0.0, highest)
        starts = (self.at + cycle * self.period)[:, None] + self.offsets[None, :]
        piece = np.sum(times[:, None] >= starts, axis=1) - 1
        inside = np.maximum(piece, 0)
        since = times - starts[np.arange(len(times)), inside]
        slope = np.where(piece < 0, 0.0, self.slopes[inside])
        level = np.where(piece < 0, self.initial, self.levels[inside])
        return np.column_stack([level + slope * since, slope])


class Pulse(Stimulus):
    """A pulse from ``low`` to ``high`` with straight edges, once or repeated.

    The width is taken between the points at half height, as instruments do (common practice). The
    rising edge begins at ``at``.
    """

    kind: Literal["pulse"] = "pulse"
    low: SignalLevel = Field(default=0.0, description="value outside the pulse")
    high: SignalLevel = Field(description="value of the pulse")
    at: Time = Field(default=0.0, description="instant at which the first rising edge begins")
    width: PositiveTime = Field(description="width at half height")
    rise: Time = Field(default=0.0, description="length of the rising edge, from 0 to 100 %")
    fall: Time = Field(default=0.0, description="length of the falling edge, from 100 to 0 %")
    period: PositiveTime | None = Field(
        default=None, description="period of a train; left out, there is one pulse"
    )
    count: int | None = Field(
        default=None,
        ge=1,
        strict=True,
        description="number of pulses in a train; left out, it never ends",
    )

    @model_validator(mode="after")
    def _edges_fit(self) -> Self:
        if self.width < 0.5 * (self.rise + self.fall):
            raise ValueError(
                f"a width of {self.width:g} s is shorter than its edges allow; it needs at least "
                f"half of rise and fall together, {0.5 * (self.rise + self.fall):g} s"
            )
        if self.count is not None and self.period is None:
            raise ValueError("count needs a period")
        if self.period is not None and self.period < self._end():
            raise ValueError(
                f"a period of {self.period:g} s is shorter than the pulse, which takes "
                f"{self._end():g} s with its edges"
            )
        return self

    def _end(self) -> float:
        return 0.5 * self.rise + self.width + 0.5 * self.fall

    def drives(self, key: Key) -> tuple[Drive, ...]:
        """Return up to four pieces for each pulse."""
        fall_starts = 0.5 * self.rise + self.width - 0.5 * self.fall
        swing = self.high - self.low
        pieces = []
        if self.rise > 0.0:
            pieces.append((0.0, self.low, swing / self.rise))
        # A pulse without a top has none, whatever rounding makes of the sum of its edges.
        if fall_starts > self.rise:
            pieces.append((self.rise, self.high, 0.0))
        if self.fall > 0.0:
            pieces.append((fall_starts, self.high, -swing / self.fall))
        pieces.append((self._end(), self.low, 0.0))
        offsets, levels, slopes = (np.array(column) for column in zip(*pieces, strict=True))
        if self.period is None:
            return (Lines.of(self.low, self.at + offsets, levels, slopes),)
        count = float(self.count) if self.count is not None else np.inf
        return (Train(self.low, self.at, self.period, count, offsets, levels, slopes),)
