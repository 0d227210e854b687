"""Zeros, poles and a gain become a cascade of small blocks; polynomials are factored first."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence

import numpy as np

from frontend_sim.analog.block import (
    Block,
    Complex,
    Real,
    first_order,
    gain_block,
    second_order,
    two_real_poles,
)
from frontend_sim.errors import ModelError

CONJUGATE_TOLERANCE = 1e-9
"""Two complex roots count as conjugates if they agree to this share of their magnitude."""

SLOWEST, FASTEST = 1e-18, 1e21
"""Magnitudes between which every root other than zero must lie [rad/s]; products of a few of them
then stay within the range of a float."""

MOST_INFIDELITY = 1e-9
"""Largest error of a factored polynomial's values, as a share of them."""

NEAREST = 1e-3
"""How near to a root its polynomial's values are asked for, as a share of the root's magnitude."""

Root = complex


def cascade(zeros: Iterable[Root], poles: Iterable[Root], gain: float) -> tuple[Block, ...]:
    """Return blocks whose product is gain · prod(s - zero) / prod(s - pole).

    Complex pairs make one block of second order each, real poles one of first order; where complex
    zeros are left over, two real poles share a triangular block. No polynomial above the second
    order is ever expanded. Every block but the first is scaled to the rate of its own poles.

    Parameters
    ----------
    zeros, poles : roots [rad/s], complex ones together with their conjugates
    gain : multiplies the products

    Raises
    ------
    ModelError
        If there are more zeros than poles (the response would grow without bound), a complex root
        stands without its conjugate, or roots or gain leave the range of a float.
    """
    poles, zeros = list(poles), list(zeros)
    _refuse_extremes(poles, "pole")
    _refuse_extremes(zeros, "zero")
    pole_pairs, real_poles = _split(poles, "pole")
    zero_pairs, real_zeros = _split(zeros, "zero")
    n_zeros = 2 * len(zero_pairs) + len(real_zeros)
    n_poles = 2 * len(pole_pairs) + len(real_poles)
    if n_zeros > n_poles:
        raise ModelError(
            f"{n_zeros} {'zero stands' if n_zeros == 1 else 'zeros stand'} against {n_poles} "
            f"{'pole' if n_poles == 1 else 'poles'}; the gain would grow without bound "
            "with frequency, so give at least as many poles as zeros"
        )
    # Blocks of high quality factor last, as in practice: they see the quieter signal.
    pole_pairs.sort(key=lambda p: abs(p) / max(-2.0 * p.real, 1e-300))
    real_poles.sort(key=abs)
    denominators: list[tuple[Root, ...]] = []
    spare = len(zero_pairs) - len(pole_pairs)
    while spare > 0:
        denominators.append((real_poles.pop(0), real_poles.pop(0)))
        spare -= 1
    denominators += [(p,) for p in real_poles]
    denominators += [(p, p.conjugate()) for p in pole_pairs]
    factors, left = [], gain
    for roots in denominators:
        top = _take_zeros(roots, zero_pairs, real_zeros)
        rate = _rate(roots)
        scale = rate ** (len(roots) - len(top))
        left /= scale
        factors.append((roots, top, scale))
    if not factors:
        return (gain_block(gain),)
    with np.errstate(over="ignore", invalid="ignore"):
        blocks = [
            _block(roots, top, scale * left if index == 0 else scale)
            for index, (roots, top, scale) in enumerate(factors)
        ]
    if not all(math.isfinite(value) for block in blocks for value in (*block.c, block.d)):
        raise ModelError(f"the gain {gain:g} with these roots leaves the range of numbers")
    return tuple(blocks)


def _refuse_extremes(roots: Iterable[Root], noun: str) -> None:
    for root in roots:
        if root != 0.0 and not SLOWEST <= abs(root) <= FASTEST:
            raise ModelError(
                f"the {noun} of magnitude {abs(root):g} rad/s is out of reach; it must be zero, or "
                f"lie between {SLOWEST:g} and {FASTEST:g} rad/s"
            )


def _split(roots: Iterable[Root], noun: str) -> tuple[list[complex], list[float]]:
    """Sort roots into the upper ones of conjugate pairs, and the real ones."""
    waiting = [complex(root) for root in roots]
    real = [root.real for root in waiting if root.imag == 0.0]
    upper = [root for root in waiting if root.imag > 0.0]
    lower = [root for root in waiting if root.imag < 0.0]
    for root in upper:
        match = min(lower, key=lambda other: abs(other.conjugate() - root), default=None)
        if match is None or abs(match.conjugate() - root) > CONJUGATE_TOLERANCE * abs(root):
            raise ModelError(
                f"the complex {noun} {root.real:g} + j{root.imag:g} stands without its conjugate; "
                f"list [{root.real:g}, {-root.imag:g}] too"
            )
        lower.remove(match)
    if lower:
        root = lower[0]
        raise ModelError(
            f"the complex {noun} {root.real:g} - j{-root.imag:g} stands without its conjugate; "
            f"list [{root.real:g}, {-root.imag:g}] too"
        )
    return upper, real


