"""Linearity that was put into a converter is found again within the confidence told."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sines import converter

from frontend_sim.converter.adc import Adc
from frontend_sim.converter.quantizer import quantize
from frontend_sim.errors import MeasureError
from frontend_sim.measure.linearity import (
    ramp_linearity,
    ramp_samples_needed,
    sine_linearity,
    sine_samples_needed,
)

ADC = converter(8)


def bent(seed: int, spread: float = 0.5) -> np.ndarray:
    """Return 255 levels of a converter of 8 bits with random widths, code 100 missing.

    The first and the last level are those of the ideal converter.
    """
    widths = 1.0 + np.random.default_rng(seed).uniform(-spread, spread, 254)
    widths[99] = 0.0
    widths *= 254.0 * ADC.lsb / np.sum(widths)
    return ADC.low + 0.5 * ADC.lsb + np.concatenate([[0.0], np.cumsum(widths)])


def codes(levels: np.ndarray, voltages: np.ndarray) -> np.ndarray:
    """Return the codes of a converter with these levels."""
    return np.searchsorted(levels, voltages, side="right")


def end_point(levels: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return true DNL and end-point INL."""
    lsb = (levels[-1] - levels[0]) / (len(levels) - 1)
    return np.diff(levels) / lsb - 1.0, (levels - levels[0]) / lsb - np.arange(len(levels))


def best_fit(levels: np.ndarray) -> np.ndarray:
    """Return the true best-fit INL by the normal equations of a line."""
    number = np.arange(len(levels), dtype=float)
    columns = np.column_stack([number, np.ones_like(number)])
    slope, start = np.linalg.solve(columns.T @ columns, columns.T @ levels)
    return (levels - start) / slope - number


def test_samples_of_a_sine_histogram():
    """8 bits, 0.1 LSB, 99 %: about 268 000 samples. Source: J. Doernberg 1984 (from memory).

    The paper rounds z to 2.58, which gives 267 700; the exact quantile gives 266 806.
    """
    assert sine_samples_needed(8, 0.1, 0.99) == pytest.approx(268_000, rel=0.005)
    assert ramp_samples_needed(8, 0.1, 0.99) == pytest.approx(2.5758**2 * 256 / 0.01, rel=1e-4)


def test_that_many_samples_keep_the_promise():
    """With so many samples of an ideal converter at random phases, 99 % of the DNL are below 0.1.

    Over ten records, 2540 codes: the worst codes, in the middle, keep 0.1 LSB with 99 %, the others
    with more; 1.5 % is more than six standard deviations above the rate of the worst.
    """
    rng = np.random.default_rng(1984)
    levels = ADC.low + ADC.lsb * (np.arange(255) + 0.5)
    wrong = middle = 0
    for _ in range(10):
        phases = rng.uniform(0.0, 2.0 * np.pi, sine_samples_needed(8, 0.1, 0.99))
        found = sine_linearity(codes(levels, 1.01 * np.sin(phases)), ADC)
        wrong += np.count_nonzero(np.abs(found.dnl) > 0.1)
        middle += np.count_nonzero(np.abs(found.dnl[107:147]) > 0.1)
    assert wrong <= 0.015 * 2540
    assert middle <= 0.03 * 400


@pytest.mark.parametrize("seed", range(5))
def test_by_sine(seed):
    """DNL and INL put in come back within the confidence, at random phases, one code missing.

    99 % intervals of 254 codes hold at least 247 (97 %; more than three standard deviations).
    """
    levels, rng = bent(seed), np.random.default_rng(100 + seed)
    phases = rng.uniform(0.0, 2.0 * np.pi, 300_000)
    voltages = 0.003 + 1.02 * np.sin(phases)
    found = sine_linearity(codes(levels, voltages), ADC, amplitude=1.02, offset=0.003)
    dnl, inl = end_point(levels)
    assert np.array_equal(found.codes, np.arange(1, 255))
    assert np.mean(np.abs(found.dnl - dnl) <= found.dnl_confidence) >= 0.97
    assert np.mean(np.abs(found.inl_end_point - inl) <= found.inl_confidence) >= 0.97
    assert np.max(found.inl_confidence) < 1.1
    assert found.missing == (100,)
    assert found.dnl[99] == pytest.approx(-1.0, abs=1e-12)
    assert found.worst_dnl == found.dnl[np.argmax(np.abs(found.dnl))]
    assert abs(found.worst_inl) == pytest.approx(np.max(np.abs(inl)), abs=1.0)


