"""Rows of outputs at a stride: each is what the steps from point to point give."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.simulation.lifted import (
    PRODUCT,
    Lifted,
    entries,
    product,
    row_length,
    weights_of,
)
from frontend_sim.simulation.path import Outputs


def steps(phi: np.ndarray, count: int) -> np.ndarray:
    """Return Phi^count - I."""
    return np.asarray(np.linalg.matrix_power(phi, count) - np.eye(len(phi)))


@settings(max_examples=60, deadline=None)
@given(
    st.integers(0, 5),
    st.integers(1, 40),
    st.sampled_from([1, 2, 8]),
    st.integers(1, 4),
    st.integers(1, 3),
    st.integers(0, 2**32 - 1),
)
def test_rows_are_the_steps_from_point_to_point(
    n: int, stride: int, row: int, rows: int, chains: int, seed: int
) -> None:
    """Of any order and stride, also an output that sees no state: y = c x~ + feed u, x~ by steps.

    The oracle is the recursion itself, one point after the other; several chains stand side by
    side.
    """
    rng = np.random.default_rng(seed)
    points = rng.standard_normal(rows * row * stride + 1)
    states, y = rng.standard_normal((chains, n)), np.empty((3, chains, rows * row))
    expected, reached, parts = np.empty_like(y), states.copy(), []
    for i, x in enumerate(reached):
        phi = 0.9 * np.eye(n) + 0.05 * np.tril(rng.standard_normal((n, n)), -1)
        gamma, feed = rng.standard_normal(n), rng.standard_normal(3)
        c = rng.standard_normal((3, n))
        c[1] = 0.0
        sums = np.array([np.linalg.matrix_power(phi, age) @ gamma for age in range(stride)])[::-1]
        outputs = Outputs(c, np.zeros(3), 0.0)
        step = steps(phi, stride)
        parts.append(Lifted.of(step, np.ascontiguousarray(sums), outputs, feed, row))
        for j, u in enumerate(points[:-1]):
            x[:] = phi @ x + gamma * u
            if (j + 1) % stride == 0:
                expected[:, i, (j + 1) // stride - 1] = c @ x + feed * points[j + 1]
    Lifted.beside(parts).advance(states, points, y)
    np.testing.assert_allclose(y, expected, rtol=0.0, atol=1e-11)
    np.testing.assert_allclose(states, reached, rtol=0.0, atol=1e-11)


def test_a_stride_of_many_points_becomes_its_sums() -> None:
    """Few points of a stride make the rows themselves; many are as many numbers as states."""
    assert [entries(stride, 8) for stride in (1, 16, 17, 50)] == [1, 16, 8, 8]
    assert entries(50, 0) == 50


def test_rows_are_longer_where_an_output_costs_less() -> None:
    """A power of two, 32 where every point is an output, shorter for more entries or outputs."""
    assert [row_length(*given) for given in ((1, 1), (8, 1), (8, 4), (600, 1))] == [32, 8, 4, 1]


@pytest.mark.parametrize("count", [1, 127, 1000])
def test_pieces_of_a_product_make_the_whole(count: int) -> None:
    """A product beyond the limit is made in pieces that stay below it."""
    rng = np.random.default_rng(count)
    rows, matrix = rng.standard_normal((count, 64)), rng.standard_normal((64, 64))
    assert 127 * matrix.size < PRODUCT < 1000 * matrix.size
    found = product(rows, np.array([matrix, 2.0 * matrix]))
    np.testing.assert_allclose(found[0], rows @ matrix, rtol=0.0, atol=1e-12)
    assert np.array_equal(found[1], 2.0 * found[0])


def test_weights_are_powers_of_the_step() -> None:
    """Side by side from the oldest to the newest: (I + E)^3 g, (I + E)^2 g, (I + E) g, g; and the
    step over all of them.
    """
    phi, gamma = np.array([[0.5, 0.0], [0.25, 0.75]]), np.array([[1.0, 2.0], [4.0, 8.0]])
    found, step = weights_of(phi - np.eye(2), gamma, 4)
    powers = [np.linalg.matrix_power(phi, age) @ gamma for age in (3, 2, 1, 0)]
    assert np.array_equal(found, np.hstack(powers))
    assert np.array_equal(step, steps(phi, 4))
