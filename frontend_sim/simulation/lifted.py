"""Many outputs at a fixed stride over uniform points, by a few matrix products."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.exponential import joined
from frontend_sim.simulation import kernels
from frontend_sim.simulation.path import Outputs

LONGEST_ROW = 32
"""Most outputs in one row of the products."""
STEP_COST = 600.0
"""What a step of the recursion costs, in multiplications of a matrix product, about; it only sets
the length of rows."""
PRODUCT = 1 << 19
"""Most multiplications in one matrix product: small enough that a BLAS library never splits it
over threads, so the number of threads never shows in the result."""


def entries(stride: int, order: int) -> int:
    """Return how many numbers stand for one stride in a row: its points, or their sums if fewer."""
    return order if 0 < 2 * order < stride else stride


def row_length(entry: int, outputs: int) -> int:
    """Return how many outputs make one row, a power of two.

    A longer row saves steps of the recursion, and costs multiplications that meet a zero: the sum
    STEP_COST / row + row · entry · outputs is least at the square root of their quotient.

    Parameters
    ----------
    entry : see ``entries``
    """
    best = math.sqrt(STEP_COST / (entry * max(outputs, 1)))
    return 1 << min(max(round(math.log2(best)), 0), LONGEST_ROW.bit_length() - 1)


@dataclass(frozen=True, eq=False)
class Lifted:
    """One row of R outputs, ``stride`` points apart, from its R · stride points and the state.

    With the points u of a row, the state x~ at its begin (see ``UniformPath``), d the stride, and
    what the points of stride i add to the state at its end,

        s[i] = sum_j Phi^(d-1-j) gamma u[i d + j],
        y[k] = c Phi^(k d) x~ + sum_{i<k} c Phi^((k-1-i) d) s[i] + feed u[k d],

    for k = 1 to R; the next row begins with the same sum for k = R, without c and feed. Over all
    rows of a stretch the sums are matrix products. A stride of many points becomes s first, n
    numbers, which then make the rows; one of few goes into the rows itself, and gamma into their
    matrix. Source: Chen and Francis 1995, *Optimal Sampled-Data Control Systems*, chapter 8
    (lifting); from memory.

    Several chains that differ in their values alone stand side by side, D of them.

    Parameters
    ----------
    row : R
    sums : from the points of a stride to s, shape (D, stride, n); None if they go into the rows
    forced : from a row to the state at its end and its outputs, shape (D, R entries, n + q R)
    free : the same from the state at its begin, less the identity, shape (D, n, n + q R)
    feed : what the outputs see of u itself, shape (p, D)
    moved : whether an output sees the state at all; q of them do
    """

    stride: int
    row: int
    sums: Real | None
    forced: Real
    free: Real
    feed: Real
    moved: tuple[bool, ...]

    @classmethod
    def of(cls, step: Real, sums: Real, outputs: Outputs, feed: Real, row: int) -> Self:
        """Prepare a row.

        Parameters
        ----------
        step : over a stride, less the identity, shape (n, n)
        sums : Phi^age gamma for ages d - 1 down to 0, shape (d, n)
        """
        stride, n = sums.shape
        entry = entries(stride, n)
        ages, whole = weights_of(step, np.eye(n), row)
        weights = ages if entry < stride else weights_of(step, sums.T, row)[0]
        moved = np.any(outputs.c, axis=1)
        c = outputs.c[moved]
        response, decay = c @ weights, (c + c @ step) @ ages
        forced = np.zeros((len(c), row, row * entry))
        for k in range(1, row + 1):
            forced[:, k - 1, : k * entry] = response[:, (row - k) * entry :]
        free = decay.reshape(len(c), row, n)[:, ::-1]
        return cls(
            stride,
            row,
            sums[None] if entry < stride else None,
            np.ascontiguousarray(np.concatenate([weights, *forced]).T)[None],
            np.ascontiguousarray(np.concatenate([whole, *free]).T)[None],
            feed[:, None],
            tuple(moved.tolist()),
        )

    @classmethod
    def beside(cls, parts: Sequence[Self]) -> Self:
        """Put chains side by side that are ``alike``."""
        first = parts[0]
        sums = [part.sums for part in parts if part.sums is not None]
        return cls(
            first.stride,
            first.row,
            np.concatenate(sums) if sums else None,
            np.concatenate([part.forced for part in parts]),
            np.concatenate([part.free for part in parts]),
            np.concatenate([part.feed for part in parts], axis=1),
            first.moved,
        )

    @property
    def alike(self) -> tuple[object, ...]:
        """What chains side by side have in common."""
        return self.stride, self.row, self.forced.shape[1:], self.moved

    def advance(self, x: Real, points: Real, y: Real) -> None:
        """Fill in the outputs, and advance the states in place.

        Parameters
        ----------
        x : states x~ at the first point, shape (D, n)
        points : K stride + 1 of them, K a multiple of R
        y : outputs at every stride-th point, the first one a stride after points[0], shape
            (p, D, K)
        """
        rows = points[:-1]
        if self.sums is not None:
            rows = rows.reshape(-1, self.stride) @ self.sums
        rows = rows.reshape(*rows.shape[:-2], -1, self.forced.shape[1])
        found = product(rows, self.forced)
        kernels.follow(x, self.free, found)
        begin = x.shape[1]
        for i, feed in enumerate(self.feed):
            if self.moved[i]:
                kernels.pick(found, begin, feed, points, y[i])
                begin += self.row
            else:
                np.multiply(points[self.stride :: self.stride], feed[:, None], out=y[i])


def product(rows: Real, matrix: Real) -> Real:
    """Return rows @ matrix, in pieces of at most ``PRODUCT`` multiplications."""
    most = max(PRODUCT // max(matrix[0].size, 1), 1)
    starts = range(0, rows.shape[-2], most)
    parts = [rows[..., start : start + most, :] @ matrix for start in starts]
    return parts[0] if len(parts) == 1 else np.concatenate(parts, axis=1)


def weights_of(e: Real, gamma: Real, count: int) -> tuple[Real, Real]:
    """Return (I + E)^age gamma for ages count - 1 down to 0, side by side, and (I + E)^count - I.

    Parameters
    ----------
    gamma : shape (n, m);  count : a power of two

    Returns
    -------
    Shapes (n, count m) and (n, n).
    """
    columns, square, ages = gamma, e, 1
    while ages < count:
        columns = np.concatenate([columns + square @ columns, columns], axis=1)
        square, ages = joined(square, square), 2 * ages
    return columns, square
