"""Three-parameter fit: a sine of known frequency, by linear least squares."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real, positive, samples
from frontend_sim.measure.instants import Instants
from frontend_sim.measure.sine_fit.bounds import bounds_at
from frontend_sim.measure.sine_fit.clipping import refuse_clipped
from frontend_sim.measure.sine_fit.fit import SineFit
from frontend_sim.measure.sine_fit.least_squares import least_squares

LEAST_POINTS = 6
"""Twice as many points as parameters."""

LEAST_CYCLES = 0.5
"""Below half a cycle an offset cannot be told from a part of the sine."""


def fit_sine_at(
    values: ArrayLike,
    frequency: float,
    *,
    rate: float | None = None,
    times: ArrayLike | None = None,
) -> SineFit:
    """Fit amplitude, phase and offset of a sine of known frequency.

    Linear least squares in a sin(2 pi f t) + b cos(2 pi f t) + c. Source: IEEE 1057 and IEEE 1241,
    three-parameter fit (from memory).

    Parameters
    ----------
    values : shape (N,) [V]
    frequency : [Hz]
    rate, times : of the samples, one of both [Hz], [s]

    Raises
    ------
    MeasureError
        If the record has too few points or cycles, cannot tell the parameters apart, or is
        clipped.
    """
    row = samples(values, LEAST_POINTS)
    instants = Instants.of(len(row), rate, times)
    exact = positive(frequency, "the frequency", "Hz")
    enough_cycles(exact, instants, LEAST_CYCLES)
    linear = linear_part(row, exact, instants)
    fit = fit_of(row, linear, exact, instants, parameters=3)
    refuse_clipped(row, row - residual(row, linear, exact, instants), fit.residual_rms)
    return fit


def linear_part(values: Real, frequency: float, instants: Instants) -> Real:
    """Return a, b [V] and c of a sin + b cos + c around the centre of the record, shape (3,)."""
    columns = _columns(frequency, instants)
    return least_squares(columns, values, f"sine, cosine and offset at {frequency:g} Hz")


def residual(values: Real, linear: Real, frequency: float, instants: Instants) -> Real:
    """Return the values less the fit, shape (N,) [V]."""
    return values - _columns(frequency, instants) @ linear


def fit_of(
    values: Real, linear: Real, frequency: float, instants: Instants, parameters: int
) -> SineFit:
    """Return the fit that belongs to linear parameters and a frequency."""
    a, b, offset = (float(each) for each in linear)
    amplitude = math.hypot(a, b)
    phase = math.atan2(b, a) + instants.phase_at_zero(frequency)
    phase = math.remainder(phase, 2.0 * math.pi)
    rest = residual(values, linear, frequency, instants)
    rms = float(np.sqrt(np.mean(rest**2)))
    count = len(values)
    if amplitude == 0.0:
        raise MeasureError(
            f"there is no sine of {frequency:g} Hz in the record: its amplitude is zero"
        )
    noise = rms * math.sqrt(count / (count - parameters))
    bounds = bounds_at(amplitude, frequency, noise, phase, instants, parameters == 3)
    return SineFit(amplitude, frequency, phase, offset, rms, count, parameters, bounds)


def enough_cycles(frequency: float, instants: Instants, least: float) -> None:
    """Raise MeasureError if the record holds fewer cycles than a fit needs."""
    cycles = frequency * instants.span
    if cycles < least:
        raise MeasureError(
            f"the record holds {cycles:.3g} cycles of {frequency:g} Hz, a fit needs at least "
            f"{least:g}; record at least {least / frequency:.3g} s"
        )


def _columns(frequency: float, instants: Instants) -> Real:
    phase = instants.phase(frequency)
    return np.column_stack([np.sin(phase), np.cos(phase), np.ones_like(phase)])
