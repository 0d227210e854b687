"""How far a discrete model of the chain lies from the exact answer."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.discretize import Method
from frontend_sim.measure.level import decibel
from frontend_sim.measure.response.frequency import frequency_grid
from frontend_sim.measure.response.gain import Corner, crossings
from frontend_sim.measure.response.grid_model import GridModel
from frontend_sim.measure.response.step_response import StepResponse

DENSE = 4096
"""The step responses are compared at this many grid points one by one."""

PER_OCTAVE = 64
"""After these, at so many grid points in each octave of time."""

SHARES = (0.0, 0.25, 0.5, 0.75, 1.0)
"""Where in the interval after a grid point the exact response is looked at."""


@dataclass(frozen=True)
class ResponseError:
    """Error of a model's frequency response at one frequency.

    Parameters
    ----------
    frequency : [Hz]
    magnitude : 20 lg |H_model / H|; minus infinity where the model lets nothing through [dB]
    phase : arg(H_model / H), from -180 to 180 [deg]
    """

    frequency: float
    magnitude: float
    phase: float


@dataclass(frozen=True)
class CornerError:
    """Where a model has a corner of the chain.

    Parameters
    ----------
    corner : -3 dB corner of the chain
    at_corner : error there; None above half the grid rate
    model_frequency : where the model's gain passes the same level on the same side; None if it
        does not below half the grid rate [Hz]
    warping : model_frequency / frequency - 1 [1]
    """

    corner: Corner
    at_corner: ResponseError | None
    model_frequency: float | None
    warping: float | None


@dataclass(frozen=True)
class ModelDistance:
    """How far a discrete model at a grid rate lies from the exact response, delays left out.

    Parameters
    ----------
    method : zoh, foh or bilinear
    grid_rate : [Hz]
    prewarp : frequency that a bilinear model keeps [Hz]
    corners : one row for each corner of the chain
    at_half_rate : error at half the conversion rate; None where the grid cannot show it
    step_on_grid : largest error of the response to a full-scale step at a grid point [LSB]
    step_anywhere : the same for a step at the worst instant between two grid points [LSB]
    """

    method: Method
    grid_rate: float
    prewarp: float | None
    corners: tuple[CornerError, ...]
    at_half_rate: ResponseError | None
    step_on_grid: float
    step_anywhere: float


@dataclass(frozen=True, eq=False)
class Exact:
    """The exact response, as every model at one grid rate is compared with it.

    Parameters
    ----------
    response : the step response of the chain
    corners : its -3 dB corners
    level : gain at the corners, |H|max / sqrt(2) [1]
    half_rate : half the conversion rate [Hz]
    lsb_per_unit : LSB of the output for each unit of the step response
    points : numbers of grid points, shape (K,)
    steps : step response at SHARES of the interval after each, shape (5, K)
    """

    response: StepResponse
    corners: tuple[Corner, ...]
    level: float
    half_rate: float
    lsb_per_unit: float
    points: Real
    steps: Real

    @classmethod
    def of(
        cls,
        response: StepResponse,
        corners: tuple[Corner, ...],
        largest: float,
        grid_rate: float,
        half_rate: float,
        lsb_per_unit: float,
    ) -> Exact:
        """Tabulate the step response of a chain for a grid rate [Hz]."""
        points = _points(response, grid_rate)
        steps = [response.without_delay((points + share) / grid_rate) for share in SHARES]
        level = largest / math.sqrt(2.0)
        return cls(response, corners, level, half_rate, lsb_per_unit, points, np.array(steps))

    def frequency_response(self, frequency: float) -> complex:
        """Return H(f) without the pure delay."""
        return complex(self.response.chain.without_delay().response(np.array([frequency]))[0])


def model_distance(exact: Exact, model: GridModel, prewarp: float | None) -> ModelDistance:
    """Compare a discrete model with the exact response.

    The model cannot tell where between two grid points a step came: its output at point k stands
    against every exact value from k to k + 1 intervals after the step.
    """
    found = _model_corners(exact, model) if exact.corners else ()
    errors = np.max(np.abs(model.step_response(exact.points) - exact.steps), axis=1)
    return ModelDistance(
        model.method,
        model.rate,
        prewarp if model.method == "bilinear" else None,
        tuple(_corner_error(exact, model, corner, found) for corner in exact.corners),
        _error_at(exact, model, exact.half_rate),
        float(errors[0]) * exact.lsb_per_unit,
        float(np.max(errors)) * exact.lsb_per_unit,
    )


def _error_at(exact: Exact, model: GridModel, frequency: float) -> ResponseError | None:
    # At half the grid rate itself the bilinear model shows what the chain does at infinity.
    if frequency > 0.5 * model.rate * (1.0 + 1e-12):
        return None
    right, shown = (
        exact.frequency_response(frequency),
        complex(model.response(np.array([frequency]))[0]),
    )
    if right == 0.0:
        return None
    ratio = shown / right
    if abs(ratio) < 1e-12:
        return ResponseError(frequency, -math.inf, 0.0)
    return ResponseError(frequency, decibel(abs(ratio)), math.degrees(np.angle(ratio)))


def _model_corners(exact: Exact, model: GridModel) -> tuple[Corner, ...]:
    roots = np.concatenate([exact.response.roots.poles, exact.response.roots.zeros])
    half = 0.5 * model.rate
    grid = np.unique(
        np.concatenate([frequency_grid(roots, half), np.linspace(0.0, half, 2049)[1:]])
    )
    return crossings(lambda f: np.abs(model.response(f)), grid, exact.level)


def _corner_error(
    exact: Exact, model: GridModel, corner: Corner, found: tuple[Corner, ...]
) -> CornerError:
    same = [other.frequency for other in found if other.side == corner.side]
    nearest = min(same, key=lambda f: abs(math.log(f / corner.frequency)), default=None)
    warping = None if nearest is None else nearest / corner.frequency - 1.0
    return CornerError(corner, _error_at(exact, model, corner.frequency), nearest, warping)


def _points(response: StepResponse, rate: float) -> Real:
    """Return numbers of grid points: one by one at first, then a share of each octave."""
    moving = response.roots.poles[response.roots.poles.real < 0.0].real
    last = 40.0 * rate / float(np.min(-moving)) if len(moving) else float(DENSE)
    octaves = max(math.ceil(math.log2(min(max(last / DENSE, 1.0), 2.0**36))), 0)
    late = DENSE * 2.0 ** (np.arange(octaves * PER_OCTAVE + 1) / PER_OCTAVE)
    return np.unique(np.concatenate([np.arange(float(DENSE)), np.rint(late)]))
