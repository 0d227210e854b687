"""Small blocks: their transfer function, poles and polynomials against complex arithmetic."""

from __future__ import annotations

from typing import Any

import mpmath as mp
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.analog.block import (
    Block,
    first_order,
    gain_block,
    second_order,
    two_real_poles,
)

S = 2j * np.pi * np.logspace(-1, 7, 33)
"""Eight decades around the rates below."""

RATES = st.floats(1.0, 1e6)
WEIGHTS = st.floats(-2.0, 2.0).map(lambda value: round(value, 6))
ENTRIES = st.floats(-1e3, 1e3).map(lambda value: round(value, 6))


def _size(*parts: Any) -> Any:
    """Return the size of the terms of a sum, which its rounding is a share of."""
    return sum(np.abs(part) for part in parts)


@given(rate=RATES, n1=WEIGHTS, n0=WEIGHTS)
def test_first_order_is_its_quotient(rate: float, n1: float, n0: float) -> None:
    """(n1 s + n0)/(s - pole), to rounding of its numerator's terms."""
    block = first_order(-rate, (n1, n0 * rate))
    true = (n1 * S + n0 * rate) / (S + rate)
    size = _size(n1 * S, n1 * rate, n0 * rate) / np.abs(S + rate)
    assert np.all(np.abs(block.response(S) - true) <= 1e-14 * size)


@given(natural=RATES, q=st.floats(0.05, 1e4), n=st.tuples(WEIGHTS, WEIGHTS, WEIGHTS))
def test_second_order_is_its_quotient(
    natural: float, q: float, n: tuple[float, float, float]
) -> None:
    """(n2 s² + n1 s + n0)/(s² + s w0/Q + w0²), to rounding of numerator and denominator."""
    n2, n1, n0 = n[0], n[1] * natural, n[2] * natural**2
    rate = natural / q
    block = second_order(natural, rate, (n2, n1, n0))
    bottom = S * S + rate * S + natural**2
    true = (n2 * S * S + n1 * S + n0) / bottom
    terms = _size(n2 * S * S, n1 * S, n2 * rate * S, n0, n2 * natural**2)
    size = terms / np.abs(bottom) * (_size(S * S, rate * S, natural**2) / np.abs(bottom))
    assert np.all(np.abs(block.response(S) - true) <= 1e-14 * size)


@given(p1=st.just(0.0) | RATES, p2=st.just(0.0) | RATES, n=st.tuples(WEIGHTS, WEIGHTS, WEIGHTS))
def test_two_real_poles_are_their_quotient(
    p1: float, p2: float, n: tuple[float, float, float]
) -> None:
    """Two real poles with any numerator, equal poles and poles at the origin too."""
    block = two_real_poles(-p1, -p2, n)
    bottom = (S + p1) * (S + p2)
    true = (n[0] * S * S + n[1] * S + n[2]) / bottom
    fast = max(p1, p2)
    terms = _size(n[0] * S * S, n[1] * S, n[2], n[0] * fast * S, n[0] * p1 * p2, n[1] * fast)
    assert np.all(np.abs(block.response(S) - true) <= 1e-13 * terms / np.abs(bottom))
    found = sorted(block.poles.real)
    np.testing.assert_array_equal(found, sorted([-p1, -p2]))


def test_two_real_poles_far_apart_reach_the_output_at_the_signals_size() -> None:
    """A notch over poles of 1 and 1e9 rad/s has weights of about one: nothing cancels in time."""
    for p1, p2 in ((-1.0, -1e9), (-1e9, -1.0), (0.0, -1e9)):
        block = two_real_poles(p1, p2, (1.0, 0.0, 9e6))
        assert np.max(np.abs(block.c)) < 2.0