def test_by_sine_with_even_phases():
    """Evenly spread phases know each level far better: INL to 0.02 LSB from 2^20 samples."""
    levels, count = bent(7), 2**20
    phases = 2.0 * np.pi * (np.arange(count) * 3571 % count + 0.4) / count
    found = sine_linearity(codes(levels, 1.05 * np.sin(phases)), ADC)
    dnl, inl = end_point(levels)
    assert np.max(np.abs(found.dnl - dnl)) < 0.02
    assert np.max(np.abs(found.inl_end_point - inl)) < 0.02
    assert np.max(np.abs(found.inl_best_fit - best_fit(levels))) < 0.02
    assert np.all(np.abs(found.dnl - dnl) <= found.dnl_confidence)


def test_by_ramp():
    """A slow ramp finds each level to a part of its step: 2.2 V in 100 000 steps, 1/355 LSB."""
    levels = bent(3)
    voltages = np.linspace(-1.1, 1.1, 100_000)
    found = ramp_linearity(codes(levels, voltages), ADC, span=(-1.1, 1.1))
    dnl, inl = end_point(levels)
    assert np.max(np.abs(found.dnl - dnl)) < 0.006
    assert np.max(np.abs(found.inl_end_point - inl)) < 0.006
    assert np.max(np.abs(found.inl_best_fit - best_fit(levels))) < 0.006
    falling = ramp_linearity(codes(levels, voltages[::-1]), ADC, span=(-1.1, 1.1))
    assert np.array_equal(falling.dnl, found.dnl)


@pytest.mark.parametrize("noise", [0.0, 0.05, 0.3, 2.0])
@pytest.mark.parametrize("way", [1, -1])
def test_confidence_of_a_ramp_in_order(noise, way):
    """98 % of all levels and widths lie within the 99 % interval, which a slow ramp makes narrow.

    With s = 100 samples for each code and ``noise`` LSB rms, sum min(p, 1 - p) = 2 noise s / sqrt(2
    pi) samples lie on the wrong side of a level.
    """
    inside, widths = [], []
    for seed in range(4):
        levels, rng = bent(seed), np.random.default_rng(40 + seed)
        voltages = np.linspace(-1.02, 1.02, 26_000)[::way]
        voltages = voltages + noise * ADC.lsb * rng.standard_normal(len(voltages))
        found = ramp_linearity(codes(levels, voltages), ADC, span=(-1.02, 1.02))
        dnl, inl = end_point(levels)
        first = int(found.codes[0]) - 1
        if first or len(found.inl_end_point) != len(inl):
            continue
        inside += list(np.abs(found.inl_end_point - inl) <= found.inl_confidence)
        widths += list(np.abs(found.dnl - dnl) <= found.dnl_confidence)
        wrong = 2.0 * noise * 100.0 / np.sqrt(2.0 * np.pi)
        bound = (1.0 + 2.576 * np.sqrt(2.0 * wrong)) / 100.0
        assert np.median(found.inl_confidence) == pytest.approx(bound, rel=0.15)
    assert np.mean(inside) >= 0.98
    assert np.mean(widths) >= 0.98


def test_confidence_of_a_ramp_at_random_instants():
    """Without order the binomial interval counts, as for a sine, and no narrower one."""
    rng = np.random.default_rng(5)
    found = ramp_linearity(codes(bent(2), rng.uniform(-1.1, 1.1, 100_000)), ADC)
    share = np.cumsum(np.full(255, 1.0 / 281.6)) + 12.8 / 281.6
    expected = 2.576 * np.sqrt(share * (1.0 - share) / 100_000) * 281.6
    np.testing.assert_allclose(found.inl_confidence[100:150], expected[100:150], rtol=0.02)


