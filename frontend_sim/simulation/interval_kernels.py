"""The loops over intervals of any length and over rows of equal ones, compiled.

Matrices stand by columns here, [c, r], so that every row of a product is summed at the same time.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from frontend_sim.compiled import compiled

BITS = 6
BASE = 1 << BITS


@compiled()
def add_columns(columns: Any, z: Any, begin: int, end: int, rows: int, sums: Any) -> None:
    """sums[r] += the sum over c from begin to end - 1 of columns[c, r] z[c], for r < rows."""
    for c in range(begin, end):
        column, value = columns[c], z[c]
        for r in range(rows):
            sums[r] += column[r] * value


@compiled()
def product(columns: Any, z: Any, n: int, sums: Any) -> None:
    """sums = M z for z = [x; g]: what becomes of g does not hang on x (n,)."""
    sums[:] = 0.0
    add_columns(columns, z, 0, n, n, sums)
    add_columns(columns, z, n, len(z), len(z), sums)


@compiled()
def advance(
    z: Any, work: Any, more: Any, n: int, dt: float, unit: float, system: Any, table: Any
) -> None:
    """Advance z = [x; g] by dt: the digits of dt/unit through the table, the rest by Taylor.

    table[level, digit] = exp(system · digit · BASE^level · unit) - I; unit is a power of two, so
    digits and rest are exact. The order of the Taylor polynomial is two, enough for a rest below
    2^-17 over the norm of the system.
    """
    count = np.int64(dt / unit)
    rest = dt - count * unit
    level = 0
    while count > 0:
        digit = count & (BASE - 1)
        if digit:
            product(table[level, digit], z, n, work)
            for r in range(len(z)):
                z[r] += work[r]
        count >>= BITS
        level += 1
    if rest > 0.0:
        product(system, z, n, work)
        product(system, work, n, more)
        for r in range(len(z)):
            z[r] += rest * (work[r] + 0.5 * rest * more[r])


@compiled()
def march(
    z: Any, n: int, count: Any, dt: Any, steps: Any, unit: float, system: Any, table: Any
) -> None:
    """Go from node to node: x is count[k] steps behind node k or, where they are 0, dt[k].

    z holds [x; g] of every node, x of the first one alone is known, shape (K + 1, n + m);
    steps[j - 1] is what j steps add to x, from [x; g], shape (R, n + m, n).
    """
    size = z.shape[1]
    here, work, more = np.empty(size), np.empty(size), np.empty(size)
    for k in range(len(dt)):
        if count[k]:
            step = steps[count[k] - 1]
            for r in range(n):
                work[r] = 0.0
            for c in range(n, size):
                for r in range(n):
                    work[r] += step[c, r] * z[k, c]
            for c in range(n):
                for r in range(n):
                    work[r] += step[c, r] * z[k, c]
            for r in range(n):
                z[k + 1, r] = z[k, r] + work[r]
        else:
            here[:] = z[k]
            advance(here, work, more, n, dt[k], unit, system, table)
            for r in range(n):
                z[k + 1, r] = here[r]


@compiled()
def spread_parts(z: Any, begin: Any, end: Any, matrix: Any, y: Any) -> None:
    """y[i, begin[p] + k] = sum over s of matrix[i, s, k] · z[p, s], up to end[p]."""
    outputs, size = matrix.shape[:2]
    for p in range(len(z)):
        for i in range(outputs):
            part = y[i, begin[p] : end[p]]
            part[:] = 0.0
            for s in range(size):
                weight, value = matrix[i, s], z[p, s]
                for k in range(len(part)):
                    part[k] += weight[k] * value
