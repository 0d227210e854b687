"""Steps of any length by one table: the digits of the interval pick the exponentials."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.analog.exponential import expm1, joined
from frontend_sim.simulation import interval_kernels
from frontend_sim.simulation.interval_kernels import BASE, BITS
from frontend_sim.simulation.kernels import Index, Real

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
    columns : its transpose, as the loops have it
    table : shape (levels, 64, N, N), each matrix by columns too
    """

    system: Real
    unit: float
    columns: Real
    table: Real

    @classmethod
    def of(cls, system: Real, longest: float) -> Self:
        """Tabulate a system up to ``longest`` [s]."""
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
        columns = np.ascontiguousarray(system.T), np.ascontiguousarray(table.swapaxes(2, 3))
        return cls(system, unit, *columns)

    def march(
        self,
        x: Real,
        g: Real,
        intervals: Real,
        counts: Index | None = None,
        steps: Real | None = None,
    ) -> Real:
        """Return the states of chain and generator at nodes, shape (K + 1, n + m).

        Parameters
        ----------
        x : of the chain at the first node, shape (n,)
        g : of the generator at all nodes, shape (K + 1, m)
        intervals : between nodes, shape (K,) [s]
        counts : how many usual steps an interval is, 0 where it is not, shape (K,)
        steps : what 1, 2, ... usual steps add to x, from [x; g], by columns, shape (R, n + m, n)
        """
        n = len(x)
        z = np.empty((len(g), len(self.system)))
        z[0, :n], z[:, n:] = x, g
        if counts is None or steps is None:
            counts, steps = np.zeros(len(g) - 1, np.int64), np.empty((0, len(self.system), n))
        interval_kernels.march(z, n, counts, intervals, steps, self.unit, self.columns, self.table)
        return z
