"""Polynomials with exact rational coefficients, the lowest power first, without leading zeros."""

from __future__ import annotations

import math
from collections.abc import Sequence
from fractions import Fraction

Polynomial = tuple[Fraction, ...]
"""Coefficients of s^0, s^1, ...; the empty tuple is zero."""

_PRIME = 2**61 - 1
"""Modulus of the quick test whether two polynomials share a root."""


def polynomial(coefficients: Sequence[Fraction]) -> Polynomial:
    """Return the coefficients as a polynomial, leading zeros taken off."""
    length = len(coefficients)
    while length and coefficients[length - 1] == 0:
        length -= 1
    return tuple(coefficients[:length])


def added(first: Polynomial, second: Polynomial, factor: Fraction) -> Polynomial:
    """Return first + factor · second."""
    length = max(len(first), len(second))
    a = first + (Fraction(0),) * (length - len(first))
    b = second + (Fraction(0),) * (length - len(second))
    return polynomial([x + factor * y for x, y in zip(a, b, strict=True)])


def derivative(p: Polynomial) -> Polynomial:
    """Return dp/ds."""
    return polynomial([k * value for k, value in enumerate(p)][1:])


def divided(p: Polynomial, by: Polynomial) -> tuple[Polynomial, Polynomial]:
    """Return quotient and remainder."""
    rest = list(p)
    quotient = [Fraction(0)] * max(len(p) - len(by) + 1, 0)
    for k in range(len(quotient) - 1, -1, -1):
        factor = rest[k + len(by) - 1] / by[-1]
        quotient[k] = factor
        if factor:
            for i, value in enumerate(by):
                rest[k + i] -= factor * value
    return polynomial(quotient), polynomial(rest[: len(by) - 1])


def common_factor(p: Polynomial, q: Polynomial) -> Polynomial:
    """Return the greatest common divisor, with leading coefficient one.

    Most pairs share no root. That is found in arithmetic modulo a prime, where it is cheap and, as
    the degree of a common divisor can only grow there, certain.
    """
    if p and q and _coprime_modulo(p, q):
        return (Fraction(1),)
    while q:
        p, q = q, divided(p, q)[1]
        q = tuple(value / q[-1] for value in q)
    return tuple(value / p[-1] for value in p)


def _coprime_modulo(p: Polynomial, q: Polynomial) -> bool:
    a, b = _modulo(p), _modulo(q)
    if a is None or b is None:
        return False
    while b:
        inverse = pow(b[-1], -1, _PRIME)
        while len(a) >= len(b):
            factor = a[-1] * inverse % _PRIME
            shift = len(a) - len(b)
            for i, value in enumerate(b):
                a[shift + i] = (a[shift + i] - factor * value) % _PRIME
            while a and a[-1] == 0:
                a.pop()
        a, b = b, a
    return len(a) == 1


def _modulo(p: Polynomial) -> list[int] | None:
    """Return the coefficients modulo the prime, None where the polynomial loses its degree."""
    if any(value.denominator % _PRIME == 0 for value in p) or p[-1].numerator % _PRIME == 0:
        return None
    return [value.numerator * pow(value.denominator, -1, _PRIME) % _PRIME for value in p]


def through(first: int, values: Sequence[Fraction]) -> Polynomial:
    """Return the polynomial of least degree through values at first, first + 1, first + 2, ...

    Newton's forward differences, in integers over one denominator:

        p(s) = sum_k (difference of order k) (s - first)(s - first - 1)...(s - first - k + 1) / k!
    """
    denominator = math.lcm(*(value.denominator for value in values))
    differences = [value.numerator * (denominator // value.denominator) for value in values]
    for order in range(1, len(values)):
        for i in range(len(values) - 1, order - 1, -1):
            differences[i] -= differences[i - 1]
    # result · (s - point) + difference · degree! / order!, from the highest order down.
    result: list[int] = []
    weight = 1
    for order in range(len(values) - 1, -1, -1):
        shifted = [0, *result]
        for i, value in enumerate(result):
            shifted[i] -= (first + order) * value
        shifted[0] += weight * differences[order]
        result = shifted
        weight *= max(order, 1)
    return polynomial([Fraction(value, denominator * weight) for value in result])
