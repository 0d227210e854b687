"""Four-parameter fit: a sine whose frequency is free, by Gauss-Newton."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real, positive, samples
from frontend_sim.measure.instants import Instants
from frontend_sim.measure.sine_fit.clipping import refuse_clipped
from frontend_sim.measure.sine_fit.fit import SineFit
from frontend_sim.measure.sine_fit.known_frequency import (
    enough_cycles,
    fit_of,
    linear_part,
    residual,
)
from frontend_sim.measure.sine_fit.least_squares import least_squares
from frontend_sim.measure.sine_fit.start import starting_frequency

LEAST_POINTS = 16
"""A spectrum for the first guess needs them."""

LEAST_CYCLES = 1.0
"""Below one cycle frequency, offset and amplitude cannot be told apart."""

MOST_STEPS = 40

CLOSE = 1e-11
"""Change of the cycles in the record at which the steps end."""

FURTHEST = 1.5
"""Cycles of the record that the fit may move away from its first guess."""

CHANCE = 1e-3
"""Chance at which noise alone would show as strong a line."""


def fit_sine(
    values: ArrayLike,
    *,
    rate: float | None = None,
    times: ArrayLike | None = None,
    frequency: float | None = None,
) -> SineFit:
    """Fit amplitude, frequency, phase and offset of a sine.

    Each Gauss-Newton step is a linear least squares in a sin + b cos + c and the change of the
    frequency, d y/d f = 2 pi t (a cos - b sin), around the centre of the record. Source: IEEE 1057
    and IEEE 1241, four-parameter fit (from memory).

    Parameters
    ----------
    values : shape (N,) [V]
    rate, times : of the samples, one of both [Hz], [s]
    frequency : first guess, to within half a cycle of the record [Hz]; left out, the strongest line

    Raises
    ------
    MeasureError
        If the record has too few points or cycles, is clipped, or no sine stands out of it.
    """
    row = samples(values, LEAST_POINTS)
    instants = Instants.of(len(row), rate, times)
    fit, model = gauss_newton(row, instants, frequency)
    refuse_clipped(row, model, fit.residual_rms)
    return fit


def gauss_newton(values: Real, instants: Instants, guess: float | None) -> tuple[SineFit, Real]:
    """Return the fit, clipped or not, and the fitted sine at the instants, shape (N,) [V]."""
    if float(np.ptp(values)) == 0.0:
        raise MeasureError("all samples are equal; there is no sine in the record")
    frequency = starting_frequency(values, instants) if guess is None else guess
    frequency = positive(frequency, "the frequency", "Hz")
    enough_cycles(frequency, instants, 0.5 * LEAST_CYCLES)
    start, close = frequency, CLOSE + 4.0 * np.finfo(np.float64).eps * frequency * instants.span
    linear = list(linear_part(values, frequency, instants))
    for _ in range(MOST_STEPS):
        *linear, step = _step(values, linear, frequency, instants)
        frequency += step
        if not abs(frequency - start) * instants.span < FURTHEST:
            break
        if abs(step) * instants.span <= close:
            return _finished(values, frequency, instants)
    raise MeasureError(
        f"the fit of a sine near {start:.6g} Hz finds no rest; give its frequency to within half a "
        f"cycle of the record, {0.5 / instants.span:.3g} Hz, or record more cycles"
    )


def _step(
    values: Real, linear: Sequence[float], frequency: float, instants: Instants
) -> list[float]:
    """Return a, b, c [V] and the change of the frequency [Hz] of one Gauss-Newton step.

    Parameters
    ----------
    linear : a and b of the step before
    """
    phase = instants.phase(frequency)
    sine, cosine = np.sin(phase), np.cos(phase)
    away = 2.0 * np.pi * instants.tick * (instants.ticks - instants.centre)
    turning = away * (linear[0] * cosine - linear[1] * sine)
    columns = np.column_stack([sine, cosine, np.ones_like(sine), turning])
    found = least_squares(columns, values, "frequency, phase, amplitude and offset")
    return [float(each) for each in found]


def _finished(values: Real, frequency: float, instants: Instants) -> tuple[SineFit, Real]:
    enough_cycles(frequency, instants, LEAST_CYCLES)
    linear = linear_part(values, frequency, instants)
    fit = fit_of(values, linear, frequency, instants, parameters=4)
    power = 0.25 * fit.count * fit.amplitude**2
    if power < fit.noise_rms**2 * math.log(0.5 * fit.count / CHANCE):
        raise MeasureError(
            f"no sine stands out: the strongest line, {fit.amplitude:.3g} at {frequency:.6g} Hz in "
            f"a residual of {fit.residual_rms:.3g} rms, can be noise; record longer, or more signal"
        )
    return fit, values - residual(values, linear, frequency, instants)
