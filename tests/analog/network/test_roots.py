"""Roots of exact polynomials, however long, however far apart, however often they come."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.analog.network.polynomial import Polynomial, polynomial
from frontend_sim.analog.network.roots import roots_of


def _product(roots: Sequence[complex], leading: Fraction = Fraction(1)) -> Polynomial:
    """Return the exact polynomial of roots, complex ones given by the upper of each pair."""
    result = [leading]
    for root in roots:
        real, imaginary = Fraction(root.real), Fraction(root.imag)
        factor = [-real, Fraction(1)]
        if imaginary:
            factor = [real * real + imaginary * imaginary, -2 * real, Fraction(1)]
        product = [Fraction(0)] * (len(result) + len(factor) - 1)
        for i, x in enumerate(result):
            for j, y in enumerate(factor):
                product[i + j] += x * y
        result = product
    return polynomial(result)


def _assert_found(roots: Sequence[complex], rtol: float = 2e-16) -> None:
    true = [*roots, *(root.conjugate() for root in roots if root.imag)]
    found = roots_of(_product(roots, Fraction(7, 3)))
    assert len(found) == len(true)
    for root in true:
        nearest = min(found, key=lambda other: abs(other - root))
        assert abs(nearest - root) <= rtol * abs(root)
        found.remove(nearest)


def test_roots_twenty_decades_apart() -> None:
    """Each to the last digit of a double."""
    _assert_found([complex(-(10.0**k) * 1.234567) for k in range(-10, 11)])


def test_equal_roots_are_found_as_often_as_they_come() -> None:
    """Single, double, triple and fivefold roots, real and complex and at the origin."""
    _assert_found([-1.0, -3.0, -3.0, *[-2e5] * 3, *[-7e-4] * 5, 0.0, 0.0])
    _assert_found([complex(-1.0, 2.0)] * 3 + [complex(-5e3, 1e-3)] * 2)


def test_neighbours_are_told_apart() -> None:
    """Roots a relative 1e-12 apart; p of them is 1e-24, below the rounding of any double."""
    _assert_found([-1.0, -1.000000000001, -1e6, -1.000001e6])
    _assert_found([complex(-1e-9, 1.0), complex(-1e-9, 1.0000001)])


def test_neighbours_that_no_double_tells_apart() -> None:
    """Two real roots, or a pair, a relative 1e-20 apart: a double root to the last digits."""
    gap = Fraction(1, 10**20)
    for constant in (1 - gap * gap, 1 + gap * gap):
        found = roots_of((constant, Fraction(2), Fraction(1)))
        np.testing.assert_allclose(found, [-1.0, -1.0], rtol=2e-15)


def test_the_axis_is_kept() -> None:
    """Real parts of zero stay zero, and small ones keep their own digits."""
    found = roots_of(_product([1j, 3j, complex(-1e-15, 2.0)]))
    parts = sorted({root.real for root in found})
    assert parts == [pytest.approx(-1e-15, rel=1e-12), 0.0]


def test_wilkinsons_polynomial() -> None:
    """Roots 1 to 20, whose expanded coefficients no floating-point routine survives (Wilkinson
    1959, from memory)."""
    _assert_found([complex(k) for k in range(1, 21)], rtol=0.0)


ROOTS = st.lists(
    st.builds(
        lambda size, part: complex(-(10.0**size)) * complex(part, (1.0 - part * part) ** 0.5),
        st.floats(-6.0, 9.0),
        st.sampled_from([1.0, 0.9, 0.5, 0.01, 1e-6]),
    ).map(lambda root: root.conjugate() if root.imag < 0.0 else root),
    min_size=1,
    max_size=8,
)


@given(roots=ROOTS)
@settings(max_examples=100, deadline=None)
def test_any_roots_are_found(roots: list[complex]) -> None:
    """Fifteen decades, dampings down to 1e-6: to the last digits of each part's magnitude."""
    _assert_found(roots, rtol=1e-15)


def test_conjugates_are_exact() -> None:
    """Complex roots come in pairs that differ in one sign only."""
    found = np.array(roots_of(_product([complex(-1.0, 3.0), complex(-2e6, 1e3)])))
    np.testing.assert_array_equal(np.sort_complex(found), np.sort_complex(found.conj()))
