"""Smooth integral nonlinearity: how far the changes of code lie from a straight line."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]


@dataclass(frozen=True)
class Bend:
    """A curve over the range, zero at both ends, one at its peak.

    Parameters
    ----------
    curve : of the share of the range, 0 to 1, to the deviation as a share of the peak
    steepest : largest slope of the curve, either way [1]
    """

    curve: Callable[[Real], Real]
    steepest: float


def _bow(u: Real) -> Real:
    return 4.0 * u * (1.0 - u)


def _s_shape(u: Real) -> Real:
    x = 2.0 * u - 1.0
    return 1.5 * math.sqrt(3.0) * (x - x**3)


BENDS: dict[str, Bend] = {
    "bow": Bend(_bow, 4.0),
    "s-shape": Bend(_s_shape, 6.0 * math.sqrt(3.0)),
}
"""Name of a shape -> the shape: a parabola, or a cubic that is negative in the lower half."""


def bend(shape: str, peak: float, bits: int, codes: Real) -> Real:
    """Return the deviation of the changes to some codes, shape of ``codes`` [LSB].

        u = (code - 1) / (2^bits - 2)
        bow: peak · 4 u (1 - u)    s-shape: peak · (3 sqrt(3) / 2) (x - x³), x = 2 u - 1

    Both are zero at the first and the last change, so they are what a test calls end-point INL.

    Parameters
    ----------
    codes : also between whole numbers; beyond the ends there is no deviation
    """
    share = np.clip((codes - 1.0) / (2.0**bits - 2.0), 0.0, 1.0)
    return np.asarray(peak * BENDS[shape].curve(share))


def largest_peak(shape: str, bits: int) -> float:
    """Return the peak from which on codes get lost where the curve is steepest [LSB]."""
    return (2.0**bits - 2.0) / BENDS[shape].steepest


def unbent(shape: str, peak: float, bits: int, position: Real) -> Real:
    """Return the solution c of c + bend(c) = position, shape of ``position`` [LSB].

    Each step of the iteration gains the slope of the bend, which converters of so many bits that no
    table of levels is kept have below 1e-3; it is gone on until nothing changes any more.
    """
    code = position
    for _ in range(100):
        before, code = code, position - bend(shape, peak, bits, code)
        if np.array_equal(code, before):
            break
    return code
