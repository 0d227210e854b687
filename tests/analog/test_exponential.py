"""exp(M) - I against mpmath at 50 digits, and the laws that powers and joints keep."""

from __future__ import annotations

from typing import Any

import mpmath as mp
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.exponential import augmented, expm1, joined, power
from frontend_sim.analog.stages import RcHighpass, RcLowpass, SecondOrder

Real = NDArray[np.float64]

STIFF = chain_of(
    [
        RcLowpass(resistance=100.0, capacitance=1e-9),
        RcHighpass(resistance=1e6, capacitance=1e-5),
        SecondOrder(corner=800.0, quality_factor=2.0),
        RcLowpass(resistance=1e3, capacitance=1e-3),
    ]
).a
"""Time constants from 100 ns to 10 s, a fast stage before slow ones."""


def _true(matrix: Real) -> Real:
    """Return exp(M) - I at 50 digits."""
    with mp.workdps(50):
        size = len(matrix)
        extra = int(np.max(np.sum(np.abs(matrix), axis=1)))
        with mp.workdps(60 + extra):
            whole = mp.expm(mp.matrix(matrix.tolist()), method="taylor") - mp.eye(size)
        return np.array([[float(whole[i, j]) for j in range(size)] for i in range(size)])


MATRICES: dict[str, Real] = {
    "slow": np.array([[-1e-12]]),
    "fast": np.array([[-200.0]]),
    "slow beside fast": np.array([[-300.0, 0.0], [1e-6, -1e-6]]),
    "fast behind slow": np.array([[-1e-9, 0.0], [250.0, -250.0]]),
    "equal": np.array([[-2.0, 0.0, 0.0], [2.0, -2.0, 0.0], [0.0, 2.0, -2.0]]),
    "integrators": np.diag(np.full(5, 37.0), -1),
    "integrator behind a pole": np.array([[-9.0, 0.0], [4.0, 0.0]]),
    "rotation": np.array([[0.0, 60.0], [-60.0, 0.0]]),
    "ringing": np.array([[0.0, 90.0], [-90.0, -0.9]]),
    "triangular": np.tril(np.arange(1.0, 26.0).reshape(5, 5)) / -5.0,
    "dense": np.random.default_rng(5).standard_normal((6, 6)),
    "stiff chain, 1 us": STIFF * 1e-6,
    "stiff chain, 20 us": STIFF * 2e-5,
}


@pytest.mark.parametrize("name", MATRICES)
def test_agrees_with_mpmath(name: str) -> None:
    """Every entry to 1e-13 of the largest in its row, whose size is that of the mode's own change.

    For a slow mode that is the relative accuracy of its rate, 1e-12 as it may be.
    """
    matrix = MATRICES[name]
    true, found = _true(matrix), expm1(matrix)
    size = np.max(np.abs(true), axis=1, keepdims=True)
    assert np.all(np.abs(found - true) <= 1e-13 * size)


@pytest.mark.parametrize("tau", [1.0, 1e3, 1e6, 1e9])
def test_slow_modes_keep_their_relative_accuracy(tau: float) -> None:
    """A mode up to 1e15 times slower than its fast neighbours decays at its own rate, to 1e-14."""
    matrix = np.diag([-1.0 / tau, -1e6, -2e6]) * 1e-3
    matrix[0, 1] = matrix[1, 2] = 0.0
    found = np.diag(expm1(matrix))
    np.testing.assert_allclose(found, np.expm1(np.diag(matrix)), rtol=1e-14)


def test_nilpotent_matrices_are_polynomials() -> None:
    """A chain of integrators: entry (i, j) is t^(i-j)/(i-j)!, to rounding, over any time."""
    for t in (1e-6, 1.0, 1e5):
        found = expm1(np.diag(np.full(4, t), -1))
        true = [[t**k / float(mp.factorial(k)) if (k := i - j) > 0 else 0 for j in range(5)]
                for i in range(5)]  # fmt: skip
        np.testing.assert_allclose(found, true, rtol=1e-14)


def test_a_turn_by_many_cycles_stays_a_turn() -> None:
    """A rotation by 1000 cycles: exact to the rounding of the angle itself, 1e-12."""
    angle = 2.0 * np.pi * 1000.25
    e = expm1(np.array([[0.0, angle], [-angle, 0.0]]))
    np.testing.assert_allclose(e + np.eye(2), [[0.0, 1.0], [-1.0, 0.0]], atol=1e-11)


def test_nothing_and_very_much() -> None:
    """An empty matrix, a zero matrix, and a mode that has long died out."""
    assert expm1(np.zeros((0, 0))).shape == (0, 0)
    np.testing.assert_array_equal(expm1(np.zeros((3, 3))), 0.0)
    np.testing.assert_array_equal(expm1(np.array([[-1e15]])), -1.0)


SQUARE = st.integers(1, 4).flatmap(
    lambda n: st.lists(
        st.lists(st.floats(-1.0, 1.0).map(lambda v: round(v, 9)), min_size=n, max_size=n),
        min_size=n,
        max_size=n,
    )
)


@given(rows=SQUARE, first=st.floats(0.01, 3.0), second=st.floats(0.01, 3.0))
@settings(deadline=None)
def test_intervals_join(rows: Any, first: float, second: float) -> None:
    """E(s + t) = E(s) + E(t) + E(s) E(t) for any matrix."""
    matrix = np.array(rows)
    both = joined(expm1(matrix * first), expm1(matrix * second))
    atol = 1e-13 * np.exp(np.max(np.sum(np.abs(matrix), axis=1)) * (first + second))
    np.testing.assert_allclose(both, expm1(matrix * (first + second)), rtol=0, atol=atol)


@given(rows=SQUARE, count=st.integers(0, 300))
@settings(deadline=None)
def test_powers_are_repeated_steps(rows: Any, count: int) -> None:
    """(I + E)^count - I by doubling equals the exponential of the whole time."""
    matrix = np.array(rows) * 0.01
    found = power(expm1(matrix), count)
    atol = 1e-12 * np.exp(np.max(np.sum(np.abs(matrix), axis=1)) * count)
    np.testing.assert_allclose(found, expm1(matrix * count), rtol=0, atol=atol)


def test_powers_keep_slow_modes() -> None:
    """A million steps of a mode that loses 1e-12 in each lose 1e-6, to 1e-13 of it."""
    step = expm1(np.array([[-1e-12]]))
    assert power(step, 1_000_000)[0, 0] == pytest.approx(np.expm1(-1e-6), rel=1e-13)


def test_powers_follow_steps_one_by_one() -> None:
    """The same as multiplying step after step, for a chain with equal poles."""
    e = expm1(MATRICES["equal"] * 0.07)
    whole = np.eye(3)
    for _ in range(13):
        whole = whole @ (np.eye(3) + e)
    np.testing.assert_allclose(power(e, 13), whole - np.eye(3), rtol=1e-13)


def test_the_augmented_system_is_chain_and_generator() -> None:
    """A held input through 1/(1 + s): the column of the generator is 1 - exp(-t)."""
    whole = augmented(np.array([[-1.0]]), np.array([1.0]), np.zeros((1, 1)), np.ones(1))
    np.testing.assert_array_equal(whole, [[-1.0, 1.0], [0.0, 0.0]])
    np.testing.assert_allclose(expm1(whole * 0.3), [[np.expm1(-0.3), -np.expm1(-0.3)], [0, 0]])
