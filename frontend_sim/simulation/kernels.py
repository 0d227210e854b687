"""The inner loops, compiled. Every sum runs in a fixed order, so no cut of time shows."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from frontend_sim.compiled import compiled

Real = NDArray[np.float64]
Index = NDArray[np.int64]


def reach(matrix: Real) -> Index:
    """Return for each row of (..., n, n) matrices how many columns it needs, shape (n,).

    A chain is block lower triangular, so the loops below leave about half of the products out.
    """
    used = np.any(matrix != 0.0, axis=tuple(range(matrix.ndim - 2)))
    columns = np.arange(1, used.shape[1] + 1)
    reached: Index = np.max(np.where(used, columns, 0), axis=1, initial=0)
    return reached


@compiled()
def readout(states: Any, u: Any, c: Any, d: Any, outputs: Any) -> None:
    """outputs[i, k] = c[i] · states[k] + d[i] u[k]."""
    for i in range(len(d)):
        for k in range(len(u)):
            total = d[i] * u[k]
            for s in range(states.shape[1]):
                total += c[i, s] * states[k, s]
            outputs[i, k] = total


@compiled(fastmath={"reassoc", "contract", "nsz"})
def weigh(points: Any, first: Any, count: Any, weights: Any, sums: Any) -> None:
    """sums[k, r] = sum over i < count[k] of weights[r, -count[k] + i] · points[first[k] + i].

    The newest point meets the last weight. Each sum runs over its own points alone, in one order,
    whatever the block around it.
    """
    n, longest = weights.shape
    fours = n // 4 * 4
    for k in range(len(count)):
        offset = longest - count[k]
        start = first[k]
        for r in range(0, fours, 4):
            one, two, three, four = 0.0, 0.0, 0.0, 0.0
            for i in range(count[k]):
                u = points[start + i]
                one += weights[r, offset + i] * u
                two += weights[r + 1, offset + i] * u
                three += weights[r + 2, offset + i] * u
                four += weights[r + 3, offset + i] * u
            sums[k, r], sums[k, r + 1], sums[k, r + 2], sums[k, r + 3] = one, two, three, four
        for r in range(fours, n):
            total = 0.0
            for i in range(count[k]):
                total += weights[r, offset + i] * points[start + i]
            sums[k, r] = total


@compiled()
def recur(x: Any, powers: Any, stop: Any, which: Any, sums: Any, states: Any) -> None:
    """x += powers[which[k]] x + sums[k], kept in states[k]; powers are less the identity."""
    n = len(x)
    work = np.empty(n)
    for k in range(len(which)):
        e = powers[which[k]]
        for r in range(n):
            total = sums[k, r]
            for c in range(stop[r]):
                total += e[r, c] * x[c]
            work[r] = total
        for r in range(n):
            x[r] += work[r]
        states[k] = x


@compiled()
def follow(x: Any, free: Any, found: Any) -> None:
    """found[i, k] += x[i] · free[i], and x[i] += found[i, k, :n], row k after row, in chain i."""
    chains, n, width = free.shape
    for i in range(chains):
        for k in range(found.shape[1]):
            for s in range(0, n - 1, 2):  # two at a time, in the same order
                one, two = x[i, s], x[i, s + 1]
                for j in range(width):
                    total = found[i, k, j] + one * free[i, s, j]
                    found[i, k, j] = total + two * free[i, s + 1, j]
            if n % 2:
                for j in range(width):
                    found[i, k, j] += x[i, n - 1] * free[i, n - 1, j]
            for s in range(n):
                x[i, s] += found[i, k, s]


@compiled()
def pick(found: Any, begin: int, feed: Any, points: Any, y: Any) -> None:
    """y[i, r R + k] = found[i, r, begin + k] + feed[i] u, u the point at the end of the stride."""
    chains, rows = found.shape[:2]
    row, stride = y.shape[1] // rows, (len(points) - 1) // y.shape[1]
    for i in range(chains):
        share = feed[i]
        for r in range(rows):
            at = r * row
            u = points[(at + 1) * stride : (at + row) * stride + 1 : stride]
            part, here = y[i, at : at + row], found[i, r, begin : begin + row]
            for k in range(row):
                part[k] = here[k] + share * u[k]


@compiled()
def steady(index: Any, since: Any, before: int, stride: int) -> tuple[bool, bool]:
    """Tell whether every index is ``stride`` after the one before, and every instant on a point."""
    uneven, off = False, False
    for k in range(len(index)):
        uneven |= index[k] != before + (k + 1) * stride
        off |= since[k] != 0.0
    return not uneven, not (uneven or off)


@compiled()
def mix(matrix: Any, white: Any, sums: Any) -> None:
    """sums[k] = matrix · white[k]."""
    for k in range(len(white)):
        for r in range(matrix.shape[0]):
            total = 0.0
            for c in range(matrix.shape[1]):
                total += matrix[r, c] * white[k, c]
            sums[k, r] = total


@compiled()
def spread(z: Any, matrix: Any, y: Any) -> None:
    """y[i, r ROW + k] = sum over s of matrix[i, s, k] · z[r, s]: rows of outputs from states."""
    p, size, row = matrix.shape
    for i in range(p):
        weight = matrix[i]
        for r in range(len(z)):
            part = y[i, r * row : (r + 1) * row]
            for k in range(row):
                part[k] = weight[0, k] * z[r, 0]
            for s in range(1, size - 1, 2):  # two at a time, in the same order
                one, two = z[r, s], z[r, s + 1]
                for k in range(row):
                    part[k] = (part[k] + weight[s, k] * one) + weight[s + 1, k] * two
            if size % 2 == 0:
                for k in range(row):
                    part[k] += weight[size - 1, k] * z[r, size - 1]
