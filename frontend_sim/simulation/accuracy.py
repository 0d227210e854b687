"""How far a discrete model lies from the exact answer, and the grid that comes close enough."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from frontend_sim.converter.adc import Adc
from frontend_sim.errors import ScenarioError
from frontend_sim.scenario.model import SimulationSettings
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.linear import GridMethod, Linear
from frontend_sim.simulation.uniform import WAVEFORM_TILE

MARGIN = 1.25
"""The estimate is this much above the largest error seen in the trial."""
MOST_TRIAL = 20_000_000
"""Grid points in one trial; a longer run is tried over its first part."""
MOST_GRID = 1_000_000_000
"""Grid points in a whole run that "auto" may ask for."""


@dataclass
class Distance:
    """Largest and rms value of a difference that arrives block by block."""

    largest: float = 0.0
    _squares: float = 0.0
    _count: int = 0

    def add(self, difference: Real) -> None:
        """Count one block in."""
        self.largest = max(self.largest, float(np.max(np.abs(difference))))
        self._squares += float(difference @ difference)
        self._count += len(difference)

    @property
    def rms(self) -> float:
        """Root of the mean square."""
        return math.sqrt(self._squares / self._count) if self._count else 0.0


def pick_grid(
    settings: SimulationSettings,
    adc: Adc,
    count: int,
    duration: float,
    model: Callable[[GridMethod | None], Linear],
    instants: Callable[[int, int], Real],
) -> tuple[GridMethod, float]:
    """Return the coarsest grid that is accurate enough, and its estimated error [LSB].

    Grids of 1, 2, 4, ... points per conversion are tried against the exact mode over as many
    conversions as MOST_TRIAL points allow; the estimate is MARGIN times the largest error seen.

    Raises
    ------
    ScenarioError
        If the accuracy is not reached with MOST_GRID points; the message tells how near it came.
    """
    assert settings.discretization != "exact"
    exact: dict[int, Real] = {}
    estimate, multiple = math.inf, 1
    while duration * adc.rate * multiple <= MOST_GRID:
        rate = adc.rate * multiple
        if settings.prewarp is None or settings.prewarp < 0.5 * rate:
            method = GridMethod(settings.discretization, rate, settings.prewarp)
            trial = max(min(count, MOST_TRIAL // multiple), 1)
            if trial not in exact:
                exact[trial] = _values(model(None), instants, trial)
            error = _values(model(method), instants, trial) - exact[trial]
            estimate = MARGIN * float(np.max(np.abs(error))) / adc.lsb
            if estimate <= settings.accuracy:
                return method, estimate
        multiple *= 2
    raise ScenarioError(
        f'simulation.grid_rate = "auto" cannot reach {settings.accuracy:g} LSB with {MOST_GRID:g} '
        f"grid points: the estimate is still {estimate:.3g} LSB; the stimulus probably jumps "
        'between grid points, so set simulation.discretization = "exact", give a grid_rate that '
        "meets the jumps, or raise simulation.accuracy"
    )


def _values(model: Linear, instants: Callable[[int, int], Real], count: int) -> Real:
    """Return the pin at the first ``count`` conversions, shape (count,) [V]."""
    states, values = model.start(), []
    for start in range(0, count, WAVEFORM_TILE):
        stop = min(start + WAVEFORM_TILE, count)
        states, (pin,) = model.advance(states, start, instants(start, stop))
        values.append(pin)
    return np.concatenate(values)
