"""Resistance of negative-temperature-coefficient thermistors."""

from __future__ import annotations

import numpy as np

from frontend_sim.analog.block import Real


def by_beta(nominal: float, beta: float, reference: float, temperature: Real) -> Real:
    """Return R = R0 exp(B (1/T - 1/T0)) [ohm].

    Parameters
    ----------
    nominal : R0, the resistance at the reference temperature [ohm]
    beta : B [K];  reference : T0 [K];  temperature : T, above 0 [K]

    Source: the two-parameter form that data sheets use; common practice.
    """
    return np.asarray(nominal * np.exp(beta * (1.0 / temperature - 1.0 / reference)))


def by_steinhart_hart(a: float, b: float, c: float, temperature: Real) -> Real:
    """Return the resistance R of which 1/T = a + b ln R + c (ln R)³ [ohm], R in ohm.

    Parameters
    ----------
    a, b : above 0;  c : not below 0 [1/K];  temperature : T, above 0 [K]

    With x = ln R the cubic c x³ + b x + (a - 1/T) has one real root, in closed form by a hyperbolic
    sine, which loses no digits where c is small.

    Source: J. S. Steinhart and S. R. Hart 1968, "Calibration curves for thermistors", *Deep Sea
    Research* 15.
    """
    shortfall = 1.0 / np.asarray(temperature, dtype=np.float64) - a
    if c == 0.0:
        return np.asarray(np.exp(shortfall / b))
    scale = np.sqrt(b / (3.0 * c))
    return np.asarray(
        np.exp(2.0 * scale * np.sinh(np.arcsinh(1.5 * shortfall / (b * scale)) / 3.0))
    )


def beta_slope(beta: float, temperature: Real) -> Real:
    """Return d(ln R)/dT = -B / T² [1/K]."""
    return -beta / np.asarray(temperature) ** 2


def steinhart_hart_slope(a: float, b: float, c: float, temperature: Real) -> Real:
    """Return d(ln R)/dT = -1 / (T² (b + 3 c (ln R)²)) [1/K]."""
    logarithm = np.log(by_steinhart_hart(a, b, c, temperature))
    return -1.0 / (np.asarray(temperature) ** 2 * (b + 3.0 * c * logarithm**2))
