"""Filter families: zeros, poles and gain against scipy.signal and against mpmath."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import mpmath as mp
import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import signal

from frontend_sim.analog.block import Block
from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.prototypes import bessel, butterworth, chebyshev, filter_blocks
from frontend_sim.analog.stages import Bessel, Butterworth, Chebyshev
from frontend_sim.analog.stages.filters import Filter

ORDERS = range(1, 13)
RIPPLE = 0.7
RESPONSES = {
    "low-pass": ("lowpass", 130.0, 130.0),
    "high-pass": ("highpass", 130.0, 130.0),
    "band-pass": ("bandpass", 90.0, 1700.0),
    "band-stop": ("bandstop", 90.0, 1700.0),
}


def _scipy(family: str, order: int, response: str, lower: float, upper: float) -> Any:
    kind = RESPONSES[response][0]
    corner = 2.0 * np.pi * (np.array([lower, upper]) if "band" in kind else lower)
    if family == "butterworth":
        return signal.butter(order, corner, kind, analog=True, output="zpk")
    if family == "bessel":
        return signal.bessel(order, corner, kind, analog=True, output="zpk", norm="mag")
    return signal.cheby1(order, RIPPLE, corner, kind, analog=True, output="zpk")


PROTOTYPES: dict[str, Any] = {
    "butterworth": butterworth,
    "bessel": bessel,
    "chebyshev": lambda order: chebyshev(order, RIPPLE),
}


def _poles(blocks: Sequence[Block]) -> NDArray[np.complex128]:
    return np.concatenate([block.poles for block in blocks])


def _assert_same_roots(found: Any, true: Any, share: float) -> None:
    """Every root has a partner of its own within a share of its magnitude."""
    assert len(found) == len(true)
    left = list(true)
    for root in found:
        nearest = min(left, key=lambda other: abs(other - root))
        assert abs(nearest - root) <= share * abs(root)
        left.remove(nearest)


@pytest.mark.parametrize("response", RESPONSES)
@pytest.mark.parametrize("family", PROTOTYPES)
@pytest.mark.parametrize("order", ORDERS)
def test_families_agree_with_scipy(family: str, order: int, response: Any) -> None:
    """Poles to 1e-10 and the response over eight decades to 1e-9 of scipy's zeros, poles, gain."""
    _, lower, upper = RESPONSES[response]
    blocks = filter_blocks(PROTOTYPES[family](order), response, lower, upper)
    zeros, poles, gain = _scipy(family, order, response, lower, upper)
    _assert_same_roots(_poles(blocks), poles, 1e-10)
    # From well below to well above, but not at the centre of the notch, where both are rounding.
    s = 2j * np.pi * 130.0 * np.logspace(-4, 4, 33)
    true = gain * np.prod([s - z for z in zeros] or [np.ones_like(s)], axis=0)
    true = true / np.prod([s - p for p in poles], axis=0)
    found = np.prod([block.response(s) for block in blocks], axis=0)
    np.testing.assert_allclose(found, true, rtol=1e-9)


@pytest.mark.parametrize("family", PROTOTYPES)
@pytest.mark.parametrize("order", [1, 2, 5, 12])
@pytest.mark.parametrize("width", [1.0, 1e-3])
def test_narrow_bands_keep_the_damping_of_every_pole(family: str, order: int, width: float) -> None:
    """Poles of bands down to 1e-6 of the centre, their real parts too, against mpmath.

    A real part of 1e-7 of the magnitude decides how long a resonance rings, so it is compared by
    itself: to 1e-9 of it.
    """
    lower, upper = 1000.0 - 0.5 * width, 1000.0 + 0.5 * width
    prototype = PROTOTYPES[family](order)
    found = _poles(filter_blocks(prototype, "band-pass", lower, upper))
    with mp.workdps(40):
        centre = 2 * mp.pi * mp.sqrt(mp.mpf(lower) * mp.mpf(upper))
        b_width = 2 * mp.pi * (mp.mpf(upper) - mp.mpf(lower))
        true = []
        for pole in prototype[0]:
            b = mp.mpc(pole) * b_width
            root = mp.sqrt(b * b - 4 * centre**2)
            true += [complex((b + root) / 2), complex((b - root) / 2)]
    for pole in found:
        nearest = min(true, key=lambda other: abs(other - pole))
        assert pole.real == pytest.approx(nearest.real, rel=1e-9)
        assert pole.imag == pytest.approx(nearest.imag, rel=1e-14)