@pytest.mark.parametrize("rounding", ["nearest", "down"])
@pytest.mark.parametrize("low", [-2.0, 0.0])
def test_gain_and_offset_are_those_of_the_converter(rounding, low):
    """Gain error and offset of an ``Adc`` come back by ramp and by sine, by both lines.

    A ramp of 1/400 LSB per step leaves 1/800 LSB at each end: 1e-5 in gain, 1.6e-5 V of 16 mV.
    """
    adc = Adc(
        rate=1.0, bits=8, low=low, high=low + 4.0, gain_error=0.013, offset=-0.021,
        rounding=rounding,
    )  # fmt: skip
    span = (low - 0.1, low + 4.2)
    ramp = np.linspace(*span, 400 * 256)
    made = quantize(adc, (1.0 + adc.gain_error) * ramp + adc.offset)[0]
    found = ramp_linearity(made, adc, span=span)
    for line in (found.end_point, found.best_fit):
        assert line.gain_error == pytest.approx(0.013, abs=2e-5)
        assert line.offset == pytest.approx(-0.021, abs=1e-4)
    count = 2**19
    phases = 2.0 * np.pi * (np.arange(count) * 1237 % count + 0.5) / count
    wave = low + 2.0 + 2.2 * np.sin(phases)
    made = quantize(adc, (1.0 + adc.gain_error) * wave + adc.offset)[0]
    found = sine_linearity(made, adc, amplitude=2.2, offset=low + 2.0)
    for line in (found.end_point, found.best_fit):
        assert line.gain_error == pytest.approx(0.013, abs=2e-4)
        assert line.offset == pytest.approx(-0.021, abs=6e-4)
    assert np.max(np.abs(found.inl_end_point)) < 0.03


@settings(max_examples=40, deadline=None)
@given(
    amplitude=st.floats(0.2, 1.6),
    offset=st.floats(-0.1, 0.1),
    code=st.sampled_from(["straight-binary", "twos-complement"]),
)
def test_an_ideal_converter_is_straight(amplitude, offset, code):
    """An ideal converter has no INL whatever part of its range the sine covers.

    Codes at the ends that were not reached are counted, not called missing.
    """
    adc = Adc(rate=1.0, bits=6, low=-1.0, high=1.0, code=code)
    count = 2**17
    phases = 2.0 * np.pi * (np.arange(count) * 997 % count + 0.3) / count
    made = quantize(adc, offset + amplitude * np.sin(phases))[0]
    found = sine_linearity(made, adc)
    assert np.max(np.abs(found.dnl)) < 0.05
    assert np.max(np.abs(found.inl_end_point)) < 0.05
    assert found.missing == ()
    assert found.below == np.min(made) - adc.lowest_code
    assert found.above == adc.highest_code - np.max(made)
    assert found.end_point is None


def test_dead_codes_at_the_ends():
    """A converter that stops at code 5 and at code 250 has 5 dead codes at each end."""
    ramp = np.linspace(-1.1, 1.1, 50_000)
    found = ramp_linearity(np.clip(quantize(ADC, ramp)[0], 5, 250), ADC)
    assert (found.below, found.above) == (5, 5)
    assert (found.codes[0], found.codes[-1]) == (6, 249)
    assert np.max(np.abs(found.dnl)) < 0.02
    assert found.missing == ()


GOOD = np.tile(np.arange(256), 20)


