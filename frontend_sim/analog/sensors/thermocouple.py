"""Thermoelectric voltage by the reference functions of ITS-90."""

from __future__ import annotations

from typing import Literal

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.sensors.thermocouple_tables import BUMP, TABLES

Letter = Literal["B", "E", "J", "K", "N", "R", "S", "T"]

ZERO_CELSIUS = 273.15
SLACK = 1e-9
"""By this much a temperature may lie beyond the ends of a range, from rounding [K]."""


def limits(letter: Letter) -> tuple[float, float]:
    """Return the lowest and the highest temperature of a type [K]."""
    ranges = TABLES[letter]
    return ranges[0].low + ZERO_CELSIUS, ranges[-1].high + ZERO_CELSIUS


def thermovoltage(letter: Letter, temperature: Real) -> Real:
    """Return the thermoelectric voltage against a junction at 0 degC, E(T) [V].

    The reference functions of ITS-90, polynomials in degC; see ``thermocouple_tables``. Beyond its
    ends a type has no function, and the result is NaN.

    Parameters
    ----------
    letter : of the type
    temperature : of the measuring junction [K]
    """
    return _of(letter, np.asarray(temperature) - ZERO_CELSIUS, derivative=False)


def seebeck(letter: Letter, temperature: Real) -> Real:
    """Return dE/dT at a temperature [K], in V/K; see ``thermovoltage``."""
    return _of(letter, np.asarray(temperature) - ZERO_CELSIUS, derivative=True)


def _of(letter: Letter, celsius: Real, derivative: bool) -> Real:
    result = np.full(celsius.shape, np.nan)
    for number, (low, high, c) in enumerate(TABLES[letter]):
        inside = (celsius >= low - SLACK) & (celsius <= high + SLACK)
        t = celsius[inside]
        powers = np.polynomial.Polynomial(c)
        value = (powers.deriv() if derivative else powers)(t)
        if letter == "K" and number == 1:
            value = value + _bump(t, derivative)
        result[inside] = 1e-3 * value
    return result


def _bump(t: Real, derivative: bool) -> Real:
    a0, a1, a2 = BUMP
    bump = a0 * np.exp(a1 * (t - a2) ** 2)
    return np.asarray(2.0 * a1 * (t - a2) * bump if derivative else bump)
