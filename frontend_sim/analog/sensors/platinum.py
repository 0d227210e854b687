"""Resistance of industrial platinum thermometers."""

from __future__ import annotations

import numpy as np

from frontend_sim.analog.block import Real

A, B, C = 3.9083e-3, -5.775e-7, -4.183e-12
"""Coefficients of IEC 60751 [degC^-1, degC^-2, degC^-4]; from memory, it was not at hand."""

ZERO_CELSIUS = 273.15
LOWEST, HIGHEST = 73.15, 1123.15
"""Range of the standard, -200 degC to 850 degC [K]."""


def resistance_ratio(temperature: Real) -> Real:
    """Return R(t) / R(0 degC) by the equations of Callendar and Van Dusen,

        1 + A t + B t²                          from 0 degC on,
        1 + A t + B t² + C (t - 100) t³         below.

    Parameters
    ----------
    temperature : from ``LOWEST`` to ``HIGHEST`` [K]

    Source: IEC 60751.
    """
    t = np.asarray(temperature, dtype=np.float64) - ZERO_CELSIUS
    cold = np.minimum(t, 0.0)
    return np.asarray(1.0 + t * (A + B * t) + C * (cold - 100.0) * cold * cold * cold)


def ratio_slope(temperature: Real) -> Real:
    """Return the derivative of ``resistance_ratio`` [1/K] at a temperature [K]."""
    t = np.asarray(temperature, dtype=np.float64) - ZERO_CELSIUS
    cold = np.minimum(t, 0.0)
    return np.asarray(A + 2.0 * B * t + C * (4.0 * cold - 300.0) * cold * cold)
