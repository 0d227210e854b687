"""Published poles of filter prototypes, to their printed digits."""

from __future__ import annotations

import numpy as np
import pytest

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.prototypes import bessel, butterworth
from frontend_sim.analog.stages import Bessel, RcLowpass


def _upper(poles: list[complex]) -> list[complex]:
    return sorted((p for p in poles if p.imag >= 0.0), key=lambda p: p.imag)


# Source: W. E. Thomson 1949 (values computed; some handbooks print less exact rows).
@pytest.mark.parametrize(
    ("order", "published"),
    [(2, [-1.10160 + 0.63601j]), (3, [-1.32268 + 0j, -1.04741 + 0.99926j])],
)
def test_bessel_poles_for_half_power_at_one(order: int, published: list[complex]) -> None:
    """Normalized to -3 dB at 1 rad/s, five decimals."""
    np.testing.assert_allclose(_upper(bessel(order)[0]), published, rtol=0, atol=5.1e-6)


def test_bessel_poles_for_unit_delay() -> None:
    """Third order, scaled to a group delay of 1 s at zero frequency: -2.322185, -1.838907 ±
    j1.754381. Source: W. E. Thomson 1949 (computed).
    """
    poles = bessel(3)[0]
    # The delay at zero frequency is the sum of -Re(1/p).
    delay = sum(-(1.0 / p).real for p in poles)
    found = _upper([p * delay for p in poles])
    published = [-2.322185 + 0j, -1.838907 + 1.754381j]
    np.testing.assert_allclose(found, published, rtol=0, atol=5.1e-7)


def test_butterworth_quality_factors() -> None:
    """The pairs of a fourth-order Butterworth have Q = 0.5412 and 1.3066 (computed)."""
    q = sorted(1.0 / (-2.0 * p.real) for p in _upper(butterworth(4)[0]))
    np.testing.assert_allclose(q, [0.5412, 1.3066], rtol=0, atol=5.1e-5)


# Published: corner of n equal buffered RC sections, as a share of one section's (computed).
@pytest.mark.parametrize(("count", "share"), [(1, 1.0), (2, 0.6436), (3, 0.5098), (4, 0.4350)])
def test_corner_of_equal_sections(count: int, share: float) -> None:
    """At the published share of the corner the cascade is at half power, to the printed digits."""
    chain = chain_of([RcLowpass(resistance=1e3, capacitance=1e-7)] * count)
    corner = 1.0 / (2.0 * np.pi * 1e-4)
    f = corner * (share + np.array([-5.1e-5, 5.1e-5]))
    above, below = np.abs(chain.response(f)) ** 2
    assert below <= 0.5 <= above


def test_the_corner_of_a_bessel_stage_is_half_power() -> None:
    """The -3 dB normalization reaches the stage: 3.0103 dB down at its corner."""
    level = np.abs(chain_of([Bessel(order=3, corner=250.0)]).response(np.array([250.0])))
    assert -20.0 * np.log10(level[0]) == pytest.approx(3.0103, abs=1e-4)
