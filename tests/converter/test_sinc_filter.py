"""The sinc^K filter: weights against whole numbers, response against the weights."""

from __future__ import annotations

from fractions import Fraction
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import signal

from frontend_sim.converter.sinc_filter import SincFilter
from frontend_sim.converter.sinc_quantities import SincQuantities
from frontend_sim.errors import InputError

FILTERS = st.builds(SincFilter, st.integers(1, 5), st.integers(2, 300), st.floats(1e2, 1e8))


def whole_weights(order: int, ratio: int) -> list[int]:
    """Return R^K times the weights, by Python's integers: running sums of the one before."""
    weights = [1]
    for _ in range(order):
        padded = [0] * (ratio - 1) + weights + [0] * (ratio - 1)
        weights = [sum(padded[n : n + ratio]) for n in range(len(padded) - ratio + 1)]
    return weights


@pytest.mark.parametrize("order", [1, 2, 3, 4, 5])
@pytest.mark.parametrize("ratio", [2, 3, 4, 5, 8, 13, 64])
def test_weights_against_whole_numbers(order: int, ratio: int) -> None:
    """Each weight within 2e-15 of its own size, the tails included."""
    exact = [float(Fraction(weight, ratio**order)) for weight in whole_weights(order, ratio)]
    taps = SincFilter(order, ratio, 1.0).taps
    np.testing.assert_allclose(taps, exact, rtol=2e-15)


@pytest.mark.parametrize("order", [1, 2, 3, 4, 5])
@pytest.mark.parametrize("ratio", [1000, 65_537, 1 << 20])
def test_many_weights_are_whole(order: int, ratio: int) -> None:
    """They add up to 1 within 1e-14, are positive and mirror images of each other."""
    taps = SincFilter(order, ratio, 1.0).taps
    assert len(taps) == order * (ratio - 1) + 1
    assert np.sum(taps) == pytest.approx(1.0, abs=1e-14)
    assert np.all(taps > 0.0)
    np.testing.assert_array_equal(taps, taps[::-1])


@given(sinc=FILTERS, share=st.floats(0.0, 3.0))
@settings(max_examples=60, deadline=None)
def test_response_is_that_of_the_weights(sinc: SincFilter, share: float) -> None:
    """The closed form against the sum of the weights' phasors, also above the modulator rate."""
    frequency = share * sinc.modulator_rate
    angle = 2.0 * np.pi * share * np.arange(sinc.length)
    expected = abs(np.sum(sinc.taps * np.exp(-1j * angle)))
    # The phasors of up to 1500 samples at 3 turns each are right to 1e-12.
    assert float(sinc.amplitude(frequency)) == pytest.approx(expected, abs=1e-11)


