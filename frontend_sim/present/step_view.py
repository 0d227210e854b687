"""What the step panels show: which times, and the curves over them."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Self

import numpy as np
from numpy.typing import NDArray

from frontend_sim.measure.response.inspection import Inspection
from frontend_sim.present.decimation import COLUMNS, shown_points

Real = NDArray[np.float64]

PER_PERIOD = 24.0
"""Points in a period of the fastest ringing."""

MOST_POINTS = 400_000
"""No more points are computed; a response that rings longer is shown in its first part."""

MOST_GRID = 4000
"""No more points of a discrete model are shown."""


@dataclass(frozen=True, eq=False)
class GridSteps:
    """The step response of a discrete model at the points of its grid.

    Parameters
    ----------
    method : zoh, foh or bilinear
    time : shape (K,) [s]
    value : shape (K,) [V]
    """

    method: str
    time: Real
    value: Real


@dataclass(frozen=True, eq=False)
class StepView:
    """The curves of the step panels, for a step of one unit that the file has for the stimulus.

    Parameters
    ----------
    inspection : what is shown
    time : from a little before the step on, shape (T,) [s]
    value : response to the step, shape (T,) [V]
    distance_time : shape (D,) [s]
    distance : |value - end|; of a response that rings faster than columns of pixels can show, the
        largest value of each column; empty without an end; shape (D,) [V]
    settled : end of the time axis [s]
    models : discrete models that are shown
    """

    inspection: Inspection
    time: Real
    value: Real
    distance_time: Real
    distance: Real
    settled: float
    models: tuple[GridSteps, ...]

    @classmethod
    def of(cls, inspection: Inspection) -> Self:
        """Compute the curves of an inspection."""
        last, delay = _last_time(inspection), inspection.time.delay
        rings = [pole.imaginary for pole in inspection.poles if pole.imaginary > 0.0]
        step = (last - delay) / 3000.0
        if rings:
            step = min(step, 2.0 * math.pi / (PER_PERIOD * max(rings)))
        last = min(last, delay + step * MOST_POINTS)
        count = max(round((last - delay) / step), 2)
        span = (last - delay) / count
        # Fast beginnings would fall between the equal steps.
        early = span * np.geomspace(1e-6, 10.0, 300)
        time = np.concatenate([span * np.arange(count + 1.0), early])
        response = inspection.response
        value = np.concatenate([response.evenly(span, count), response.without_delay(early)])
        value *= inspection.referred.unit.size
        order = np.argsort(time, kind="stable")
        time, value = delay + time[order], value[order]
        kept = shown_points(value)
        before = [-0.04 * last, 0.0, delay]
        return cls(
            inspection,
            np.concatenate([before, time[kept]]),
            np.concatenate([np.zeros(3), value[kept]]),
            *_distance(inspection, time, value),
            last,
            tuple(_grid_steps(inspection, last)),
        )


def _distance(inspection: Inspection, time: Real, value: Real) -> tuple[Real, Real]:
    end = inspection.time.end
    if end is None or not math.isfinite(end):
        return np.empty(0), np.empty(0)
    distance = np.abs(value - inspection.referred.unit.size * end)
    if len(distance) <= 4 * COLUMNS:
        return time, distance
    starts = np.linspace(0, len(distance), COLUMNS, endpoint=False).astype(np.int64)
    return time[starts], np.maximum.reduceat(distance, starts)


def _last_time(inspection: Inspection) -> float:
    """Return the end of the time axis: a little after the response has settled to half an LSB."""
    measured = inspection.time
    times = [settling.time for settling in measured.settlings if settling.time is not None]
    if times and max(times) > measured.delay:
        return measured.delay + 1.1 * (max(times) - measured.delay)
    moving = [pole.time_constant for pole in inspection.poles if pole.time_constant is not None]
    ringing = [2.0 * math.pi / pole.imaginary for pole in inspection.poles if pole.imaginary > 0.0]
    spans = [5.0 * max(moving, default=0.0), 6.0 * max(ringing, default=0.0)]
    return measured.delay + (max(spans) or 10.0 / inspection.adc.rate)


def _grid_steps(inspection: Inspection, last: float) -> list[GridSteps]:
    """Return the models whose points can be told apart from one another in the plot."""
    found = []
    for model in inspection.grid_models:
        count = math.floor((last - inspection.time.delay) * model.rate) + 1
        if count <= MOST_GRID:
            number = np.arange(float(count))
            time = inspection.time.delay + number / model.rate
            value = inspection.referred.unit.size * model.step_response(number)
            found.append(GridSteps(model.method, time, value))
    return found
