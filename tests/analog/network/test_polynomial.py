"""Exact polynomials: division, common factors, interpolation."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.analog.network.polynomial import (
    Polynomial,
    added,
    common_factor,
    derivative,
    divided,
    polynomial,
    through,
)

COEFFICIENTS = st.fractions(min_value=-100, max_value=100, max_denominator=64)
POLYNOMIALS = st.lists(COEFFICIENTS, max_size=6).map(polynomial)


def _times(p: Polynomial, q: Polynomial) -> Polynomial:
    if not p or not q:
        return ()
    result = [Fraction(0)] * (len(p) + len(q) - 1)
    for i, x in enumerate(p):
        for j, y in enumerate(q):
            result[i + j] += x * y
    return polynomial(result)


def _at(p: Polynomial, s: Any) -> Any:
    return sum((value * s**k for k, value in enumerate(p)), Fraction(0))


@given(p=POLYNOMIALS, q=POLYNOMIALS.filter(bool))
def test_division_gives_back_the_whole(p: Polynomial, q: Polynomial) -> None:
    """quotient · q + remainder = p, the remainder of lower degree."""
    quotient, remainder = divided(p, q)
    assert added(_times(quotient, q), remainder, Fraction(1)) == p
    assert len(remainder) < len(q)


@given(p=POLYNOMIALS.filter(bool), q=POLYNOMIALS.filter(bool), shared=POLYNOMIALS.filter(bool))
def test_common_factor_holds_what_was_put_in(
    p: Polynomial, q: Polynomial, shared: Polynomial
) -> None:
    """The common factor of p r and q r divides both, is divided by r, and has leading one."""
    first, second = _times(p, shared), _times(q, shared)
    factor = common_factor(first, second)
    assert factor[-1] == 1
    assert not divided(first, factor)[1]
    assert not divided(second, factor)[1]
    assert not divided(factor, shared)[1]


def test_strangers_share_nothing() -> None:
    """(s + 1)(s + 2) and (s + 3): the factor is one; with zero it is the other one."""
    assert common_factor((Fraction(2), Fraction(3), Fraction(1)), (Fraction(3), Fraction(1))) == (
        1,
    )
    assert common_factor((Fraction(4), Fraction(2)), ()) == (2, 1)


@given(p=POLYNOMIALS, first=st.integers(-5, 20))
def test_interpolation_gives_back_the_polynomial(p: Polynomial, first: int) -> None:
    """Seven values at whole numbers in a row belong to one polynomial of degree up to six."""
    values = [_at(p, Fraction(first + k)) for k in range(7)]
    assert through(first, values) == p


def test_derivative() -> None:
    """d/ds (5 + 3 s + 2 s²) = 3 + 4 s, and of a constant nothing."""
    assert derivative((Fraction(5), Fraction(3), Fraction(2))) == (3, 4)
    assert derivative((Fraction(5),)) == ()
