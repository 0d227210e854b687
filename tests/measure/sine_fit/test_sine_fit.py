"""Sine fits against the sines put in, and their refusals."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sines import converted, sine

from frontend_sim.errors import MeasureError
from frontend_sim.measure.sine_fit import cramer_rao, fit_sine, fit_sine_at

EXACT = 1e-9
"""Relative accuracy of parameters without noise, limited by rounding of the phases."""


@settings(max_examples=100, deadline=None)
@given(
    cycles=st.floats(1.05, 400.0),
    amplitude=st.floats(1e-6, 1e6),
    phase=st.floats(-3.1, 3.1),
    offset=st.floats(-3.0, 3.0),
)
def test_a_sine_is_recovered(cycles, amplitude, phase, offset):
    """Frequency, amplitude, phase and offset come back, for any of them, from 1 cycle on."""
    values = sine(cycles, 1000, amplitude, phase, offset * amplitude)
    fit = fit_sine(values, rate=1000.0)
    assert fit.frequency == pytest.approx(cycles, rel=EXACT)
    assert fit.amplitude == pytest.approx(amplitude, rel=EXACT)
    assert fit.offset == pytest.approx(offset * amplitude, abs=EXACT * amplitude)
    assert abs(math.remainder(fit.phase - phase, 2.0 * math.pi)) < EXACT
    assert fit.residual_rms < EXACT * amplitude


@settings(max_examples=50, deadline=None)
@given(seed=st.integers(0, 2**32), frequency=st.floats(0.5, 40.0))
def test_irregular_instants(seed, frequency):
    """Instants on no grid serve as well, given a guess of the frequency; phases count from t = 0.

    Frequencies above half the mean rate, 25 Hz, are found too: irregular instants do not fold.
    """
    times = 100.0 + np.sort(np.random.default_rng(seed).uniform(0.0, 10.0, 500))
    values = 0.3 + 2.0 * np.sin(2.0 * np.pi * frequency * times + 0.5)
    fit = fit_sine(values, times=times, frequency=frequency + 0.02)
    assert fit.frequency == pytest.approx(frequency, rel=1e-10)
    assert fit.amplitude == pytest.approx(2.0, rel=EXACT)
    assert fit.values(times) == pytest.approx(values, abs=1e-9)


def test_jittered_instants_need_no_guess():
    """Instants near a grid give a first guess by themselves, and their jitter does not matter."""
    times = np.arange(2000) * 1e-3 + np.random.default_rng(1).uniform(-5e-5, 5e-5, 2000)
    values = np.sin(2.0 * np.pi * 123.4 * times)
    assert fit_sine(values, times=times).frequency == pytest.approx(123.4, rel=1e-10)


@settings(max_examples=50, deadline=None)
@given(scale=st.floats(1e-9, 1e9), move=st.floats(-10.0, 10.0), start=st.integers(0, 200))
def test_scale_offset_and_time_shift(scale, move, start):
    """Scaling scales, adding adds, and starting later turns the phase, by 2 pi f per second."""
    rng = np.random.default_rng(5)
    values = sine(30.3, 1000) + 0.01 * rng.standard_normal(1000)
    first = fit_sine(values, rate=1000.0)
    moved = fit_sine(scale * (values + move), rate=1000.0)
    assert moved.amplitude == pytest.approx(scale * first.amplitude, rel=1e-8)
    assert moved.offset == pytest.approx(scale * (first.offset + move), abs=1e-8 * scale)
    assert moved.sinad == pytest.approx(first.sinad, abs=1e-6)
    times = np.arange(1000) / 1000.0 - start / 1000.0
    shifted = fit_sine(values, times=times)
    turned = first.phase + 2.0 * np.pi * first.frequency * start / 1000.0
    assert abs(math.remainder(shifted.phase - turned, 2.0 * math.pi)) < 1e-6


def test_a_long_record_keeps_its_phase():
    """200 000 cycles in half a million points: the residual is far below an LSB of 24 bits, 1.2e-7.

    A phase formed by a plain product would have lost 2e-11 of a turn at the last point.
    """
    fit = fit_sine(sine(200_003.25, 500_000), rate=5e5)
    assert fit.frequency == pytest.approx(200_003.25, rel=1e-14)
    assert fit.residual_rms < 1e-10


@pytest.mark.parametrize(
    ("bits", "limit"), [(8, 49.926), (12, 74.008), (16, 98.091), (24, 146.255)]
)
def test_sinad_of_the_ideal_quantizer(bits, limit):
    """SINAD of a full-scale sine is 6.0206 N + 1.7609 dB within 0.1 dB, from any record.

    Source: W. R. Bennett 1948 (from memory); numbers from the list of published values. The sine
    does not lie on a bin.
    """
    lsb = 2.0 ** (1 - bits)
    values = sine(2503.37, 65536, amplitude=1.0 - 0.5 * lsb, offset=-0.5 * lsb)
    fit = fit_sine(converted(bits, values), rate=65536.0)
    assert fit.sinad == pytest.approx(limit, abs=0.1)
    assert fit.effective_bits(2.0) == pytest.approx(bits, abs=0.1 / 6.0206)


def test_a_known_frequency():
    """Three parameters are a linear least squares; numpy.linalg.lstsq gives the same."""
    values = sine(12.3, 200) + 0.05 * np.random.default_rng(2).standard_normal(200)
    times = np.arange(200) / 200.0
    turn = 2.0 * np.pi * 12.3 * times
    columns = np.column_stack([np.sin(turn), np.cos(turn), np.ones(200)])
    a, b, c = np.linalg.lstsq(columns, values, rcond=None)[0]
    fit = fit_sine_at(values, 12.3, rate=200.0)
    assert fit.amplitude == pytest.approx(math.hypot(a, b), rel=1e-12)
    assert fit.phase == pytest.approx(math.atan2(b, a), abs=1e-12)
    assert fit.offset == pytest.approx(c, abs=1e-12)
    assert fit.parameters == 3
    rest = values - columns @ [a, b, c]
    assert fit.residual_rms == pytest.approx(np.sqrt(np.mean(rest**2)), rel=1e-10)
    assert fit.noise_rms == pytest.approx(np.sqrt(np.sum(rest**2) / 197), rel=1e-10)


def test_bounds_are_those_of_rife_and_boorstyn():
    """With many cycles the bounds are the closed forms, D. C. Rife and R. R. Boorstyn 1974.

    var(A) = 2 s²/N, var(offset) = s²/N, var(f) = 24 s² / ((2 pi)² A² T² N (N² - 1)), and of the
    phase at the first sample 2 s²/(A² N) + (2 pi centre)² var(f). From memory.
    """
    count, rate, noise, amplitude = 4096, 1e4, 0.1, 2.0
    found = cramer_rao(amplitude, 1234.5, noise, count, phase=0.7, rate=rate)
    frequency = math.sqrt(24.0 / (count * (count**2 - 1))) * noise * rate / (2 * np.pi * amplitude)
    centre = 0.5 * (count - 1) / rate
    phase = math.hypot(math.sqrt(2.0 / count) * noise / amplitude, 2 * np.pi * centre * frequency)
    assert found.amplitude == pytest.approx(math.sqrt(2.0 / count) * noise, rel=1e-3)
    assert found.offset == pytest.approx(noise / math.sqrt(count), rel=1e-3)
    assert found.frequency == pytest.approx(frequency, rel=1e-3)
    assert found.phase == pytest.approx(phase, rel=1e-3)
    known = cramer_rao(amplitude, 1234.5, noise, count, rate=rate, known_frequency=True)
    assert known.frequency == 0.0
    assert known.phase == pytest.approx(math.sqrt(2.0 / count) * noise / amplitude, rel=1e-3)


@pytest.mark.parametrize("cycles", [3.3, 101.7])
def test_a_thousand_records_reach_the_bound(cycles):
    """Over 1000 seeded records the scatter of all four parameters is the Cramér-Rao bound.

    The standard deviation of 1000 draws is known to 2.2 %, so it lies within 9 % (four times that)
    of the bound; the mean within four times bound / sqrt(1000) of the truth.
    """
    rng, count, noise = np.random.default_rng(1057), 500, 0.05
    clean = sine(cycles, count, amplitude=1.0, phase=0.4, offset=0.2)
    records = [clean + noise * rng.standard_normal(count) for _ in range(1000)]
    fits = [fit_sine(record, rate=count, frequency=cycles + 0.2) for record in records]
    bound = cramer_rao(1.0, cycles, noise, count, phase=0.4, rate=count)
    truth = {"amplitude": 1.0, "frequency": cycles, "phase": 0.4, "offset": 0.2}
    for name, true in truth.items():
        errors = np.array([getattr(fit, name) for fit in fits]) - true
        limit = getattr(bound, name)
        assert np.std(errors) == pytest.approx(limit, rel=0.09), name
        assert abs(np.mean(errors)) < 4.0 * limit / math.sqrt(1000.0), name
    own = np.mean([fit.bounds.frequency for fit in fits])
    assert own == pytest.approx(bound.frequency, rel=0.01)


@settings(max_examples=60, deadline=None)
@given(
    bits=st.integers(3, 14),
    reach=st.floats(0.3, 1.0),
    cycles=st.floats(2.0, 300.0),
    noise=st.sampled_from([0.0, 0.3, 3.0]),
    seed=st.integers(0, 1000),
)
def test_an_unclipped_sine_is_not_called_clipped(bits, reach, cycles, noise, seed):
    """Quantized sines of any level, with and without noise, pass."""
    lsb = 2.0 ** (1 - bits)
    values = sine(cycles, 1500, amplitude=reach * (1.0 - lsb))
    values += noise * lsb * np.random.default_rng(seed).standard_normal(1500)
    rounded = lsb * np.rint(values / lsb)
    if noise * lsb < 0.3 * reach:
        fit_sine(rounded, rate=1500.0)


@settings(max_examples=60, deadline=None)
@given(
    bits=st.integers(6, 20),
    cut=st.floats(0.3, 0.95),
    side=st.sampled_from([-1.0, 1.0]),
    noise=st.sampled_from([0.0, 0.01]),
)
def test_a_clipped_sine_is_refused(bits, cut, side, noise):
    """A top or bottom cut by 5 % or more is seen, with the count and the remedy."""
    lsb = 2.0 ** (1 - bits)
    values = sine(20.37, 1000) + noise * np.random.default_rng(3).standard_normal(1000)
    values = side * lsb * np.rint(np.minimum(values, cut) / lsb)
    with pytest.raises(MeasureError, match=r"clipped at the (top|bottom): .* lower the amplitude"):
        fit_sine(values, rate=1000.0)
    with pytest.raises(MeasureError, match=r"clipped at the (top|bottom)"):
        fit_sine_at(values, 20.37, rate=1000.0)


def test_a_few_phases_are_not_called_clipped():
    """A sine at a quarter of the rate shows its extreme value often, without clipping."""
    for share in (4, 6, 12):
        fit = fit_sine_at(sine(1200 // share, 1200, phase=0.0), 1200 / share, rate=1200.0)
        assert fit.amplitude == pytest.approx(1.0, rel=1e-12)


NOISE = np.random.default_rng(8).standard_normal(1000)


@pytest.mark.parametrize(
    ("values", "keys", "message"),
    [
        (sine(3, 15), {"rate": 1.0}, "15 samples, this measure needs at least 16"),
        (sine(0.7, 100), {"rate": 100.0}, "cycles of .* a fit needs at least 1; record at least"),
        (np.ones(100), {"rate": 1.0}, "all samples are equal"),
        (NOISE, {"rate": 1.0}, "no sine stands out"),
        (sine(10, 100), {}, "either the rate of the samples or their instants"),
        (sine(10, 100), {"rate": 1.0, "times": np.arange(100)}, "either the rate"),
        (
            sine(10, 100),
            {"times": np.arange(99)},
            "100 samples need as many instants; given are 99",
        ),
        (sine(10, 100), {"times": np.arange(100)[::-1]}, "instants must increase"),
        (sine(10, 100), {"times": np.arange(100.0) ** 2}, "lie on no grid"),
        (sine(10, 100), {"rate": 100.0, "frequency": -1.0}, "must be a number above zero"),
        (sine(10, 100), {"rate": 100.0, "frequency": 17.4}, "finds no rest|no sine stands out"),
        (sine(10, 100), {"rate": 100.0, "frequency": 0.1}, "the record holds 0.1 cycles"),
    ],
)
def test_refusals_of_the_four_parameter_fit(values, keys, message):
    """What a fit cannot answer is told with the reason and the remedy."""
    with pytest.raises(MeasureError, match=message):
        fit_sine(values, **keys)


def test_refusals_of_the_three_parameter_fit():
    """Too few points or cycles, and instants that only meet the zeros of the sine."""
    with pytest.raises(MeasureError, match="at least 6"):
        fit_sine_at(sine(1, 5), 1.0, rate=5.0)
    with pytest.raises(MeasureError, match=r"at least 0\.5"):
        fit_sine_at(sine(0.3, 100), 0.3, rate=100.0)
    with pytest.raises(MeasureError, match=r"cannot tell .* apart"):
        fit_sine_at((-1.0) ** np.arange(100), 50.0, rate=100.0)
    with pytest.raises(MeasureError, match="no sine of 10 Hz"):
        fit_sine_at(np.zeros(100), 10.0, rate=100.0)
    with pytest.raises(MeasureError, match="the amplitude must be a number above zero"):
        cramer_rao(0.0, 10.0, 1.0, 100, rate=100.0)
    with pytest.raises(MeasureError, match="cannot tell amplitude, phase"):
        cramer_rao(1.0, 50.0, 1.0, 100, rate=100.0)
