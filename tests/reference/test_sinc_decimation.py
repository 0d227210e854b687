"""Published and closed-form values of sinc^K decimation."""

from __future__ import annotations

import numpy as np
import pytest

from frontend_sim.converter import OversamplingAdc
from frontend_sim.converter.clock import look_count
from frontend_sim.converter.sinc_filter import SincFilter

MANY = 1 << 16
"""Taps of one running mean; many of them, as the rows below ask for."""


# -3 dB over the data rate. Source: closed form, many taps (computed).
@pytest.mark.parametrize(
    ("order", "ratio"), [(1, 0.44295), (2, 0.31892), (3, 0.26194), (4, 0.22751)]
)
def test_corner(order: int, ratio: float) -> None:
    """To the five digits that are printed."""
    sinc = SincFilter(order, MANY, float(MANY))
    assert sinc.corner == pytest.approx(ratio, abs=5e-6)


# 49 Hz at a data rate of 50 Hz. Source: closed form (computed).
@pytest.mark.parametrize(("order", "level"), [(1, -33.81), (3, -101.43)])
def test_rejection_beside_the_notch(order: int, level: float) -> None:
    """A mains frequency 2 % low: to the two decimals that are printed."""
    sinc = SincFilter(order, 5120, 256e3)
    assert sinc.data_rate == 50.0
    assert -sinc.attenuation(49.0) == pytest.approx(level, abs=5e-3)


# First sidelobe of one running mean, -13.26 dB. Source: any text on windows, e.g. Harris 1978,
# from memory; K of them in a row have K times as much.
@pytest.mark.parametrize("order", [1, 2, 3, 4, 5])
def test_first_sidelobe(order: int) -> None:
    """Between the first and the second notch, to the two decimals of the printed value times K."""
    sinc = SincFilter(order, MANY, 1.0)
    assert sinc.attenuation(sinc.lobe(1)) == pytest.approx(13.26 * order, abs=5e-3 * order)


# 1/6, 5/6, 1. Source: closed form, many taps (computed).
def test_step_after_a_restart() -> None:
    """The filter by itself, within 2/R of the limit of many taps."""
    assert SincFilter(3, MANY, 1.0).step() == pytest.approx([1 / 6, 5 / 6, 1.0], abs=2.0 / MANY)


def test_step_after_a_restart_in_codes() -> None:
    """The same from a converter: a step of 1 V right after a code shows in the next three."""
    adc = OversamplingAdc(modulator_rate=1e6, order=3, decimation=4096, bits=24, low=-2.0, high=2.0)
    digitizer = adc.digitizer(0)
    looks = look_count(adc, 5)
    times = digitizer.instants(0, looks)
    pin = np.where(np.arange(looks) > adc.last_look(1), 1.0, 0.0)
    _, made = digitizer.convert(digitizer.start(), 0, times, pin)
    assert made.voltage == pytest.approx([0.0, 0.0, 1 / 6, 5 / 6, 1.0], abs=2.0 / 4096)


# K = 3, R = 64, M = 1: +18 bits, ceil(K log2(R M)). Source: Hogenauer 1981, from memory.
def test_register_growth() -> None:
    """18 bits, and the next whole number where the ratio is no power of two."""
    assert SincFilter(3, 64, 1.0).register_growth == 18
    assert SincFilter(3, 65, 1.0).register_growth == 19
    assert SincFilter(1, 3, 1.0).register_growth == 2


# Noise bandwidth over the data rate, many taps: the integral of sinc^2K, 1/2, 1/3, 11/40, 151/630.
# Source: standard integrals (Gradshteyn and Ryzhik 3.836, from memory; computed).
@pytest.mark.parametrize(("order", "share"), [(1, 1 / 2), (2, 1 / 3), (3, 11 / 40), (4, 151 / 630)])
def test_noise_bandwidth(order: int, share: float) -> None:
    """Within 1/R of the limit."""
    assert SincFilter(order, MANY, float(MANY)).noise_bandwidth == pytest.approx(share, rel=1e-4)
