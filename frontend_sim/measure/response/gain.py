"""The largest gain of a response, and the corners where it has fallen by 3 dB."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.measure.response.frequency import frequency_grid
from frontend_sim.measure.response.step_response import StepResponse

FLAT = 1e-12
"""A maximum inside the band counts only if it tops both ends of the response by this share."""

Side = Literal["lower", "upper"]

Magnitude = Callable[[Real], Real]


@dataclass(frozen=True)
class LargestGain:
    """The largest |H| over all frequencies.

    Parameters
    ----------
    value : infinite with a pole at the origin or an undamped pair [1]
    frequency : where; 0 or infinity where the response only tends to it [Hz]
    """

    value: float
    frequency: float


@dataclass(frozen=True)
class Corner:
    """A frequency at which the gain passes 1/sqrt(2) of the largest.

    Parameters
    ----------
    frequency : [Hz]
    side : "upper" where the gain falls with frequency, "lower" where it rises
    """

    frequency: float
    side: Side


def magnitude_of(response: StepResponse) -> Magnitude:
    """Return the function |H(f)|, infinite at a pole on the imaginary axis."""

    def magnitude(frequency: Real) -> Real:
        with np.errstate(divide="ignore", invalid="ignore"):
            values = np.abs(response.chain.response(frequency))
        return np.where(np.isnan(values), np.inf, values)

    return magnitude


def largest_gain(response: StepResponse) -> LargestGain:
    """Return the largest gain, refined to rounding at the zero of d ln|H| / dw = -Im(H'/H)."""
    roots = response.roots
    if roots.silent:
        return LargestGain(0.0, 0.0)
    undamped = [abs(pole) for pole in roots.poles if pole.real == 0.0 and pole not in roots.zeros]
    if undamped:
        where = float(min(undamped)) / (2.0 * math.pi)
        return LargestGain(math.inf, where)
    ends = [(abs(response.end or 0.0), 0.0), (abs(response.start), math.inf)]
    best = LargestGain(*max(ends, key=lambda pair: pair[0]))
    if len(roots.poles) == 0:
        return best
    magnitude = magnitude_of(response)
    grid = frequency_grid(np.concatenate([roots.poles, roots.zeros]))
    values = magnitude(grid)
    for peak in np.flatnonzero((values[1:-1] >= values[:-2]) & (values[1:-1] >= values[2:])) + 1:
        if values[peak] < (1.0 - 1e-3) * max(best.value, float(np.max(values))):
            continue
        where = _refined_peak(response, float(grid[peak - 1]), float(grid[peak + 1]))
        value = float(magnitude(np.array([where]))[0])
        if value > best.value * (1.0 + FLAT):
            best = LargestGain(value, where)
    return best


def _refined_peak(response: StepResponse, low: float, high: float) -> float:
    from scipy.optimize import brentq

    def rise(frequency: float) -> float:
        s = np.array([2j * math.pi * frequency])
        return -float(response.roots.logarithmic_derivative(s)[0].imag)

    if not rise(low) > 0.0 > rise(high):
        return 0.5 * (low + high)
    return float(brentq(rise, low, high, xtol=1e-300, rtol=1e-15))


def corners_of(response: StepResponse, largest: LargestGain) -> tuple[Corner, ...]:
    """Return every -3 dB corner, |H| = |H|max / sqrt(2), in order of frequency."""
    if not 0.0 < largest.value < math.inf or len(response.roots.poles) == 0:
        return ()
    grid = frequency_grid(np.concatenate([response.roots.poles, response.roots.zeros]))
    return crossings(magnitude_of(response), grid, largest.value / math.sqrt(2.0))


def crossings(magnitude: Magnitude, grid: Real, level: float) -> tuple[Corner, ...]:
    """Return where a magnitude crosses a level between points of a grid [Hz], refined to 1e-12."""
    above = magnitude(grid) >= level
    return tuple(
        Corner(
            _crossing(magnitude, float(grid[left]), float(grid[left + 1]), level),
            "upper" if above[left] else "lower",
        )
        for left in np.flatnonzero(above[:-1] != above[1:])
    )


def _crossing(magnitude: Magnitude, low: float, high: float, level: float) -> float:
    from scipy.optimize import brentq

    def beyond(frequency: float) -> float:
        return float(magnitude(np.array([frequency]))[0]) - level

    ends = beyond(low), beyond(high)
    if ends[0] * ends[1] >= 0.0:
        # A point of the grid lies on the level itself, to rounding.
        return low if abs(ends[0]) < abs(ends[1]) else high
    return float(brentq(beyond, low, high, xtol=1e-300, rtol=1e-14))