def test_states_have_the_size_of_the_signal() -> None:
    """Each row of a is scaled to its own pole: at rest on 1 V the largest state is 1 V."""
    blocks = [
        first_order(-1e7, (0.0, 1e7)),
        second_order(0.1, 0.02, (0.0, 0.0, 0.01)),
        two_real_poles(-1e-3, -1e8, (0.0, 0.0, 1e5)),
    ]
    for block in blocks:
        x = np.linalg.solve(block.a, -block.b)
        assert np.max(np.abs(x)) == pytest.approx(1.0, rel=1e-12)


@given(a=st.tuples(*[ENTRIES] * 4))
@settings(max_examples=200)
def test_poles_of_two_states_agree_with_mpmath(a: tuple[float, ...]) -> None:
    """Poles in closed form against the eigenvalues at 50 digits, as far as a float can tell them.

    A pole of a pair that is nearly equal moves with the root of the rounding, so the comparison is
    of sum and product.
    """
    block = Block.of([a[:2], a[2:]], [1.0, 0.0], [1.0, 0.0], 0.0)
    total, product = block.poles.sum(), block.poles.prod()
    with mp.workdps(50):
        trace = mp.mpf(a[0]) + mp.mpf(a[3])
        determinant = mp.mpf(a[0]) * mp.mpf(a[3]) - mp.mpf(a[1]) * mp.mpf(a[2])
    size = abs(a[0] * a[3]) + abs(a[1] * a[2])
    assert abs(total - complex(trace)) <= 1e-14 * (abs(a[0]) + abs(a[3]) + size**0.5)
    assert abs(product - complex(determinant)) <= 1e-13 * size


def test_small_pole_beside_a_large_one_keeps_its_digits() -> None:
    """The smaller of two real poles comes from the product, so it is right to the last digits."""
    block = second_order(1.0, 1e8, (0.0, 0.0, 1.0))
    with mp.workdps(50):
        true = -1 / (mp.mpf("0.5e8") + mp.sqrt(mp.mpf("0.25e16") - 1))
    assert np.max(block.poles.real) == pytest.approx(float(true), rel=1e-15)


@pytest.mark.parametrize("order", [0, 1, 2, 3])
def test_polynomials_are_the_response(order: int) -> None:
    """Numerator over denominator gives the response for every order, a general one too."""
    rng = np.random.default_rng(3)
    a = rng.standard_normal((order, order)) - 2.0 * np.eye(order)
    block = Block.of(a, rng.standard_normal(order), rng.standard_normal(order), 0.7)
    numerator, denominator = block.polynomials()
    assert denominator[0] == 1.0
    s = 1j * np.logspace(-2, 2, 9)
    x = [block.c @ np.linalg.solve(si * np.eye(order) - a, block.b) + block.d for si in s]
    np.testing.assert_allclose(np.polyval(numerator, s) / np.polyval(denominator, s), x, rtol=1e-12)
    np.testing.assert_allclose(block.response(s), x, rtol=1e-12)


@given(rate=RATES, scale=st.floats(-10.0, 10.0))
def test_a_zero_at_the_origin_is_exactly_there(rate: float, scale: float) -> None:
    """Blocks without n0 pass exactly nothing at zero frequency, whatever their scale."""
    for block in (
        first_order(-rate, (scale, 0.0)),
        second_order(rate, 0.3 * rate, (scale, 0.0, 0.0)),
        second_order(rate, 0.3 * rate, (0.0, scale * rate, 0.0)),
    ):
        assert block.response(np.zeros(1))[0] == 0.0
        x = np.linalg.solve(block.a, -block.b)
        assert block.c @ x + block.d == 0.0


def test_a_block_is_frozen() -> None:
    """Nobody can change a block's matrices behind the chain's back."""
    block = gain_block(2.0)
    assert block.order == 0
    assert len(block.poles) == 0
    np.testing.assert_array_equal(block.response(S), 2.0)
    with pytest.raises(ValueError, match="read-only"):
        first_order(-1.0, (0.0, 1.0)).a[0, 0] = 5.0
