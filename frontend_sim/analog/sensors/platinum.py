"""Resistance of industrial platinum thermometers."""

from __future__ import annotations

import numpy as np

from frontend_sim.analog.block import Real

A, B, C = 3.9083e-3, -5.775e-7, -4.183e-12
"""Coefficients of IEC 60751 [degC^-1, degC^-2, degC^-4]; from memory, the standard was not at hand."""

ZERO_CELSIUS = 273.15
LOWEST, HIGHEST = 73.15, 1123.15
"""Range of the standard, -200 degC to 850 degC [K]."""
SLACK = 1e-9
"""By this much a temperature may lie beyond the ends of the range, from rounding [K]."""


def resistance_ratio(temperature: Real) -> Real:
    """Return R(t) / R(0 degC) by the equations of Callendar and Van Dusen,

        1 + A t + B t²                          from 0 degC on,
        1 + A t + B t² + C (t - 100) t³         below.

    Parameters
    ----------
    temperature : [K]; NaN comes out for one beyond the range of the standard

    Source: IEC 60751.
    """
    t, inside = _celsius(temperature)
    ratio = 1.0 + t * (A + B * t) + np.where(t < 0.0, C * (t - 100.0) * t**3, 0.0)
    return np.where(inside, ratio, np.nan)


def ratio_slope(temperature: Real) -> Real:
    """Return the derivative of ``resistance_ratio`` [1/K] at a temperature [K]."""
    t, inside = _celsius(temperature)
    slope = A + 2.0 * B * t + np.where(t < 0.0, C * (4.0 * t - 300.0) * t**2, 0.0)
    return np.where(inside, slope, np.nan)


def _celsius(temperature: Real) -> tuple[Real, Real]:
    kelvin = np.asarray(temperature, dtype=np.float64)
    inside = (kelvin >= LOWEST - SLACK) & (kelvin <= HIGHEST + SLACK)
    return kelvin - ZERO_CELSIUS, inside
