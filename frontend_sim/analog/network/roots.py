"""Roots of an exact polynomial, each to the last digits of a double."""

from __future__ import annotations

import cmath
import math
from fractions import Fraction
from itertools import pairwise

from frontend_sim.analog.network.polynomial import Polynomial, common_factor, derivative, divided
from frontend_sim.errors import ModelError

MOST_ROUNDS = 500
"""Rounds of the iteration; a handful is usual."""

ON_AXIS = 1e-20
"""A part below this share of the magnitude is zero. Residues are exact, so what is left of a part
that is truly zero is far smaller, and what is there by nature is far larger."""

RESOLVED = 1e-15
"""Imaginary parts below this share of the magnitude are not told from zero."""

ALIKE = 1e-12
"""Two conjugates differ by less than this share."""


def roots_of(p: Polynomial) -> list[complex]:
    """Return the roots of a polynomial, complex ones as exact conjugates, equal ones repeated.

    All roots are improved at once by

        x_i -= r_i / (1 - r_i sum_{j != i} 1/(x_i - x_j)),    r = p(x) / p'(x)

    (O. Aberth 1973, "Iteration methods for finding all zeros of a polynomial simultaneously"; from
    memory), where r is exact until it is rounded at last. So no root loses digits to its
    neighbours, however long the polynomial and however far apart its roots. Equal roots are found
    once, after an exact division by what p and p' share.

    Raises
    ------
    ModelError
        If the iteration does not settle.
    """
    at_origin = next((k for k, value in enumerate(p) if value), 0)
    found: list[complex] = [0j] * at_origin
    rest = p[at_origin:]
    while len(rest) > 1:
        shared = common_factor(rest, derivative(rest))
        found += _simple_roots(divided(rest, shared)[0])
        rest = shared
    return found


def _simple_roots(p: Polynomial) -> list[complex]:
    scale = math.lcm(*(value.denominator for value in p))
    whole = [int(value * scale) for value in p]
    x = _first_guesses(whole)
    for _ in range(MOST_ROUNDS):
        settled = True
        for i, here in enumerate(x):
            ratio = _newton(whole, here)
            if ratio == 0.0:
                continue
            # Two that meet do not push each other: their roots lie closer than doubles resolve.
            pull = sum(1.0 / (here - other) for other in x if other != here)
            step = ratio / (1.0 - ratio * pull)
            x[i] = here - step
            settled = settled and abs(step) <= 1e-15 * abs(here)
        if settled:
            return _paired([root - _newton(whole, root) for root in x])
    raise ModelError(f"the poles of a circuit of order {len(p) - 1} were not found")


def _first_guesses(p: list[int]) -> list[complex]:
    """Return a guess for each root from the upper convex hull of (k, log |p_k|).

    Each edge of the hull tells the magnitude of as many roots as it is long (D. A. Bini 1996,
    "Numerical computation of polynomial zeros by means of Aberth's method"; from memory).
    """
    points = [(k, math.log(abs(value))) for k, value in enumerate(p) if value]
    hull: list[tuple[int, float]] = []
    for point in points:
        while len(hull) > 1 and _below(hull[-2], hull[-1], point):
            hull.pop()
        hull.append(point)
    guesses = []
    for (k, low), (following, high) in pairwise(hull):
        count = following - k
        radius = math.exp((low - high) / count)
        # Off the real axis and all different, or symmetry would hold guesses together.
        guesses += [
            cmath.rect(radius * (1.0 + 0.01 * i / count), 2.0 * math.pi * i / count + 0.7 + 0.1 * k)
            for i in range(count)
        ]
    return guesses


def _below(left: tuple[int, float], middle: tuple[int, float], right: tuple[int, float]) -> bool:
    slope = (right[1] - left[1]) / (right[0] - left[0])
    return middle[1] <= left[1] + slope * (middle[0] - left[0])


def _newton(p: list[int], x: complex) -> complex:
    """Return p(x) / p'(x), computed in integers and rounded once."""
    real, imaginary = Fraction(x.real), Fraction(x.imag)
    scale = max(real.denominator, imaginary.denominator)
    shift = scale.bit_length() - 1
    a, b = int(real * scale), int(imaginary * scale)
    # value = p(x) · 2^(shift · degree) and slope = p'(x) · 2^(shift · (degree - 1)).
    value, value_i, slope, slope_i = p[-1], 0, 0, 0
    for power, coefficient in enumerate(reversed(p[:-1]), start=1):
        slope, slope_i = slope * a - slope_i * b + value, slope * b + slope_i * a + value_i
        value, value_i = value * a - value_i * b, value * b + value_i * a
        value += coefficient << (shift * power)
    size = slope * slope + slope_i * slope_i
    if size == 0:
        return 0.1 * abs(x) * (1.0 + 1.0j)
    bottom = size << shift
    return complex(
        (value * slope + value_i * slope_i) / bottom, (value_i * slope - value * slope_i) / bottom
    )


def _paired(roots: list[complex]) -> list[complex]:
    """Set parts to zero that are zero, and make conjugates exact.

    A pair closer to the real axis than doubles resolve is a double real root.
    """
    real = [root.real for root in roots if abs(root.imag) <= RESOLVED * abs(root)]
    upper = [root for root in roots if root.imag > RESOLVED * abs(root)]
    lower = [root for root in roots if -root.imag > RESOLVED * abs(root)]
    pairs = []
    for root in upper:
        match = min(lower, key=lambda other: abs(other.conjugate() - root), default=None)
        if match is None or abs(match.conjugate() - root) > ALIKE * abs(root):
            lower.append(root)
            continue
        lower.remove(match)
        upright = abs(root.real) <= ON_AXIS * abs(root)
        pairs.append(complex(0.0 if upright else root.real, root.imag))
    if any(abs(root.imag) > ALIKE * abs(root) for root in lower):
        raise ModelError(f"the poles of a circuit of order {len(roots)} were not found in pairs")
    real += [root.real for root in lower]
    return [
        *(complex(root) for root in real),
        *(part for root in pairs for part in (root, root.conjugate())),
    ]
