"""Drives for tests that need signals without files."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from frontend_sim.analog.chain import Chain
from frontend_sim.simulation.linear import Axis, GridMethod, Linear
from frontend_sim.stimulus.drive import Between, Drive, Real, UniformDrive


@dataclass(frozen=True, eq=False)
class InMemory(UniformDrive):
    """Points of an array."""

    data: Real
    rate: float
    between: Between = "line"
    origin: float = 0.0

    @property
    def initial(self) -> float:
        """Return the first point."""
        return float(self.data[0])

    def points(self, first: int, last: int) -> Real:
        """Return a slice, the ends kept beyond the data."""
        if first >= 0 and last <= len(self.data):
            return self.data[first:last]
        return self.data[np.clip(np.arange(first, last), 0, len(self.data) - 1)]


def outputs(
    chain: Chain,
    drives: list[Drive],
    times: Real,
    grid: GridMethod | None = None,
    initial: Any = "settled",
    block: int | None = None,
    interval: float | None = None,
) -> Real:
    """Return the pin of a chain at increasing times, in one block or in several."""
    interval = interval or (float(np.median(np.diff(times))) if len(times) > 1 else 1.0)
    longest = max(float(times[0]), float(np.max(np.diff(times), initial=interval)))
    last = len(chain.points) - 1
    model = Linear.of(chain, drives, [last], initial, Axis(interval, longest), grid)
    return marched(model, times, block)


def marched(model: Any, times: Real, block: int | None) -> Real:
    """Return the one output of a model at times, in blocks of some length or in one."""
    states, parts = model.start(), []
    for start in range(0, len(times), block or len(times)):
        part = times[start : start + (block or len(times))]
        states, (values,) = model.advance(states, start, part)
        parts.append(values)
    return np.concatenate(parts)
