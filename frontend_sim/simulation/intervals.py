"""Steps of any length by one table: the digits of the interval pick the exponentials."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.analog.exponential import expm1, joined
from frontend_sim.simulation.kernels import BASE, BITS, Index, Real, reach

FINEST = 2.0**-17
"""Norm of the system times the unit of time: what the second-order Taylor polynomial leaves out
is below FINEST^3 / 6 = 8e-17."""


@dataclass(frozen=True, eq=False)
class IntervalTable:
    """exp(M t) - I for any t from 0 to ``longest``, to rounding.

    A power of two is taken as the unit of time, t is written in digits of base 64 of that unit,
    and each digit of each level has its matrix in the table. One interval costs one
    matrix-vector product for each digit and two for the rest.

    Parameters
    ----------
    system : M, shape (N, N) [1/s]
    unit : a power of two [s]
    table : shape (levels, 64, N, N)
    stop : columns of the chain's states that each of their rows needs, shape (n,)
    """

    system: Real
    unit: float
    table: Real
    stop: Index

    @classmethod
    def of(cls, system: Real, states: int, longest: float) -> Self:
        """Tabulate a system up to ``longest`` [s]; the first ``states`` of it are the chain's."""
        norm = float(np.max(np.sum(np.abs(system), axis=1), initial=0.0))
        unit = 2.0 ** math.floor(math.log2(FINEST / norm)) if norm > 0.0 else 1.0
        # Below a rounding of the longest interval no finer unit is ever needed.
        unit = max(unit, 2.0 ** math.floor(math.log2(max(longest, 1e-300)) - 60))
        levels = max(math.ceil(math.log2(max(longest / unit, 1.0) * 2.0) / BITS), 1)
        table = np.zeros((levels, BASE, *system.shape))
        for level in range(levels):
            table[level, 1] = expm1(system * (unit * float(BASE) ** level))
        for bit in range(1, BITS):
            top, half = 1 << bit, table[:, 1 << bit - 1]
            table[:, top] = joined(half, half)
            table[:, top + 1 : 2 * top] = joined(table[:, top, None], table[:, 1:top])
        return cls(np.ascontiguousarray(system), unit, table, reach(table[:, :, :states, :states]))
