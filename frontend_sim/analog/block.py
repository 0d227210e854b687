"""One lumped linear block of the chain: a small state-space model in SI units."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]


@dataclass(frozen=True, eq=False)
class Block:
    """A single-input, single-output state-space model

        dx/dt = a x + b u,    y = c x + d u.

    States are scaled like the signal (volts), each row of ``a`` by the rate of its own pole, so
    that rows keep their relative accuracy however far apart the rates of a chain lie.

    Parameters
    ----------
    a : shape (n, n) [1/s]
    b : shape (n,) [1/s]
    c : shape (n,) [1]
    d : direct feed-through [1]
    """

    a: Real
    b: Real
    c: Real
    d: float

    @classmethod
    def of(cls, a: ArrayLike, b: ArrayLike, c: ArrayLike, d: float) -> Block:
        """Make a block from anything that NumPy reads, as frozen arrays."""
        b_array = np.array(b, dtype=np.float64).reshape(-1)
        n = len(b_array)
        arrays = (
            np.array(a, dtype=np.float64).reshape(n, n),
            b_array,
            np.array(c, dtype=np.float64).reshape(n),
        )
        for array in arrays:
            array.setflags(write=False)
        return cls(*arrays, float(d))

    @property
    def order(self) -> int:
        """Number of states."""
        return len(self.b)

    @cached_property
    def poles(self) -> Complex:
        """Eigenvalues of ``a`` [rad/s]; in closed form up to the second order."""
        if self.order == 0:
            return np.empty(0, dtype=np.complex128)
        if self.order == 1:
            return np.array([self.a[0, 0]], dtype=np.complex128)
        if self.order == 2:
            return _eigenvalues_of_two(self.a)
        return np.asarray(np.linalg.eigvals(self.a), dtype=np.complex128)

    @cached_property
    def integrates(self) -> bool:
        """Whether a pole lies at the origin."""
        return bool(np.any(self.poles == 0.0))

    @cached_property
    def at_rest(self) -> Real:
        """States after the input has rested at one for ever, shape (n,); no pole at the origin.

        Each row of the equations is taken less the size of its own rate, so that no pivot mixes
        slow and fast ones.
        """
        size = np.max(np.abs(self.a), axis=1)
        return np.asarray(np.linalg.solve(self.a / size[:, None], -self.b / size))

    def response(self, s: Complex) -> Complex:
        """Return the transfer function c (s - a)^-1 b + d at complex frequencies s [rad/s].

        Up to the second order as a quotient of polynomials: far below its corner a high pass is
        then small to full relative accuracy, where c (s - a)^-1 b and d would cancel.
        """
        s = np.asarray(s, dtype=np.complex128)
        if self.order <= 2:
            numerator, denominator = self.polynomials()
            return np.asarray(np.polyval(numerator, s) / np.polyval(denominator, s))
        system = s[..., None, None] * np.eye(self.order) - self.a
        states = np.linalg.solve(
            system, np.broadcast_to(self.b[:, None], (*s.shape, self.order, 1))
        )
        return np.asarray(self.d + states[..., 0] @ self.c, dtype=np.complex128)

    def polynomials(self) -> tuple[Real, Real]:
        """Return numerator and denominator, highest power first, the denominator monic."""
        if self.order == 0:
            return np.array([self.d]), np.ones(1)
        if self.order == 1:
            denominator = np.array([1.0, -self.a[0, 0]])
            return self.d * denominator + [0.0, self.c[0] * self.b[0]], denominator
        if self.order == 2:
            (a11, a12), (a21, a22) = self.a
            b1, b2 = self.b
            c1, c2 = self.c
            # From the entries, not from the poles: a zero at the origin stays exactly there.
            denominator = np.array([1.0, -(a11 + a22), a11 * a22 - a12 * a21])
            numerator = self.d * denominator
            numerator[1] += c1 * b1 + c2 * b2
            numerator[2] += c1 * (a12 * b2 - a22 * b1) + c2 * (a21 * b1 - a11 * b2)
            return numerator, denominator
        denominator = np.real(np.poly(self.poles))
        closed = self.a - np.outer(self.b, self.c)
        return np.real(np.poly(closed)) + (self.d - 1.0) * denominator, denominator


def _eigenvalues_of_two(a: Real) -> Complex:
    (a11, a12), (a21, a22) = a.tolist()
    if a12 == 0.0 or a21 == 0.0:
        return np.array([a11, a22], dtype=np.complex128)
    half_trace = 0.5 * (a11 + a22)
    half_difference = 0.5 * (a11 - a22)
    discriminant = half_difference * half_difference + a12 * a21
    if discriminant < 0.0:
        imaginary = math.sqrt(-discriminant)
        return np.array([complex(half_trace, imaginary), complex(half_trace, -imaginary)])
    # The larger root first, the other from the product: no cancellation.
    larger = half_trace + math.copysign(math.sqrt(discriminant), half_trace)
    product = a11 * a22 - a12 * a21
    smaller = product / larger if larger != 0.0 else 0.0
    return np.array([larger, smaller], dtype=np.complex128)


def gain_block(gain: float) -> Block:
    """Return y = gain · u."""
    return Block.of([], [], [], gain)


def first_order(pole: float, numerator: tuple[float, float]) -> Block:
    """Return (n1 s + n0) / (s - pole).

    Parameters
    ----------
    pole : real pole [rad/s]
    numerator : (n1, n0), n1 [1], n0 [rad/s]
    """
    n1, n0 = numerator
    rate = abs(pole) if pole != 0.0 else 1.0
    # pole / rate is exactly -1: without n0 the gain at zero frequency is then exactly zero.
    return Block.of([[pole]], [rate], [n0 / rate + n1 * (pole / rate)], n1)


def second_order(
    natural: float, damping_rate: float, numerator: tuple[float, float, float]
) -> Block:
    """Return (n2 s² + n1 s + n0) / (s² + damping_rate s + natural²).

    The states are the low-pass and the band-pass output, both scaled like the signal.

    Parameters
    ----------
    natural : natural angular frequency, above zero [rad/s]
    damping_rate : coefficient of s, that is natural / Q [rad/s]
    numerator : (n2, n1, n0), n2 [1], n1 [rad/s], n0 [rad²/s²]
    """
    n2, n1, n0 = numerator
    c1 = n0 / natural**2 - n2
    c2 = (n1 - n2 * damping_rate) / natural
    return Block.of([[0.0, natural], [-natural, -damping_rate]], [0.0, natural], [c1, c2], n2)


def two_real_poles(p1: float, p2: float, numerator: tuple[float, float, float]) -> Block:
    """Return (n2 s² + n1 s + n0) / ((s - p1)(s - p2)) for real poles [rad/s].

    The triangular form keeps both poles exact, equal ones too. It is used where the numerator has
    complex zeros and cannot be split over two blocks of first order.
    """
    n2, n1, n0 = numerator
    # The faster pole first: both states then reach the output with weights of the signal's size.
    p1, p2 = (p1, p2) if abs(p1) >= abs(p2) else (p2, p1)
    rate1 = abs(p1) if p1 != 0.0 else 1.0
    rate2 = abs(p2) if p2 != 0.0 else 1.0
    # Numerator = n2 (s-p1)(s-p2) + k1 (s-p2) + k0, and k1 (s-p2) + k0 is carried by the states
    # rate1/(s-p1) and rate1 rate2/((s-p1)(s-p2)).
    k1 = n1 + n2 * (p1 + p2)
    # k0 is the numerator at p2, written without the large terms that would cancel.
    k0 = n0 + p2 * (n1 + n2 * p2)
    return Block.of([[p1, 0.0], [rate2, p2]], [rate1, 0.0], [k1 / rate1, k0 / (rate1 * rate2)], n2)
