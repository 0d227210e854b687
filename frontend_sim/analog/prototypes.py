"""Filter families as data: poles of the low-pass prototype, and the changes of frequency."""

from __future__ import annotations

import cmath
import math
from collections.abc import Callable
from functools import lru_cache
from typing import Literal

from frontend_sim.analog.block import Block
from frontend_sim.analog.factors import cascade

Response = Literal["low-pass", "high-pass", "band-pass", "band-stop"]

Poles = tuple[complex, ...]
"""Poles of a filter [rad/s]."""

Prototype = tuple[Poles, float]
"""Poles of an all-pole low pass with its corner at 1 rad/s, and its gain at zero frequency."""


def butterworth(order: int) -> Prototype:
    """Return the poles exp(j pi (2k + n + 1) / (2n)), k = 0 .. n-1.

    Source: S. Butterworth 1930, "On the theory of filter amplifiers"; the -3 dB corner is at 1.
    """
    return tuple(_on_unit_circle(2 * k + order + 1, order) for k in range(order)), 1.0


def _on_unit_circle(numerator: int, order: int) -> complex:
    if numerator == 2 * order:
        return complex(-1.0)
    return cmath.exp(1j * math.pi * numerator / (2.0 * order))


def chebyshev(order: int, ripple: float) -> Prototype:
    """Return the poles of the equal-ripple low pass of type I; the ripple band ends at 1.

        p_k = -sinh(m) sin(t_k) + j cosh(m) cos(t_k),   t_k = pi (2k + 1) / (2n),
        m = asinh(1/e) / n,   e = sqrt(10^(ripple/10) - 1)

    Parameters
    ----------
    ripple : peak-to-peak ripple in the pass band [dB]

    Source: any filter handbook; common practice. An even order starts at the bottom of the ripple.
    """
    epsilon = math.sqrt(math.expm1(ripple * math.log(10.0) / 10.0))
    mu = math.asinh(1.0 / epsilon) / order
    poles = []
    for k in range(order):
        theta = math.pi * (2 * k + 1) / (2.0 * order)
        imaginary = 0.0 if 2 * k + 1 == order else math.cosh(mu) * math.cos(theta)
        poles.append(complex(-math.sinh(mu) * math.sin(theta), imaginary))
    gain = 1.0 if order % 2 else 10.0 ** (-ripple / 20.0)
    return tuple(poles), gain


@lru_cache(maxsize=16)
def bessel(order: int) -> Prototype:
    """Return the poles of the low pass with the flattest group delay, -3 dB corner at 1.

    The roots of the reverse Bessel polynomial come from scipy, which polishes them to rounding.
    Source: W. E. Thomson 1949, "Delay networks having maximally flat frequency characteristics".
    """
    from scipy.signal import besselap

    _, poles, _ = besselap(order, norm="mag")
    found = (complex(pole.real, 0.0 if abs(pole.imag) < 1e-12 else pole.imag) for pole in poles)
    return tuple(found), 1.0


@lru_cache(maxsize=64)  # the check of a scenario and its run ask for the same
def filter_blocks(
    prototype: Prototype, response: Response, lower: float, upper: float
) -> tuple[Block, ...]:
    """Move a low-pass prototype to its place and return the cascade of blocks.

        low-pass   s -> s / w0                 high-pass  s -> w0 / s
        band-pass  s -> (s² + w0²) / (B s)     band-stop  s -> B s / (s² + w0²)

    with w0 = 2 pi sqrt(lower · upper) and B = 2 pi (upper - lower); lower = upper for the first
    two. Source: any filter handbook; common practice.

    Parameters
    ----------
    lower, upper : corner frequencies [Hz]
    """
    poles, gain = prototype
    centre = 2.0 * math.pi * math.sqrt(lower) * math.sqrt(upper)
    width = 2.0 * math.pi * (upper - lower)
    return _TRANSFORMS[response](poles, gain, centre, width)


def _low_pass(poles: Poles, gain: float, centre: float, _: float) -> tuple[Block, ...]:
    moved = [centre * pole for pole in poles]
    return cascade([], moved, gain * math.prod(abs(pole) for pole in moved))


def _high_pass(poles: Poles, gain: float, centre: float, _: float) -> tuple[Block, ...]:
    return cascade([0.0] * len(poles), [_real_if_real(centre / pole) for pole in poles], gain)


def _band_pass(poles: Poles, gain: float, centre: float, width: float) -> tuple[Block, ...]:
    moved = [root for pole in poles for root in _band_roots(pole * width, centre)]
    factor = gain * math.prod(width * abs(pole) for pole in poles)
    return cascade([0.0] * len(poles), moved, factor)


def _band_stop(poles: Poles, gain: float, centre: float, width: float) -> tuple[Block, ...]:
    moved = [root for pole in poles for root in _band_roots(width / pole, centre)]
    return cascade([1j * centre, -1j * centre] * len(poles), moved, gain)


_TRANSFORMS: dict[Response, Callable[[Poles, float, float, float], tuple[Block, ...]]] = {
    "low-pass": _low_pass,
    "high-pass": _high_pass,
    "band-pass": _band_pass,
    "band-stop": _band_stop,
}  # fmt: skip


def _band_roots(b: complex, centre: float) -> tuple[complex, complex]:
    """Return the roots of s² - b s + centre², the larger first and the other from the product."""
    root = cmath.sqrt(b * b - 4.0 * centre * centre)
    if (b.conjugate() * root).real < 0.0:
        root = -root
    larger = 0.5 * (b + root)
    return _real_if_real(larger), _real_if_real(centre * centre / larger)


def _real_if_real(root: complex) -> complex:
    """Drop an imaginary part that is rounding only."""
    return complex(root.real) if abs(root.imag) <= 1e-14 * abs(root) else root