def _take_zeros(poles: Sequence[Root], pairs: list[complex], real: list[float]) -> tuple[Root, ...]:
    """Take the zeros that suit a denominator best out of those left."""
    if len(poles) == 1:
        return (_nearest(real, abs(poles[0])),) if real else ()
    if pairs:
        nearest = min(pairs, key=lambda zero: abs(abs(zero) - abs(poles[0])))
        pairs.remove(nearest)
        return (nearest, nearest.conjugate())
    return tuple(_nearest(real, abs(poles[0])) for _ in range(min(2, len(real))))


def _nearest(real: list[float], magnitude: float) -> float:
    nearest = min(real, key=lambda zero: abs(abs(zero) - magnitude))
    real.remove(nearest)
    return nearest


def _rate(poles: Sequence[Root]) -> float:
    product = math.prod(abs(pole) for pole in poles if pole != 0.0)
    count = sum(pole != 0.0 for pole in poles)
    return float(product ** (1.0 / count)) if count else 1.0


def _block(poles: Sequence[Root], zeros: Sequence[Root], scale: float) -> Block:
    numerator = scale * np.real(np.poly(np.array(zeros, dtype=complex))) if zeros else [scale]
    padded = [0.0] * (len(poles) + 1 - len(numerator)) + [float(value) for value in numerator]
    if len(poles) == 1:
        return first_order(complex(poles[0]).real, (padded[0], padded[1]))
    p1, p2 = complex(poles[0]), complex(poles[1])
    if p1.imag != 0.0:
        return second_order(abs(p1), -2.0 * p1.real, (padded[0], padded[1], padded[2]))
    return two_real_poles(p1.real, p2.real, (padded[0], padded[1], padded[2]))


def roots_of(coefficients: Sequence[float]) -> list[complex]:
    """Return the roots of a real polynomial, highest power first, conjugates matched.

    Up to the second order in closed form; above, as eigenvalues of the companion matrix after the
    variable is scaled to the geometric mean of the roots.

    Raises
    ------
    ModelError
        If the roots do not reproduce the polynomial's values to 1e-9 where a response is most
        sensitive: it is too ill-conditioned to be given by its coefficients.
    """
    values = np.trim_zeros(np.array(coefficients, dtype=np.float64), "f")
    if len(values) == 0:
        raise ModelError("a polynomial whose coefficients are all zero has no roots")
    at_origin = len(values) - len(np.trim_zeros(values, "b"))
    values = values[: len(values) - at_origin]
    found: list[complex] = [0j] * at_origin
    degree = len(values) - 1
    if degree == 0:
        return found
    with np.errstate(all="ignore"):
        scale = float(abs(values[-1] / values[0]) ** (1.0 / degree))
        monic = values / values[0] / scale ** np.arange(degree + 1)
    if not np.all(np.isfinite(monic)):
        raise ModelError(
            f"the coefficients of the polynomial of order {degree} lie too far apart for its roots "
            "to be found; give it as poles-zeros instead"
        )
    if degree == 1:
        return [*found, complex(-scale * monic[1])]
    if degree == 2:
        return [*found, *_quadratic(float(monic[1]), float(monic[2]), scale)]
    roots = np.asarray(np.roots(monic), dtype=np.complex128)
    error = _infidelity(monic, roots)
    if not error <= MOST_INFIDELITY:
        raise ModelError(
            f"the polynomial of order {degree} is too ill-conditioned to be factored (its roots "
            f"reproduce its values to {error:.1g} only); give it as poles-zeros instead"
        )
    return [*found, *(complex(scale * root) for root in roots)]


def _infidelity(monic: Real, roots: Complex) -> float:
    """Return how far the roots are from giving the polynomial's values, as a share of them.

    Asked on the imaginary axis at the magnitude of every root, and beside every root on its right
    (for one on the axis itself, a thousandth of its magnitude away): where a frequency response is
    most sensitive. Roots that are wrong but give the right values, as equal ones do, do no harm.
    """
    size = np.abs(roots)
    away = np.maximum(NEAREST * size - np.abs(roots.real), 0.0)
    s = np.concatenate([1j * size, away + 1j * roots.imag])
    distances = s[:, None] - roots
    beside = np.min(np.abs(distances), axis=1) >= 0.5 * NEAREST * np.abs(s)
    with np.errstate(all="ignore"):
        difference = np.polyval(np.real(np.poly(roots)) - monic, s[beside])
        return float(np.max(np.abs(difference / np.prod(distances[beside], axis=1)), initial=0.0))


def _quadratic(b: float, c: float, scale: float) -> list[complex]:
    discriminant = 0.25 * b * b - c
    if discriminant < 0.0:
        imaginary = math.sqrt(-discriminant)
        return [
            scale * complex(-0.5 * b, imaginary),
            scale * complex(-0.5 * b, -imaginary),
        ]
    larger = -0.5 * b - math.copysign(math.sqrt(discriminant), b)
    return [complex(scale * larger), complex(scale * c / larger) if larger != 0.0 else 0j]
