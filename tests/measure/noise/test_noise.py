"""Noise measures against scipy.stats, closed forms, and counted coverage."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats
from sines import converter

from frontend_sim.converter.quantizer import quantize
from frontend_sim.errors import MeasureError
from frontend_sim.measure.noise import (
    before_rounding,
    code_histogram,
    code_noise,
    noise_of,
    rms_interval,
)


@pytest.mark.parametrize("count", [2, 10, 1000, 10**6])
@pytest.mark.parametrize("confidence", [0.9, 0.99])
def test_interval_is_that_of_scipy(count, confidence):
    """The chi-square quantiles are those of scipy.stats."""
    low, high = stats.chi2.interval(confidence, count - 1)
    found = rms_interval(0.3, count, confidence)
    assert found.low == pytest.approx(0.3 * math.sqrt((count - 1) / high), rel=1e-10)
    assert found.high == pytest.approx(0.3 * math.sqrt((count - 1) / low), rel=1e-10)


def test_interval_of_a_table():
    """Ten samples, 95 %: 0.688 to 1.826 times the rms, as tables print it (from memory)."""
    found = rms_interval(1.0, 10)
    assert (found.low, found.high) == pytest.approx((0.688, 1.826), abs=5e-4)


def test_intervals_hold_what_they_promise():
    """Of 2000 seeded records of 20 samples, 95 % ± 2 % have the true rms in their interval.

    2 % is four standard deviations of the share.
    """
    rng = np.random.default_rng(17)
    found = [noise_of(0.01 * rng.standard_normal(20) + 5.0).rms_interval for _ in range(2000)]
    assert np.mean([each.low <= 0.01 <= each.high for each in found]) == pytest.approx(
        0.95, abs=0.02
    )


def test_definitions():
    """A record of four values whose numbers can be done by hand; 3.3 V of full scale."""
    found = noise_of([1.0, 2.0, 3.0, 2.0], full_scale=3.3)
    assert found.mean == 2.0
    assert found.rms == pytest.approx(math.sqrt(2.0 / 3.0), rel=1e-15)
    assert found.peak_to_peak == 2.0
    assert found.effective_resolution == pytest.approx(math.log2(3.3 / found.rms), rel=1e-15)
    assert found.noise_free_bits == pytest.approx(math.log2(3.3 / (6.6 * found.rms)), rel=1e-15)
    assert found.noise_free_bits_seen == pytest.approx(math.log2(1.65), rel=1e-15)
    assert noise_of([1.0, 2.0]).effective_resolution is None


def test_noise_free_bits_keep_999_of_1000():
    """6.6 rms hold 99.9 % of normal noise: P(|x| < 3.3 rms) = 0.99903."""
    assert stats.norm.cdf(3.3) - stats.norm.cdf(-3.3) == pytest.approx(0.99903, abs=5e-6)
    values = np.random.default_rng(5).standard_normal(10**6)
    found = noise_of(values, full_scale=1000.0)
    cell = 1000.0 / 2.0**found.noise_free_bits
    inside = np.mean(np.abs(values - found.mean) < 0.5 * cell)
    assert inside == pytest.approx(0.99903, abs=2e-4)


def test_no_noise_has_no_end_of_bits():
    """A constant record has unlimited resolution, and says so."""
    found = noise_of(np.full(10, 1.25), full_scale=3.3)
    assert (found.rms, found.peak_to_peak) == (0.0, 0.0)
    assert found.noise_free_bits == math.inf
    assert found.noise_free_bits_seen == math.inf


@settings(max_examples=50, deadline=None)
@given(scale=st.floats(1e-9, 1e9), move=st.floats(-10.0, 10.0), seed=st.integers(0, 1000))
def test_scale_and_offset(scale, move, seed):
    """Scaling scales the rms, adding moves the mean; order does not matter."""
    rng = np.random.default_rng(seed)
    values = rng.standard_normal(200)
    first, moved = noise_of(values), noise_of(scale * (rng.permutation(values) + move))
    assert moved.rms == pytest.approx(scale * first.rms, rel=1e-9)
    assert moved.mean == pytest.approx(scale * (first.mean + move), abs=1e-9 * scale)
    assert moved.peak_to_peak == pytest.approx(scale * first.peak_to_peak, rel=1e-9)


@pytest.mark.parametrize("rms", [0.6, 1.0, 5.0])
def test_rounding_adds_a_twelfth(rms):
    """Codes of noise of s LSB have s² + 1/12; the correction gives s again.

    200 000 samples know the rms to 0.16 %; four times that is allowed.
    """
    adc = converter(12)
    values = rms * adc.lsb * np.random.default_rng(9).standard_normal(200_000) + 0.1234
    found = code_noise(quantize(adc, values)[0], adc)
    assert found.rms == pytest.approx(math.sqrt(rms**2 + 1.0 / 12.0), rel=7e-3)
    assert before_rounding(found.rms) == pytest.approx(rms, rel=7e-3)
    assert found.full_scale == 4096.0
    assert found.effective_resolution == pytest.approx(12.0 - math.log2(found.rms), rel=1e-12)


def test_histogram():
    """Counts of each code, empty ones between included; the normal curve has the same mean."""
    found = code_histogram([5, 7, 5, 8, -1])
    assert found.codes.tolist() == list(range(-1, 9))
    assert found.counts.tolist() == [1, 0, 0, 0, 0, 0, 2, 0, 1, 1]
    codes = np.rint(3.0 * np.random.default_rng(4).standard_normal(100_000) + 17.3).astype(int)
    found = code_histogram(codes)
    expected = found.normal_counts()
    assert np.sum(found.counts) == 100_000
    large = expected > 50.0
    spread = (found.counts - expected)[large] / np.sqrt(expected[large])
    # Normal noise strays from the curve by one standard deviation per code.
    assert 0.5 < np.sqrt(np.mean(spread**2)) < 1.6
    assert code_histogram([4, 4]).normal_counts().tolist() == [2.0]


ADC = converter(8)


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: noise_of([1.0]), "has 1 sample, this measure needs at least 2"),
        (lambda: noise_of([1.0, math.inf]), "sample 1 of the record is inf"),
        (lambda: noise_of([1.0, 2.0], full_scale=0.0), "full scale must be a number above zero"),
        (lambda: noise_of([1.0, 2.0], confidence=95), "confidence must lie between 0 and 1"),
        (lambda: rms_interval(1.0, 1), "at least 2 samples, not 1"),
        (lambda: code_noise([0.5, 1.0], ADC), "codes are whole numbers"),
        (lambda: code_noise([0, 1, 2], ADC), "1 of 3 codes is the lowest one, 0: the noise is"),
        (lambda: code_noise([254, 255], ADC), "the highest one, 255"),
        (lambda: code_histogram([]), "0 samples"),
        (lambda: code_histogram([0, 2**25]), "too far apart for a list"),
        (lambda: before_rounding(0.5), "do not tell the noise below them"),
    ],
)
def test_refusals(call, message):
    """What cannot be told is refused with the reason."""
    with pytest.raises(MeasureError, match=message):
        call()