@given(sinc=FILTERS)
@settings(max_examples=40, deadline=None)
def test_corner_and_notches_are_where_the_response_says(sinc: SincFilter) -> None:
    """Half the power at the corner, nothing in the notches, all at the modulator rate."""
    assert float(sinc.amplitude(sinc.corner)) ** 2 == pytest.approx(0.5, rel=1e-9)
    for number in {1, sinc.ratio // 2, sinc.ratio - 1} - {0}:
        assert sinc.attenuation(sinc.notch(number)) > 250.0
    assert float(sinc.amplitude(sinc.modulator_rate)) == 1.0
    assert float(sinc.amplitude(0.0)) == 1.0


@given(sinc=FILTERS, depth=st.floats(1.0, 150.0), place=st.floats(0.0, 1.0))
@settings(max_examples=60, deadline=None)
def test_a_notch_is_as_deep_as_told_between_its_edges(
    sinc: SincFilter, depth: float, place: float
) -> None:
    """At least the attenuation everywhere inside, that very one at the edges, less outside."""
    number = 1 + int(place * (sinc.ratio - 2))
    least = max(sinc.attenuation(sinc.lobe(n)) for n in (number - 1, number))
    attenuation = least + depth
    low, high = sinc.notch_edges(attenuation, number)
    assert low < sinc.notch(number) < high
    inside = np.linspace(low, high, 200)
    tolerance = 1e-6 * attenuation + 1e-3
    assert np.all(-20.0 * np.log10(np.maximum(sinc.amplitude(inside), 1e-30))
                  >= attenuation - tolerance)  # fmt: skip
    for edge in (low, high):
        # Near a notch of 150 dB and more the edges are some roundings of the frequency wide.
        assert sinc.attenuation(edge) == pytest.approx(attenuation, rel=1e-3, abs=0.05)
    width = high - low
    assert sinc.attenuation(low - 0.01 * width) < attenuation + tolerance
    assert sinc.attenuation(high + 0.01 * width) < attenuation + tolerance


@given(sinc=FILTERS)
@settings(max_examples=40, deadline=None)
def test_noise_bandwidth_is_the_area_of_the_power(sinc: SincFilter) -> None:
    """Parseval: the mean of |H|² over a period of the modulator rate, sampled finely enough."""
    points = 2 * sinc.length + 1
    power = sinc.amplitude(np.arange(points) * sinc.modulator_rate / points) ** 2
    assert sinc.noise_bandwidth == pytest.approx(
        0.5 * sinc.modulator_rate * np.mean(power), rel=1e-9
    )
    assert sinc.noise_gain**2 == pytest.approx(np.mean(power), rel=1e-9)


@given(sinc=FILTERS)
@settings(max_examples=40, deadline=None)
def test_steps_after_a_restart(sinc: SincFilter) -> None:
    """Against running means of an empty filter, by SciPy: every R-th value, the K-th is whole."""
    samples = np.ones(sinc.order * sinc.ratio)
    for _ in range(sinc.order):
        samples = signal.lfilter(np.full(sinc.ratio, 1.0 / sinc.ratio), [1.0], samples)
    np.testing.assert_allclose(sinc.step(), samples[sinc.ratio - 1 :: sinc.ratio], atol=1e-12)
    assert sinc.step()[-1] == pytest.approx(1.0, abs=1e-14)


def test_quantities_of_both_conversions() -> None:
    """A sinc³ at 50 Hz from 12.8 kHz: 60 ms from a restart, valid from the third code on.

    Restarted, each code is valid, takes 60 ms, and the next one cannot start before.
    """
    sinc = SincFilter(3, 256, 12.8e3)
    running, single = SincQuantities.of(sinc), SincQuantities.of(sinc, continuous=False)
    assert (running.data_rate, single.data_rate) == pytest.approx((50.0, 50.0 / 3.0))
    assert (running.latency, single.latency) == pytest.approx((60e-3, 60e-3))
    assert (running.first_valid, single.first_valid) == (3, 1)
    assert (running.first_valid_after_change, single.first_valid_after_change) == (4, 2)
    assert running.latency_unsynchronized == pytest.approx(80e-3)
    assert single.latency_unsynchronized == pytest.approx(120e-3)
    assert running.group_delay == pytest.approx(1.5 * 255.0 / 12.8e3)
    assert running.first_notch == 50.0
    assert running.steps[-1] == pytest.approx(1.0)
    assert running.register_growth == 24
    depths = [notch.attenuation for notch in running.notch_widths]
    assert depths == [40.0, 60.0, 80.0, 100.0, 120.0]
    widths = [notch.width for notch in running.notch_widths]
    assert all(wide > narrow > 0.0 for wide, narrow in pairwise(widths))
    fifth = SincQuantities.of(SincFilter(5, 256, 12.8e3))
    assert [notch.attenuation for notch in fifth.notch_widths] == [80.0, 100.0, 120.0]


@pytest.mark.parametrize(
    ("attenuation", "number", "message"),
    [
        (30.0, 1, r"attenuates by 39.76 dB all the way to the next notch"),
        (60.0, 0, "notches 1 to 63 below the modulator rate, no 0"),
        (60.0, 64, "no 64"),
    ],
)
def test_notches_that_are_not_there_are_refused(
    attenuation: float, number: int, message: str
) -> None:
    """The message tells which there are, and the least attenuation beside them."""
    with pytest.raises(InputError, match=message):
        SincFilter(3, 64, 64.0).notch_edges(attenuation, number)
