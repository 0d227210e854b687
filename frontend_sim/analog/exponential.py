"""The matrix exponential less one, to full relative accuracy for slow and fast modes alike."""

from __future__ import annotations

import math

import numpy as np

from frontend_sim.analog.block import Real

TERMS = 16
"""Terms of the Taylor series: at a norm of 1/2 the rest is below 0.5^17 / 17! = 2e-20. A small norm
is no reason for fewer: far along a chain an entry begins with a high power."""


def expm1(matrix: Real) -> Real:
    """Return E = exp(M) - I for a square matrix M.

    The Taylor series of M / 2^s, with its norm at most one half, is doubled s times by

        E(2 M) = 2 E(M) + E(M)².

    The identity is never added, so an entry that belongs to a mode much slower than the step keeps
    its relative accuracy, and rounding in fast stable modes dies out with the modes. The chain's
    matrix is used as it is: no diagonalization, so equal poles and poles at the origin are nothing
    special. Source: scaling and squaring after Moler and Van Loan 2003, "Nineteen dubious ways to
    compute the exponential of a matrix", written for E instead of exp; see docs/theory/engine.md.

    Parameters
    ----------
    matrix : shape (n, n) [1]
    """
    n = len(matrix)
    if n == 0:
        return np.zeros((0, 0))
    norm = float(np.max(np.sum(np.abs(matrix), axis=1)))
    doublings = max(math.ceil(math.log2(2.0 * norm)), 0) if norm > 0.0 else 0
    small = matrix * 2.0**-doublings
    result = small / TERMS
    for term in range(TERMS - 1, 0, -1):
        result = small @ result
        result += small
        result /= term
    for _ in range(doublings):
        result = joined(result, result)
    return result


def joined(first: Real, second: Real) -> Real:
    """Return E of both intervals in a row, E1 + E2 + E1 E2, from E of each."""
    both: Real = first + second
    both += first @ second
    return both


def power(step: Real, count: int) -> Real:
    """Return (I + E)^count - I by repeated doubling."""
    result, square = None, step
    while count:
        if count & 1:
            result = square if result is None else joined(result, square)
        count >>= 1
        square = joined(square, square) if count else square
    return np.zeros_like(step) if result is None else result


def augmented(a: Real, b: Real, generator: Real, readout: Real) -> Real:
    """Return the autonomous system of a chain driven by a linear generator,

        d/dt [x; g] = [[a, b r], [0, G]] [x; g].

    Source: C. F. Van Loan 1978, "Computing integrals involving the matrix exponential".

    Parameters
    ----------
    a : shape (n, n);  b : shape (n,);  generator : G, shape (m, m);  readout : r, shape (m,)
    """
    n, m = len(b), len(readout)
    whole = np.zeros((n + m, n + m))
    whole[:n, :n] = a
    whole[:n, n:] = np.outer(b, readout)
    whole[n:, n:] = generator
    return whole
