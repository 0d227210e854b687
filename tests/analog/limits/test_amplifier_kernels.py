"""Pieces that go on for certain, and those where a limit begins or ends at a point of the grid."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from numpy.typing import NDArray

from frontend_sim.analog.limits import AmplifierLoop, Segments, Touched

Real = NDArray[np.float64]

STEP = 0.25
"""Length of a piece, in time constants."""


def follower(high: float) -> AmplifierLoop:
    """Return a buffer with dw/dt = u - w below its upper rail."""
    free, held = np.array([[-1.0, 1.0, 0.0]]), np.array([[0.0, 0.0, 1.0]])
    output, inf = np.array([1.0, 0.0]), np.inf
    return AmplifierLoop(range(1), free, held, None, output, 0.0, inf, inf, -inf, high)


def unlimited(u: Real) -> Real:
    """Return w at the ends of pieces with a line from point to point as input, from rest."""
    w = [u[0]]
    for begin, end in pairwise(u):
        slope = (end - begin) / STEP
        w.append(end - slope + (w[-1] - begin + slope) * np.exp(-STEP))
    return np.array(w[1:])


def advanced(limiter: AmplifierLoop, u: Real, at_once: int) -> tuple[Real, list[Touched]]:
    """Return w at the ends of pieces that are advanced some at once, and what was touched."""
    state, plain, found, told = limiter.start(float(u[0]), 0.0), unlimited(u), [], []
    for first in range(0, len(plain), at_once):
        here = slice(first, first + at_once)
        length = np.full(len(plain[here]), STEP)
        lines = u[:-1][here], u[1:][here], plain[here]
        span = Segments(length, *lines, 0.0, np.empty(0, np.int64))
        state, d, _, touched = limiter.advance(state, span)
        found.append(d)
        told.append(touched)
    return np.concatenate(found) + plain, told


def test_a_rail_that_is_met_at_a_point_of_the_grid_holds_behind_it() -> None:
    """An output that arrives there and whose input turns back does not swing over the rail.

    The input falls from 2 V to -8 V within a piece; the output is held until the input passes 1 V.
    """
    rise = np.linspace(0.0, 1.0, 7)
    u = np.append(rise / unlimited(rise)[-1], [-8.0, -8.0])
    found, (touched,) = advanced(follower(1.0), u, len(u))
    slope = (-8.0 - u[6]) / STEP
    held = (1.0 - u[6]) / slope
    left = STEP - held
    expected = -8.0 - slope + slope * np.exp(-left)
    np.testing.assert_allclose(found[5:7], [1.0, expected], rtol=0, atol=1e-10)
    np.testing.assert_allclose(touched.time, [held, 0.0, 0.0, 0.0], rtol=1e-9, atol=0)
    np.testing.assert_array_equal(advanced(follower(1.0), u, 1)[0], found)


@pytest.mark.parametrize("at_once", [1, 4, 20])
def test_a_limit_that_begins_with_a_piece_is_told(at_once: int) -> None:
    """Where a rail is met by the last digits of a piece, the next ones tell when it was first."""
    u = np.linspace(0.0, 12.0 * STEP, 13, dtype=np.float64)
    end = unlimited(u)[5]
    for units in range(-40, 41):
        # The rail counts as met a few 1e-12 V above it.
        high = end - 0.5e-11 * (1.0 + end) + units * np.spacing(end)
        _, told = advanced(follower(high), u, at_once)
        for touched in told:
            np.testing.assert_array_equal(touched.time > 0.0, touched.piece >= 0)
        first, where = next((t, k) for k, t in enumerate(told) if t.piece[0] >= 0)
        begun = (where * at_once + first.piece[0]) * STEP + first.since[0]
        assert begun == pytest.approx(6.0 * STEP, abs=1e-10)