@pytest.mark.parametrize("family", PROTOTYPES)
@pytest.mark.parametrize("order", [1, 2, 5])
def test_wide_bands_keep_their_slow_poles(family: str, order: int) -> None:
    """From 1 Hz to 10 MHz: the poles near 1 Hz do not cancel against those near 10 MHz.

    Oracle: s² - b s + w0² solved at 40 digits.
    """
    prototype = PROTOTYPES[family](order)
    found = _poles(filter_blocks(prototype, "band-pass", 1.0, 1e7))
    with mp.workdps(40):
        centre = 2 * mp.pi * mp.sqrt(mp.mpf(1e7))
        width = 2 * mp.pi * (mp.mpf(1e7) - 1)
        true = []
        for pole in prototype[0]:
            b = mp.mpc(pole) * width
            root = mp.sqrt(b * b - 4 * centre**2)
            true += [complex((b + root) / 2), complex((b - root) / 2)]
    _assert_same_roots(found, true, 1e-13)


@pytest.mark.parametrize("order", ORDERS)
def test_bessel_agrees_with_its_polynomial(order: int) -> None:
    """Reverse Bessel polynomial at 50 digits, scaled to half power at 1 rad/s: Thomson 1949."""
    with mp.workdps(50):
        n = order
        coefficients = [
            mp.factorial(2 * n - k) / (2 ** (n - k) * mp.factorial(k) * mp.factorial(n - k))
            for k in range(n + 1)
        ]

        def power(w: Any) -> Any:
            value = sum(c * mp.mpc(0, w) ** k for k, c in enumerate(coefficients))
            return abs(value) ** 2 - 2 * coefficients[0] ** 2

        corner = mp.findroot(power, (0.5, 2.0 * n), solver="anderson")
        for pole in bessel(order)[0]:
            s = mp.mpc(pole) * corner
            value = sum(c * s**k for k, c in enumerate(coefficients))
            slope = sum(k * c * s ** (k - 1) for k, c in enumerate(coefficients) if k)
            assert abs(value / slope / s) < 1e-14


@pytest.mark.parametrize("order", ORDERS)
def test_the_corner_is_where_the_family_says(order: int) -> None:
    """-3.01 dB for Butterworth and Bessel, the end of the ripple for Chebyshev; gain 1 at most."""
    corner = np.array([1234.0])
    half = np.sqrt(0.5)
    stages: list[tuple[Filter, float]] = [
        (Butterworth(order=order, corner=1234.0), half),
        (Butterworth(order=order, corner=1234.0, response="high-pass"), half),
        (Bessel(order=order, corner=1234.0), half),
        (Chebyshev(order=order, corner=1234.0, ripple=RIPPLE), 10.0 ** (-RIPPLE / 20.0)),
    ]
    for stage, level in stages:
        assert np.abs(chain_of([stage]).response(corner))[0] == pytest.approx(level, rel=1e-12)


@pytest.mark.parametrize("order", ORDERS)
def test_chebyshev_ripples_between_one_and_the_ripple(order: int) -> None:
    """|H|² = 1/(1 + e² T_n²) with the Chebyshev polynomial T_n from numpy, over the pass band."""
    f = np.linspace(0.0, 1.0, 201)
    found = np.abs(chain_of([Chebyshev(order=order, corner=1.0, ripple=RIPPLE)]).response(f)) ** 2
    polynomial = np.polynomial.chebyshev.Chebyshev.basis(order)(f)
    epsilon2 = 10.0 ** (RIPPLE / 10.0) - 1.0
    np.testing.assert_allclose(found, 1.0 / (1.0 + epsilon2 * polynomial**2), rtol=1e-11)


@pytest.mark.parametrize("order", ORDERS)
def test_butterworth_is_flat(order: int) -> None:
    """|H|² = 1/(1 + (f/corner)^2n) over eight decades, and its mirror image as a high pass."""
    f = np.logspace(-4, 4, 41)
    low = np.abs(chain_of([Butterworth(order=order, corner=1.0)]).response(f))
    high = Butterworth(order=order, corner=1.0, response="high-pass")
    np.testing.assert_allclose(low**-2 - 1.0, f ** (2 * order), rtol=1e-9, atol=1e-14)
    np.testing.assert_allclose(np.abs(chain_of([high]).response(f)), low[::-1], rtol=1e-11)


def test_bessel_is_flat_in_delay() -> None:
    """The group delay of eighth order is constant to 1e-4 up to half the corner."""
    chain = chain_of([Bessel(order=8, corner=1.0)])
    f = np.linspace(0.001, 0.5, 400)
    phase = np.unwrap(np.angle(chain.response(f)))
    delay = -np.diff(phase) / (2.0 * np.pi * np.diff(f))
    np.testing.assert_allclose(delay, delay[0], rtol=1e-4)


def test_band_stop_reaches_zero_at_the_centre() -> None:
    """At sqrt(lower · upper) nothing is left but rounding, and far away everything passes."""
    chain = chain_of(
        [Butterworth(order=4, response="band-stop", lower_corner=45.0, upper_corner=55.0)]
    )
    response = np.abs(chain.response(np.array([1e-3, np.sqrt(45.0 * 55.0), 1e6])))
    np.testing.assert_allclose(response, [1.0, 0.0, 1.0], rtol=1e-8, atol=1e-14)