@pytest.mark.parametrize(
    ("made", "keys", "message"),
    [
        (GOOD + 1, {}, "codes from 1 to 256 do not come from a converter of 8 bits"),
        (np.full(1000, 7), {}, "only codes 7 to 7 were reached"),
        (np.arange(256), {}, "254 samples over the 254 codes .* take at least 2540"),
        (GOOD + 0.5, {}, "codes are whole numbers"),
        (GOOD * 1e20, {}, "no converter gives them"),
        ([], {}, "0 samples"),
        (GOOD, {"confidence": 1.0}, "the confidence must lie between 0 and 1"),
    ],
)
@pytest.mark.parametrize("measure", [sine_linearity, ramp_linearity])
def test_refusals(measure, made, keys, message):
    """Codes that cannot be judged are refused, with the number needed."""
    with pytest.raises(MeasureError, match=message):
        measure(made, ADC, **keys)


def test_refusals_of_the_levels_of_the_signal():
    """Gain and offset need all that is known of the signal; histograms have a size."""
    with pytest.raises(MeasureError, match="both the amplitude and the offset"):
        sine_linearity(GOOD, ADC, amplitude=1.0)
    with pytest.raises(MeasureError, match="empty or reversed"):
        ramp_linearity(GOOD, ADC, span=(1.0, -1.0))
    with pytest.raises(MeasureError, match="1 to 24 bits, not of 32"):
        ramp_linearity(GOOD, converter(32))
    with pytest.raises(MeasureError, match="1 to 24 bits"):
        sine_samples_needed(30, 0.1)
    with pytest.raises(MeasureError, match="tolerance must be a number above zero"):
        ramp_samples_needed(8, 0.0)


@pytest.mark.parametrize("noise", [0.0, 1.0])
@pytest.mark.parametrize(
    ("frequency", "most"), [(1000.0 * math.sqrt(2.0), 0.45), (12345.678, 7.0), (37.2, 5.0)]
)
def test_the_interval_of_a_sine_is_that_of_its_phases(
    frequency: float, most: float, noise: float
) -> None:
    """An ideal converter has no INL: what is found lies within its interval, for 98 % of levels.

    An even row of phases tells ten times more than random ones of the same number, 2.6 LSB. One
    that repeats after 81 samples, or ends within a cycle, tells less: there the interval of random
    phases holds 80 % of the levels, or fewer.
    """
    count, lsb = 50_000, 2.5 / 256.0
    adc = Adc(rate=100e3, bits=8, high=2.5)
    time = np.arange(count) / adc.rate
    values = 1.25 + 1.4 * np.sin(2.0 * np.pi * frequency * time + 0.3)
    noisy = values + noise * lsb * np.random.default_rng(3).standard_normal(count)
    codes = np.clip(np.floor(noisy / lsb + 0.5), 0, 255).astype(int)
    found, chance = sine_linearity(codes, adc, values=values), sine_linearity(codes, adc)
    held = np.mean(np.abs(found.inl_best_fit) <= found.inl_confidence)
    assert held >= 0.98
    assert np.mean(np.abs(found.dnl) <= found.dnl_confidence) >= 0.98
    assert np.max(found.inl_confidence) < most
    assert np.max(chance.inl_confidence) == pytest.approx(2.6, abs=0.02)
    if frequency != 1000.0 * math.sqrt(2.0):
        assert np.mean(np.abs(chance.inl_end_point) <= chance.inl_confidence) < 0.85


def test_phases_that_come_back_early_blame_no_code() -> None:
    """At 641.031 Hz and 100 kHz 156 phases nearly come back: some codes of 256 get no sample.

    The phases lie as evenly over the range as random ones do, D sqrt(N) = 1.1, but not over a code:
    the DNL of an ideal converter shows as 1 LSB, and the interval must hold that.
    """
    count, lsb = 30_000, 2.5 / 256.0
    adc = Adc(rate=100e3, bits=8, high=2.5)
    values = 1.25 + 1.3 * np.sin(2.0 * np.pi * 641.031 * np.arange(count) / adc.rate)
    found = sine_linearity(np.clip(np.floor(values / lsb + 0.5), 0, 255).astype(int), adc,
                           values=values)  # fmt: skip
    assert len(found.missing) > 20
    assert np.all(np.abs(found.dnl) <= found.dnl_confidence)
