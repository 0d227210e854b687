"""Many outputs at a fixed stride over uniform points, by a few matrix products."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.exponential import joined, power
from frontend_sim.simulation import kernels
from frontend_sim.simulation.path import Outputs

LONGEST_ROW = 32
"""Most outputs in one row of the products."""
STEP_COST = 600.0
"""What a step of the recursion costs, in multiplications of a matrix product, about; it only sets
the length of rows."""


def row_length(stride: int, outputs: int) -> int:
    """Return how many outputs make one row, a power of two.

    A longer row saves steps of the recursion, and costs multiplications that meet a zero: the sum
    STEP_COST / row + row · stride · outputs is least at the square root of their quotient.
    """
    best = math.sqrt(STEP_COST / (stride * max(outputs, 1)))
    return 1 << min(max(round(math.log2(best)), 0), LONGEST_ROW.bit_length() - 1)


@dataclass(frozen=True, eq=False)
class Lifted:
    """One row of R outputs, ``stride`` points apart, from its R · stride points and the state.

    With the points u of a row, the state x~ at its begin (see ``UniformPath``), and h the impulse
    response, h[a] = c Phi^a gamma,

        y[k] = c Phi^(k stride) x~ + sum_j h[k stride - 1 - j] u[j] + feed u[k stride],

    for k = 1 to R. All rows of a stretch make one product with the Toeplitz matrix of h. The point
    of k = R is the first of the next row and is added apart. Source: Chen and Francis 1995,
    *Optimal Sampled-Data Control Systems*, chapter 8 (lifting); from memory.

    Parameters
    ----------
    impulse : shape (p, R stride, R);  decay : shape (p, n, R)
    weights : from points to the state at the end of a row, shape (R stride, n)
    step : state from row to row, less the identity, shape (1, n, n);  reach : of it, see kernels
    feed : what the outputs see of u itself, shape (p,)
    moved : whether an output sees the state at all, shape (p,)
    """

    stride: int
    impulse: Real
    decay: Real
    weights: Real
    step: Real
    reach: kernels.Index
    feed: Real
    moved: tuple[bool, ...]

    @classmethod
    def of(
        cls, e: Real, weights: Real, outputs: Outputs, feed: Real, stride: int, row: int
    ) -> Self:
        """Prepare a row.

        Parameters
        ----------
        e : step from point to point, less the identity, shape (n, n)
        weights : Phi^age gamma for ages L - 1 down to 0, L at least row · stride, shape (n, L)
        """
        length = row * stride
        p, n = outputs.c.shape
        impulse, decay = np.zeros((p, length, row)), np.empty((p, n, row))
        response = outputs.c @ weights
        one = after = power(e, stride)
        for k in range(1, row + 1):
            after = one if k == 1 else joined(after, one)
            decay[:, :, k - 1] = outputs.c + outputs.c @ after
            impulse[:, : k * stride, k - 1] = response[:, weights.shape[1] - k * stride :]
            if k < row:
                impulse[:, k * stride, k - 1] += feed
        return cls(
            stride,
            impulse,
            decay,
            np.ascontiguousarray(weights[:, -length:].T),
            after[None],
            kernels.reach(e),
            feed,
            tuple(np.any(outputs.c, axis=1).tolist()),
        )

    @property
    def row(self) -> int:
        """Outputs in one row."""
        return int(self.impulse.shape[2])

    def advance(self, x: Real, points: Real, y: Real) -> None:
        """Fill in the outputs, and advance the state in place.

        Parameters
        ----------
        x : state x~ at the first point, shape (n,)
        points : K stride + 1 of them, K a multiple of R
        y : outputs at every stride-th point, the first one a stride after points[0], shape (p, K)
        """
        length, row = self.impulse.shape[1], self.row
        rows = points[:-1].reshape(-1, length)
        states = np.empty((len(rows) + 1, len(x)))
        states[0] = x
        which = np.zeros(len(rows), np.int64)
        kernels.recur(x, self.step, self.reach, which, rows @ self.weights, states[1:])
        for i, feed in enumerate(self.feed):
            if not self.moved[i]:
                np.multiply(points[self.stride :: self.stride], feed, out=y[i])
                continue
            part = y[i].reshape(-1, row)
            np.matmul(rows, self.impulse[i], out=part)
            part += states[:-1] @ self.decay[i]
            part[:, -1] += feed * points[length::length]
