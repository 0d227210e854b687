"""How far a grid lies from the exact answer, and the grid that comes close enough."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from frontend_sim.errors import ScenarioError
from frontend_sim.scenario.settings import SimulationSettings
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.linear import Axis, GridMethod
from frontend_sim.simulation.models import Model, Models, Stepping
from frontend_sim.simulation.resolution import first_multiple
from frontend_sim.simulation.uniform import WAVEFORM_TILE

MARGIN = 1.25
"""The estimate is this much above the largest error seen in the trial."""
SURE = 0.5
"""Share of the last change that bounds the error where the order is seen to be the second."""
MOST_TRIAL = 20_000_000
"""Grid points in one trial; a longer run is tried over its first part."""
MOST_WORK = 60_000_000
"""Grid points of all trials for limiters together, each limiter counted, and the events by what
they cost: some ten seconds."""
MOST_GRID = 1_000_000_000
"""Grid points in a whole run that "auto" may ask for."""


ROUNDING = 1e-12
"""Rounding that no two grids need to show, as a share of the converter's range."""


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


@dataclass(frozen=True, eq=False)
class Trials:
    """What the trials of a run are made of.

    Parameters
    ----------
    rate : conversions per second [Hz];  lsb, span : width of a code and of the whole range [V]
    accuracy : error that a picked grid must stay below [LSB]
    count : conversions of the run
    points : the converter's pin, as points of the chain
    axis : of the conversions
    instants : the instants of conversions start to stop - 1
    progress : called now and then while a trial goes on, with 0: nothing of the run is done yet
    """

    rate: float
    lsb: float
    span: float
    accuracy: float
    count: int
    points: list[int]
    axis: Axis
    instants: Callable[[int, int], Real]
    progress: Callable[[float], None] | None = None

    def pin(self, models: Models, stepping: Stepping, count: int) -> Real:
        """Return the pin at the first ``count`` conversions, shape (count,) [LSB]."""
        model: Model = models.model(self.points, self.axis, stepping)
        states, values = model.start(), []
        for start in range(0, count, WAVEFORM_TILE):
            stop = min(start + WAVEFORM_TILE, count)
            if self.progress is not None:
                self.progress(0.0)
            states, (pin,) = model.advance(states, start, self.instants(start, stop))
            values.append(pin)
        return np.concatenate(values) / self.lsb

    def fitting(self, rate: float) -> int:
        """Return how many conversions MOST_TRIAL points of a grid reach to."""
        return max(min(self.count, int(MOST_TRIAL * self.rate / rate)), 1)


def pick_grid(
    settings: SimulationSettings, models: Models, trials: Trials, reference: Stepping
) -> tuple[GridMethod, float]:
    """Return the coarsest grid of a discrete model that is accurate enough, and its error [LSB].

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
    while models.duration * trials.rate * multiple <= MOST_GRID:
        rate = trials.rate * multiple
        if settings.prewarp is None or settings.prewarp < 0.5 * rate:
            method = GridMethod(settings.discretization, rate, settings.prewarp)
            count = max(min(trials.count, MOST_TRIAL // multiple), 1)
            if count not in exact:
                exact[count] = trials.pin(models, reference, count)
            stepping = Stepping(method, None if models.cut is None else rate)
            error = trials.pin(models, stepping, count) - exact[count]
            estimate = MARGIN * float(np.max(np.abs(error)))
            if estimate <= trials.accuracy:
                return method, estimate
        multiple *= 2
    raise ScenarioError(
        f'simulation.grid_rate = "auto" cannot reach {trials.accuracy:g} LSB with {MOST_GRID:g} '
        f"grid points: the estimate is still {estimate:.3g} LSB; the stimulus probably jumps "
        'between grid points, so set simulation.discretization = "exact", give a grid_rate that '
        "meets the jumps, or raise simulation.accuracy"
    )


@dataclass(frozen=True, eq=False)
class LimiterGrid:
    """A grid that was picked for limiters.

    Parameters
    ----------
    rate : [Hz];  estimate : upper bound of its error [LSB]
    measured : distance from the grid of half the rate, if the trial covered the whole run
    """

    rate: float
    estimate: float
    measured: Distance | None
    notes: tuple[str, ...]


def pick_limiter_grid(models: Models, trials: Trials) -> LimiterGrid:
    """Return the coarsest grid for the limiters that is accurate enough.

    Three grids are tried, and more until the estimate of ``bound`` is below the accuracy, but no
    third one and none behind it once the grids have MOST_WORK points together: then the last one
    that was tried is taken, and a note says so if its estimate is above.

    Raises
    ------
    ScenarioError
        If the accuracy is not reached with MOST_GRID points; the message tells how near it came.
    """
    assert models.cut is not None
    start = first_multiple(models, trials.rate, MOST_TRIAL)
    rate, estimate, work = start.rate, math.inf, 0.0
    changes: list[float] = []
    rounding = ROUNDING * trials.span / trials.lsb
    before: Real | None = None
    while models.duration * rate <= MOST_GRID:
        count = trials.fitting(rate)
        points = count / trials.rate * rate + start.events * count / trials.count
        work += points * len(models.cut.places)
        if changes and work > MOST_WORK:
            note = () if estimate <= trials.accuracy else (_stopped(trials, 0.5 * rate, estimate),)
            return LimiterGrid(0.5 * rate, estimate, None, start.notes + note)
        pin = trials.pin(models, Stepping(rate=rate), count)
        if before is not None:
            distance = Distance()
            distance.add(pin - before[: len(pin)])
            changes.append(distance.largest)
            estimate = bound(changes) + rounding
            if estimate <= trials.accuracy and len(changes) > 1:
                whole = distance if count == trials.count else None
                return LimiterGrid(rate, estimate, whole, start.notes)
        before, rate = pin, 2.0 * rate
    raise ScenarioError(
        f"the limiters' grid cannot reach {trials.accuracy:g} LSB with {MOST_GRID:g} points: the "
        f"estimate is still {estimate:.3g} LSB; shorten simulation.duration, raise "
        "simulation.accuracy, or give simulation.grid_rate"
    )


def bound(changes: Sequence[float]) -> float:
    """Return an upper bound of a grid's error from how halvings of the step changed the answer.

    Errors fall by half at least with half the step, so that the last change bounds the error of the
    last grid. Where events happen to meet the grid two grids may agree by chance, so a change
    counts as a quarter of the one before at least. Where the last change is more than half of the
    one before, errors do not fall as fast yet, and it counts that many times more. Where the last
    three changes each fell to about a quarter the order is the second, and the error a third of the
    last change: SURE of it is taken then.

    Parameters
    ----------
    changes : largest differences from each grid to the next one, of half its step, any unit
    """
    change = changes[-1]
    if len(changes) > 1 and change > 0.5 * changes[-2] > 0.0:
        change *= 2.0 * change / changes[-2]
    elif len(changes) > 1:
        change = max(change, 0.25 * changes[-2])
    falls = [after / before if before else 1.0 for before, after in pairwise(changes[-3:])]
    second = len(falls) == 2 and all(0.2 < fall < 0.3 for fall in falls)
    return MARGIN * change * (SURE if second else 1.0)


def _stopped(trials: Trials, rate: float, estimate: float) -> str:
    return (
        f"the search for the limiters' grid stopped at {rate:g} points per second, after grids of "
        f"{MOST_WORK:g} points together: the estimate of {estimate:.3g} LSB is still above "
        f"simulation.accuracy, {trials.accuracy:g} LSB; give simulation.grid_rate to look closer, "
        "shorten simulation.duration, or raise simulation.accuracy"
    )
